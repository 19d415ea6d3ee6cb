"""Each way to be wrong: a tiny change of a good case, the line at which it is told, and a word of the message."""

from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from bandbook import cases, workflow
from bandbook.errors import Problem
from bandbook.settings import read_settings

MakeBook = Callable[..., Path]

#: name: (old text, new text, line, words of the message)
BAD: dict[str, tuple[str, str, int, str]] = {
    "syntax": ('lattice = "chain"', "lattice = chain", 8, "a text without quotes"),
    "decimal-comma": ('beta = "@set.beta"', "beta = -2,85", 9, "write beta = -2.85"),
    "double-key": ('beta = "@set.beta"', 'beta = "@set.beta"\nbeta = 1.0', 10, "stands twice"),
    "unknown-key": ('beta = "@set.beta"', 'bata = "@set.beta"', 9, 'did you mean "beta"?'),
    "missing-key": ('beta = "@set.beta"\n', "", 7, 'the key "beta" is missing'),
    "wrong-type": ('beta = "@set.beta"', 'beta = "strong"', 9, "a finite number in eV"),
    "boolean-for-number": ('beta = "@set.beta"', "beta = true", 9, "found the boolean true"),
    "not-a-number": ('beta = "@set.beta"', "beta = nan", 9, "found the number nan"),
    "infinite": ('beta = "@set.beta"', "beta = -inf", 9, "found the number -inf"),
    "zero": ('beta = "@set.beta"', "beta = 0.0", 9, "not 0"),
    "out-of-range": ("cells = 4", "cells = 0", 14, "1 to 1e+07"),
    "unknown-set": ("@set.beta", "@sat.beta", 9, 'did you mean "set"?'),
    "unknown-value": ("@set.beta", "@set.bata", 9, 'did you mean "beta"?'),
    "malformed-reference": ("@set.beta", "@set", 9, '"@set.name"'),
    "unknown-lattice": ('"chain"', '"chian"', 8, 'did you mean "chain"?'),
    "unknown-question": ('"levels"\ncells', '"levles"\ncells', 13, 'did you mean "levels"?'),
    "unknown-quantity": ("levels.homo", "levels.hommo", 18, '"homo"'),
    "unknown-study": ("levels.homo", "level.homo", 18, 'did you mean "levels"?'),
    "unknown-source": ('note = "closed form"', 'source = "know1961"', 18, 'did you mean "known1961"?'),
    "no-source": (', note = "closed form"', "", 18, "neither source nor note"),
    "negative-tolerance": ("within = 1e-6", "within = -1e-6", 18, "0 or more"),
    "wrong-unit": ('unit = "beta"', 'unit = "eV"', 18, '"beta"'),
    "second-unnamed-system": (
        "```toml study", '```toml system\nlattice = "chain"\nbeta = -1.0\n```\n\n```toml study', 7, "a system without a name",
    ),
    "no-system": ('```toml system\nlattice = "chain"\nbeta = "@set.beta"\n```\n', "", 1, "there is no system"),
    "unclosed-fence": ('note = "closed form" }\n```', 'note = "closed form" }', 17, "is not closed"),
    "misspelt-fence": ("```toml study", "```toml stuby", 12, 'did you mean "toml study"'),
    "unknown-site": ("cells = 4", 'cells = 4\nadd = ["B"]', 15, 'unknown site "B"'),
    "ring-with-add": ("cells = 4", 'cells = 4\nends = "ring"\nadd = ["A"]', 16, "a ring has no end"),
    "change-of-no-kind": ("cells = 4", 'cells = 4\nchanges = [\n  { cell = 0, site = "A" },\n]', 16, "a change of neither"),
    "two-forms": ('beta = "@set.beta"', 'beta = "@set.beta"\nbuilt_by = "f"', 10, "two forms at once"),
    "no-such-builder": ('lattice = "chain"\nbeta = "@set.beta"', 'built_by = "wall"', 8, "no workings block defines"),
    "path-out-of-book": ("title: A chain", "title: A chain\nuses: [../../secret.txt]", 3, "leads out of the book"),
    "missing-file": ("title: A chain", "title: A chain\nuses: [data/none.csv]", 3, "there is no file"),
    "no-title": ("title: A chain", "tags: [a]", 1, 'the key "title" is missing'),
    "unknown-front-key": ("title: A chain", "title: A chain\ntittle: again", 3, 'did you mean "title"?'),
    "front-syntax": ("title: A chain", "title: [A chain", 3, "is no YAML"),
    "unknown-state": ("title: A chain", "title: A chain\nstate: done", 3, '"finished"'),
    "unknown-case": ("title: A chain", "title: A chain\nsee: [b]", 3, 'unknown case "b"'),
    "workings-syntax": ("Words before.", "```python workings\nx = (\n```", 6, "no Python"),
    "electrons": ('beta = "@set.beta"', 'beta = "@set.beta"\nelectrons = 5', 7, "0 to 2 fit"),
    "unicode-name": ('beta = "@set.beta"', 'beta = "@set.beta"\nname = "Ölig"', 10, "a letter first"),
}  # fmt: skip


def problems_of(root: Path) -> tuple[Problem, ...]:
    return workflow.check(read_settings(None, root)).problems


def test_a_good_case_has_none(make_book: MakeBook) -> None:
    assert problems_of(make_book()) == ()


@pytest.mark.parametrize("name", BAD)
def test_a_mistake_is_told_at_its_line(name: str, make_book: MakeBook, case_text: str) -> None:
    old, new, line, words = BAD[name]
    assert old in case_text
    problems = problems_of(make_book({"a": case_text.replace(old, new)}))
    assert [problem.file for problem in problems] == ["content/cases/a.md"] * len(problems)
    told = [problem for problem in problems if words in str(problem)]
    assert told, [str(problem) for problem in problems]
    assert (
        told[0].line in {line, line - 1, line + 1}
        if name in {"no-such-builder", "front-syntax"}
        else told[0].line == line
    )


def test_the_exact_text_of_one(make_book: MakeBook, case_text: str) -> None:
    problems = problems_of(make_book({"a": case_text.replace('beta = "@set.beta"', 'bata = "@set.beta"')}))
    assert [str(problem) for problem in problems] == [
        'content/cases/a.md:7: the key "beta" is missing; it is resonance integral between neighbours: a finite number in'
        " eV, not 0; add beta = …",
        'content/cases/a.md:9: bata: unknown key "bata"; keys here are lattice, beta, alpha, period, name, electrons,'
        ' charge, beta_unit; did you mean "beta"?',
    ]


def test_five_mistakes_tell_five(make_book: MakeBook, case_text: str) -> None:
    text = case_text
    for name in ("unknown-front-key", "decimal-comma", "out-of-range", "unknown-source", "negative-tolerance"):
        old, new, _, _ = BAD[name]
        text = text.replace(old, new)
    assert len(problems_of(make_book({"a": text}))) >= 5


@pytest.mark.parametrize(
    ("data", "line", "words"),
    [(b"", 1, "the file is empty"), (b"---\ntitle: \xff\n---\n", 2, "no UTF-8"), (b"\n \n", 1, "the file is empty")],
)
def test_a_file_that_is_no_text(data: bytes, line: int, words: str, make_book: MakeBook) -> None:
    root = make_book()
    (root / "content/cases/a.md").write_bytes(data)
    (problem,) = problems_of(root)
    assert (problem.line, words in str(problem)) == (line, True)


def test_line_ends_and_byte_order_mark_do_not_matter(make_book: MakeBook, case_text: str) -> None:
    root = make_book()
    (root / "content/cases/a.md").write_bytes(b"\xef\xbb\xbf" + case_text.replace("\n", "\r\n").encode())
    assert problems_of(root) == ()


def test_an_id_of_capital_letters(make_book: MakeBook, case_text: str) -> None:
    (problem,) = problems_of(make_book({"Bad_Name": case_text}))
    assert "rename the file" in str(problem)


@pytest.mark.parametrize(
    ("text", "line", "words"),
    [
        ('title = "t"\nnote = "n"\n[values]\nbeta = { value = "x" }\n', 4, "a finite number"),
        ('title = "t"\n[values]\nbeta = { value = 1.0 }\n', 1, "neither source nor note"),
        ('title = "t"\nnote = "n"\n[values]\nbeta = { value = 1.0, u = -1 }\n', 4, "0 or more"),
        ('note = "n"\n', 1, "title"),
        ('title = "t"\nsource = "none"\n', 2, "unknown source"),
        ("title = t\n", 1, "without quotes"),
    ],
)
def test_a_bad_parameter_set(text: str, line: int, words: str, make_book: MakeBook) -> None:
    root = make_book({"a": "---\ntitle: t\n---\n"})
    (root / "content/parameters/set.toml").write_text(text, encoding="utf-8")
    problems = [problem for problem in problems_of(root) if problem.file.endswith("set.toml")]
    assert [(problem.line, words in str(problem)) for problem in problems] == [(line, True)]


def mutated(text: str, edits: list[tuple[int, str, str]]) -> str:
    for place, kind, extra in edits:
        at = place % (len(text) + 1)
        length = 1 + place % 7
        text = {
            "insert": text[:at] + extra + text[at:],
            "delete": text[:at] + text[at + length :],
            "replace": text[:at] + extra + text[at + length :],
            "repeat": text[:at] + text[at : at + 40] + text[at:],
        }[kind]
    return text


EDITS = st.lists(
    st.tuples(
        st.integers(0, 4000),
        st.sampled_from(["insert", "delete", "replace", "repeat"]),
        st.text(alphabet=st.sampled_from(list("\n`~{}[]\"=,.@#-0159eE:\\'äβ\x00 \ttrue")), max_size=6),
    ),
    min_size=1,
    max_size=6,
)
BOOK: dict[str, cases.Book] = {}


@settings(max_examples=1000, deadline=None, suppress_health_check=list(HealthCheck))
@given(edits=EDITS)
def test_a_thousand_mutations_end_in_messages_with_lines(
    edits: list[tuple[int, str, str]], make_book: MakeBook, case_text: str
) -> None:
    if not BOOK:
        root = make_book()
        BOOK["book"] = cases.read_book(root, root / "content")
    book = BOOK["book"]
    case = cases.case_of(mutated(case_text, edits), identity="a", file="content/cases/a.md")
    checked = cases.check_case(case, book, workflow._Vocabulary())  # noqa: SLF001 - the one the commands use
    assert (checked.parameters is None) == bool(checked.problems)
    for problem in checked.problems:
        assert problem.file == "content/cases/a.md"
        assert problem.line >= 1
        assert str(problem).count("; ") >= 2
