"""Parameter sets and sources: what they hold, and each way to be wrong with its line."""

from pathlib import Path

import pytest

from bandbook import cases
from bandbook.cases import ParameterValue

GOOD = """title = "pi parameters"
source = "known1961"
[values]
alpha = 0.0
beta = { value = -2.7, u = 0.15, unit = "eV", meaning = "resonance integral", note = "memory" }
[atoms]
C = { h = 0.0, electrons = 1 }
"N:" = { h = { value = 1.5, u = 0.1 }, electrons = 2, note = "memory" }
[[bond]]
between = ["C", "C"]
k = 1.0
[[bond]]
between = ["C", "C"]
order = "double"
k = { value = 1.1, u = 0.05 }
"""
BIB = """% the sources
@article{known1961,
  author = {H{\\"u}ckel, Erich and de la Vall{\\'e}e, A. and Smith, Jr., John}, title = {On {B}enzol},
  journal = {Z. Phys.}, volume = {70}, pages = {204--286}, year = 1931,
}
@book{other, editor = {B. Editor}, title = "A book", publisher = {Wiley \\& Sons}}
"""


def read(folder: Path, text: str, name: str = "set") -> cases.ParameterSet:
    (folder / f"{name}.toml").write_text(text, encoding="utf-8")
    return cases.read_parameter_set(folder / f"{name}.toml", f"content/parameters/{name}.toml")


def test_a_good_set(tmp_path: Path) -> None:
    found = read(tmp_path, GOOD)
    assert found.problems == ()
    assert (found.name, found.title, found.source) == ("set", "pi parameters", "known1961")
    assert found.values == {
        "alpha": ParameterValue(0.0, source="known1961", line=4),
        "beta": ParameterValue(-2.7, 0.15, "eV", "resonance integral", note="memory", line=5),
    }
    assert {name: (row["h"], row["h_u"], row["electrons"]) for name, row in found.atoms.items()} == {
        "C": (0.0, None, 1),
        "N:": (1.5, 0.1, 2),
    }
    assert [(row["between"], row["order"], row["k"], row["k_u"]) for row in found.bonds] == [
        (["C", "C"], None, 1.0, None),
        (["C", "C"], "double", 1.1, 0.05),
    ]


def test_the_digest_is_that_of_the_text(tmp_path: Path) -> None:
    assert read(tmp_path, "").digest == "sha256:e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855"
    assert read(tmp_path, GOOD).digest == read(tmp_path, GOOD.replace("\n", "\r\n")).digest
    assert read(tmp_path, GOOD).digest != read(tmp_path, GOOD.replace("-2.7", "-2.8")).digest


@pytest.mark.parametrize(
    ("old", "new", "line", "key", "found"),
    [
        ('title = "pi parameters"\n', "", 1, "", 'the key "title" is missing'),
        ('source = "known1961"\n', "", 1, "", "neither source nor note"),
        ('"known1961"', "1961", 2, "source", "found 1961"),
        ('"known1961"', '"know1961"', 2, "source", 'unknown source "know1961"'),
        ('note = "memory" }\n[', 'source = "know1961" }\n[', 5, "values.beta.source", 'unknown source "know1961"'),
        ("[values]", "[valeus]", 3, "valeus", 'unknown key "valeus"'),
        ("alpha = 0.0", 'alpha = "0.0"', 4, "values.alpha.value", 'found the text "0.0"'),
        ("alpha = 0.0", "alpha = true", 4, "values.alpha.value", "found the boolean true"),
        ("alpha = 0.0", "alpha = 0,0", 4, "", 'a decimal comma in "alpha = 0,0"'),
        ("alpha = 0.0", "alpha = inf", 4, "values.alpha.value", "found the number inf"),
        ("alpha = 0.0", "alpha = {}", 4, "values.alpha", 'the key "value" is missing'),
        ("alpha = 0.0", '"β 1" = 0.0', 4, "values.β 1", 'the name "β 1"'),
        ("alpha = 0.0", "beta = 0.0", 5, "", 'the key "beta" stands twice'),
        ("u = 0.15", "u = -0.15", 5, "values.beta.u", "found -0.15"),
        ("meaning =", "meaming =", 5, "values.beta.meaming", 'unknown key "meaming"'),
        ("electrons = 1", "electrons = 3", 7, "atoms.C.electrons", "found 3"),
        ("{ h = 0.0, electrons = 1 }", "0.0", 7, "atoms.C", "found no table"),
        ("u = 0.1 }", "u = -0.1 }", 8, "atoms.N:.h.u", "found -0.1"),
        ('["C", "C"]\nk', '["C"]\nk', 10, "bond[0].between", "found a list of 1"),
        ('order = "double"\n', "", 12, "bond[1]", "the bond stands twice"),
        ('"double"', '"dobule"', 14, "bond[1].order", 'found the text "dobule"'),
        ("k = 1.0", "k = false", 11, "bond[0].k", "found the boolean false"),
        ('[[bond]]\nbetween = ["C", "C"]\nk = 1.0\n[[bond]]', "[bond]", 9, "bond", "found no rows"),
    ],
)
def test_a_wrong_set(tmp_path: Path, old: str, new: str, line: int, key: str, found: str) -> None:
    assert old in GOOD
    parameters = read(tmp_path, GOOD.replace(old, new, 1))
    sources = cases.Sources({"known1961": cases.Source("known1961", "A. Author")})
    problems = cases.Book(tmp_path, tmp_path, sets={"set": parameters}, sources=sources).problems
    assert [problem.file for problem in problems] == ["content/parameters/set.toml"]
    (problem,) = problems
    assert str(problem).startswith(f"content/parameters/set.toml:{line}: {key + ': ' if key else ''}{found}")
    assert str(problem).count("; ") == 2


def test_a_wrong_value_leaves_the_others(tmp_path: Path) -> None:
    assert set(read(tmp_path, GOOD.replace("0.15", '"x"')).values) == {"alpha"}


@pytest.mark.parametrize("name", ["Set", "a b", "größe", "a_b"])
def test_a_wrong_name(tmp_path: Path, name: str) -> None:
    (problem,) = read(tmp_path, GOOD, name).problems
    assert (problem.line, problem.found) == (1, f'the file name gives the set the name "{name}"')


def sources_of(folder: Path, text: str) -> cases.Sources:
    (folder / "sources.bib").write_text(text, encoding="utf-8")
    return cases.read_sources(folder / "sources.bib", "content/sources.bib")


def test_good_sources(tmp_path: Path) -> None:
    found = sources_of(tmp_path, BIB)
    assert found.problems == ()
    assert {key: (source.line, source.kind) for key, source in found.entries.items()} == {
        "known1961": (2, "article"),
        "other": (6, "book"),
    }
    assert found.entries["known1961"].text == (
        "Erich Hückel, A. de la Vallée and John Smith Jr. On Benzol. Z. Phys. 70, 204–286 (1931)"
    )
    assert found.entries["other"].text == "B. Editor. A book. Wiley & Sons"


def test_no_sources(tmp_path: Path) -> None:
    assert cases.read_sources(tmp_path / "sources.bib", "content/sources.bib") == cases.Sources()


@pytest.mark.parametrize(
    ("old", "new", "line", "found"),
    [
        ("@book{other,", "@book{known1961,", 6, 'the key "known1961" stands twice'),
        ("year = 1931,", "year = 1931, year = 1932,", 2, '"known1961" has the field "year" twice'),
        ("year = 1931,\n}", "year = 1931,", 5, "no BibTeX ("),
        ("year = 1931", "year = soon", 4, "no BibTeX (soon)"),
        ("{other,", "{", 6, "no BibTeX ("),
        ("Smith, Jr., John", "Smith, a, b, c", 3, "Too many commas in 'Smith, a, b, c'"),
    ],
)
def test_wrong_sources(tmp_path: Path, old: str, new: str, line: int, found: str) -> None:
    assert old in BIB
    problems = sources_of(tmp_path, BIB.replace(old, new)).problems
    assert (problems[0].file, problems[0].line) == ("content/sources.bib", line)
    assert problems[0].found.startswith(found)


def test_a_wrong_entry_leaves_the_others_and_all_mistakes_are_told(tmp_path: Path) -> None:
    text = "@book{a, title = zz}\n@book{b, title = {y}}\n@book{c, title = }\n@book{d, title = {z}}\n"
    found = sources_of(tmp_path, text)
    assert {"b", "d"} <= set(found.entries)
    assert [problem.line for problem in found.problems] == [1, 3]


def test_values_that_are_no_table(tmp_path: Path) -> None:
    (problem,) = read(tmp_path, 'title = "t"\nnote = "n"\nvalues = 3\n').problems
    assert (problem.line, problem.key, problem.found) == (3, ("values",), "found 3")
