"""A thousand damaged cases, hundreds of other damaged files: never a traceback, and every problem has a file and a line of it."""

from functools import cache
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from bandbook import cases, workflow
from bandbook.errors import Problem

CHAIN = """---
title: A chain
tags: [polyene, "four"]
state: active
authors:
  - A. Author
see: [known]
---

Words before, `code`, and a list:

- ~~~text
  left alone
  ~~~

```toml system
name = "one"
lattice = "alternating-chain"
beta_inside = "@set.beta"
beta_between = -2.15    # eV
electrons = 2
```

```toml system
name = "two"
vectors = [[2.46, 0, 0]]
sites = [
  { name = "A", at = [0.0, 0, 0], alpha = "@set.alpha" },
  { name = "B", at = [1.36, 0, 0] },
]
[[couplings]]
from = "A"
to = "B"
beta = -2.85
[[couplings]]
from = "B"
to = "A"
cell = [1]
beta = -2.15
overlap = 0.1
```

~~~~toml study
question = "levels"
system = "one"
cells = 4
changes = [
  { cell = 1, site = "A", alpha = 0.5 },
  { cell = 3, from = "A", to = "B", beta = -2.0 },
]
~~~~

```toml reference
"levels.homo" = { value = -1.2, within = 1e-6, source = "known1961" }
levels.gap = { value = 0.5, within = 1.0, unit = "beta", note = "made up" }
```
"""
WALL = """---
title: A wall
aim: >
  what a wall
  does
private: false
---

```python workings
def wall(half: int) -> object:
    return {"half": half}
```

```toml system
built_by = "wall"
with = { half = 3, betas = [-2.85, "@set.beta"] }
```

```toml study
question = "length_series"
name = "series"
cells = "1..6"
fits = ["inverse", "kuhn"]
```

```toml recorded
"series.gap_4" = { value = 1.2, note = "an old notebook" }
```

```python workings
report("half", 3.0, meaning=f"{results}")
```

<!--
```toml study
question = "bands"
```
-->
"""
SET = """title = "A set"
source = "known1961"
[values]
alpha = 0.0
beta = { value = -2.5, u = 0.1, unit = "eV", meaning = "resonance integral", note = "made up" }
[atoms]
C = { h = 0.0, electrons = 1 }
"N:" = { h = { value = 1.5, u = 0.1 }, electrons = 2, note = "memory" }
[[bond]]
between = ["C", "C"]
k = 1.0
[[bond]]
between = ["C", "N:"]
order = "aromatic"
k = { value = 1.1, u = 0.05 }
"""
BIB = """@book{known1961, author = {Author, A. and H{\\"u}ckel, E. and others}, title = {A {Book}}, year = 1961}
@article{other,
  author = "Other, O.", title = "An " # "article", month = jan, pages = {1--2},
}
@string{x = "y"}
"""

PIECES = st.one_of(
    st.text(alphabet="\n`~{}[]\"=,.@#-−0159eE:\\'äβ\x00\t\r\ufeff\u2028 truexyz", max_size=6),
    st.sampled_from(["```toml study\n", "```\n", "---\n", "\n\n", "nan", "-inf", "1e999", "9" * 400, "0x" + "f" * 4000, "[" * 600,
                     "{a=" * 40, '"""', "'''", "2026-13-45", "07:32:00", "@set.x", "<!--", "&a [*a]", "!!python/x ", "%", "name = 'β'\n",
                     'question = "bands"\n', "[[sites]]\n", "\\ud800", "\ud7ff", "(" * 300, "lambda:" * 60]),
)  # fmt: skip
EDIT = st.tuples(
    st.sampled_from(["insert", "delete", "replace", "repeat", "move", "drop line", "double line", "indent"]),
    st.integers(0, 10_000),
    st.integers(0, 10_000),
    PIECES,
)
EDITS = st.lists(EDIT, min_size=1, max_size=5)
HUNDREDS = settings(max_examples=200, deadline=None, suppress_health_check=list(HealthCheck), derandomize=True)
THOUSAND = settings(HUNDREDS, max_examples=1000)
FIFTY = settings(HUNDREDS, max_examples=50)


def mutated(text: str, edits: list[tuple[str, int, int, str]]) -> str:
    for kind, one, other, piece in edits:
        at, to = sorted((one % (len(text) + 1), other % (len(text) + 1)))
        short = min(to, at + 1 + other % 30)
        lines = text.split("\n")
        row = one % len(lines)
        text = {
            "insert": text[:at] + piece + text[at:],
            "delete": text[:at] + text[short:],
            "replace": text[:at] + piece + text[short:],
            "repeat": text[:at] + text[at:short] * 2 + text[short:],
            "move": text[:at] + text[short:to] + text[at:short] + text[to:],
            "drop line": "\n".join(lines[:row] + lines[row + 1 :]),
            "double line": "\n".join([*lines[:row], lines[row], *lines[row:]]),
            "indent": "\n".join([*lines[:row], " " * (other % 6) + lines[row], *lines[row + 1 :]]),
        }[kind]
    return text


@cache
def book() -> cases.Book:
    """Return a book without a folder of its own: two sets, one source, one other case."""
    root = Path(__file__).parent / "no such folder"
    values = {"alpha": cases.ParameterValue(0.0), "beta": cases.ParameterValue(-2.5)}
    return cases.Book(
        root,
        root / "content",
        (cases.Case("known", "content/cases/known.md"),),
        {"set": cases.ParameterSet("set", "content/parameters/set.toml", values=values)},
        cases.Sources({"known1961": cases.Source("known1961", "A. Author")}),
    )


def placed(problems: tuple[Problem, ...], file: str, text: str) -> None:
    """Hold every problem to its word."""
    n_lines = text.replace("\r\n", "\n").replace("\r", "\n").count("\n") + 1
    for problem in problems:
        assert problem.file == file
        assert 1 <= problem.line <= n_lines, str(problem)
        assert str(problem).isprintable()
        assert all((problem.found, problem.allowed, problem.remedy))
    assert [problem.line for problem in problems] == sorted(problem.line for problem in problems)


@THOUSAND
@given(base=st.sampled_from([CHAIN, WALL]), edits=EDITS)
def test_a_thousand_damaged_cases(base: str, edits: list[tuple[str, int, int, str]]) -> None:
    text = mutated(base, edits).replace("\r\n", "\n").replace("\r", "\n")
    case = cases.case_of(text, identity="a", file="content/cases/a.md")
    checked = cases.check_case(case, book(), workflow._Vocabulary())  # noqa: SLF001 - the one that the commands use
    assert (checked.parameters is None) == bool(checked.problems)
    placed(checked.problems, "content/cases/a.md", text)


@pytest.mark.parametrize("base", [CHAIN, WALL])
def test_the_undamaged_ones_are_good(base: str) -> None:
    case = cases.case_of(base, identity="a", file="a.md")
    assert cases.check_case(case, book(), workflow._Vocabulary()).problems == ()  # noqa: SLF001 - as above


@HUNDREDS
@given(edits=EDITS, cut=st.integers(0, 2000), byte=st.integers(0, 255))
def test_damaged_files(tmp_path: Path, edits: list[tuple[str, int, int, str]], cut: int, byte: int) -> None:
    data = mutated(CHAIN, edits[:2]).encode("utf-8", "surrogatepass")
    at = cut % (len(data) + 1)
    path = tmp_path / "a.md"
    path.write_bytes(data[:at] + bytes([byte]) + data[at:])
    case = cases.read_case(path, identity="a", file="content/cases/a.md")
    placed(case.problems, "content/cases/a.md", path.read_bytes().decode("latin-1"))


@HUNDREDS
@given(edits=EDITS)
def test_damaged_sets(tmp_path: Path, edits: list[tuple[str, int, int, str]]) -> None:
    text = mutated(SET, edits)
    (tmp_path / "set.toml").write_text(text, encoding="utf-8", newline="")
    parameters = cases.read_parameter_set(tmp_path / "set.toml", "content/parameters/set.toml")
    placed(parameters.problems, "content/parameters/set.toml", text)
    shared = cases.Book(tmp_path, tmp_path, sets={"set": parameters}, sources=cases.Sources())
    placed(shared.problems, "content/parameters/set.toml", text)


@FIFTY
@given(edits=EDITS)
def test_damaged_bibliographies(tmp_path: Path, edits: list[tuple[str, int, int, str]]) -> None:
    text = mutated(BIB, edits)
    (tmp_path / "sources.bib").write_text(text, encoding="utf-8", newline="")
    sources = cases.read_sources(tmp_path / "sources.bib", "content/sources.bib")
    placed(sources.problems, "content/sources.bib", text)
    for source in sources.entries.values():
        assert 1 <= source.line <= text.count("\n") + text.count("\r") + 1
