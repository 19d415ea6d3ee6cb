"""Each way to be wrong has one tiny input in ``bad/``; where and what is told of it is tested for each.

``TOLD`` holds, file by file, every problem that the input has and no other: its line, its key, and how what was found
begins. Whole messages are tested once for each family.
"""

from collections.abc import Callable
from pathlib import Path

import pytest

from bandbook import cases, workflow
from bandbook.cases import CheckedCase
from bandbook.errors import Problem, key_text

BAD = Path(__file__).parent / "bad"
#: file: (line, key, beginning of what was found), …
TOLD: dict[str, tuple[tuple[int, str, str], ...]] = {
    "arguments-not-finite": ((7, "with.half", "found the number nan"),),
    "arguments-with-a-date": ((7, "with.half", "found 2026-01-02"),),
    "blank": ((1, "", "the file is empty"),),
    "boolean-for-number": ((7, "beta", "found the boolean true"),),
    "builder-below-its-study": ((10, "", 'its system is built by "wall", which is defined only in line'),),
    "builder-unknown": ((6, "built_by", 'no workings block defines "wal"'),),
    "builder-without-workings": ((6, "built_by", 'no workings block defines "wall"'),),
    "date-for-number": ((7, "beta", "found 2026-01-02"),),
    "empty": ((1, "", "the file is empty"),),
    "encoding": ((2, "", "the byte 0xfc is no UTF-8 text"),),
    "fence-in-a-list": ((19, "", 'the block "toml study" stands inside a list, a quotation or '),),
    "fence-in-a-quotation": ((19, "", 'the block "toml study" stands inside a list, a quotation or '),),
    "fence-indented": ((19, "", 'the block "toml study" stands inside a list, a quotation or '),),
    "fence-joined": ((10, "", 'unknown block "toml-study"'),),
    "fence-misspelt-system": ((5, "", 'unknown block "toml sytem"'),),
    "fence-misspelt": ((10, "", 'unknown block "toml studies"'),),
    "fence-one-word": ((10, "", 'unknown block "study"'),),
    "fence-short-language": ((19, "", 'unknown block "py workings"'),),
    "fence-unclosed-before-another": ((5, "", 'the fence "toml system" is not closed'),),
    "fence-unclosed-of-another-kind": ((19, "", 'the fence "text" is not closed'),),
    "fence-unclosed": ((15, "", 'the fence "toml reference" is not closed'),),
    "fence-wrong-language": ((10, "", 'unknown block "python study"'),),
    "five-mistakes": ((3, "tittle", 'unknown key "tittle"'), (8, "", 'a decimal comma in "beta = -2,85"'), (13, "cells", "found 0"), (14, "ends", 'found the text "rings"'), (18, "levels.homo.source", 'unknown source "know1961"'), (18, "levels.homo.within", "found -1e-06")),
    "fraction-for-whole-number": ((12, "cells", "found 4.5"),),
    "front-date-that-is-none": ((3, "aim", "a value that YAML cannot read"),),
    "front-double-key": ((4, "aim", 'the key "aim" stands twice'),),
    "front-empty": ((1, "", "the front matter holds no keys"),),
    "front-half-a-sign": ((2, "title", "a sign that no text holds"),),
    "front-list-of-numbers": ((5, "tags[1]", "found 4"),),
    "front-missing": ((1, "", "there is no front matter"),),
    "front-no-title": ((1, "", 'the key "title" is missing'),),
    "front-not-closed": ((1, "", "the front matter is not closed"),),
    "front-not-on-top": ((1, "", "the front matter does not begin on the first line"),),
    "front-open-list": ((3, "", '"tags: [a, b" is no YAML'),),
    "front-private-a-word": ((3, "private", 'found the text "maybe"'),),
    "front-syntax": ((2, "", '"title: Chains: all of them" is no YAML'),),
    "front-tab": ((3, "", '"tags: a" is no YAML'),),
    "front-tag-of-yaml": ((2, "title", "could not determine a constructor for the tag 'tag:yaml.org,"),),
    "front-title-a-date": ((2, "title", "found 1961-01-02"),),
    "front-title-a-number": ((2, "title", "found 1961"),),
    "front-title-empty": ((2, "", "the title is empty"),),
    "front-unknown-key": ((3, "tittle", 'unknown key "tittle"'),),
    "front-unknown-state": ((3, "state", 'found the text "done"'),),
    "infinite-by-size": ((7, "beta", "found the number inf"),),
    "infinite": ((7, "beta", "found the number -inf"),),
    "misspelt-names": ((6, "lattice", 'unknown lattice "chian"'), (7, "bata", 'unknown key "bata"'), (8, "alpha", 'found the text "2,5"'), (12, "question", 'unknown question "levles"'), (13, "cels", 'unknown key "cels"'), (14, "ends", 'found the text "opn"')),
    "misspelt-question-key": ((11, "questoin", 'unknown key "questoin"'), (12, "cells", "found 0")),
    "missing-key": ((5, "", 'the key "beta" is missing'),),
    "not-a-number": ((7, "beta", "found the number nan"),),
    "null-byte": ((7, "", "the byte 0x00 is no UTF-8 text"),),
    "number-in-quotes": ((7, "beta", 'found the text "-2.5"'),),
    "out-of-range": ((12, "cells", "found 0"),),
    "recorded-no-point": ((16, "homo", '"homo" names no quantity'),),
    "recorded-with-within": ((16, "levels.homo.within", 'unknown key "within"'),),
    "reference-no-origin": ((16, "levels.homo", "neither source nor note"),),
    "reference-no-point": ((16, "homo", '"homo" names no quantity'),),
    "reference-no-table": ((16, "levels.homo", "found no table"),),
    "reference-to-no-workings": ((16, "workings.weight", '"workings.weight" is reported by workings, and this case has'),),
    "reference-twice-in-two-spellings": ((17, "levels.homo", 'the quantity "levels.homo" has a reference value already'),),
    "reference-twice": ((20, "levels.homo", 'the quantity "levels.homo" has a reference value already'),),
    "reference-unknown-quantity": ((16, "levels.hommo", '"levels" has no quantity "hommo"'),),
    "reference-unknown-source": ((16, "levels.homo.source", 'unknown source "know1961"'),),
    "reference-unknown-study": ((16, "level.homo", '"level.homo" names no study of this case'),),
    "reference-within-missing": ((16, "levels.homo", 'the key "within" is missing'),),
    "reference-within-negative": ((16, "levels.homo.within", "found -1e-06"),),
    "reference-wrong-unit": ((16, "levels.homo.unit", 'found the text "eV"'),),
    "row-header-value-wrong": ((10, "sites[1].alpha", 'found the text "no"'),),
    "row-key-missing": ((13, "couplings[1]", 'the key "beta" is missing'),),
    "row-key-unknown": ((9, "sites[1].alhpa", 'unknown key "alhpa"'),),
    "row-value-wrong": ((9, "sites[1].at", "found a list of 2"),),
    "see-unknown-case": ((5, "see[1]", 'unknown case "knwon"'),),
    "set-reference-in-a-row": ((13, "couplings[1].beta", 'the set "set" has no value "gamma"'),),
    "set-reference-malformed": ((7, "beta", '"@beta" is no reference to a parameter set'),),
    "set-reference-without-quotes": ((7, "", 'a text without quotes in "beta = @set.beta"'),),
    "set-unknown": ((7, "beta", 'unknown parameter set "sat"'),),
    "set-value-unknown": ((7, "beta", 'the set "set" has no value "bata"'),),
    "set-with-mistakes": ((7, "beta", 'the set "broken" gives no value "beta" and has mistakes of i'),),
    "study-called-workings": ((13, "name", 'the name "workings" is taken'),),
    "study-empty": ((10, "", 'the key "question" is missing'),),
    "study-missing": ((1, "", "there is no study"),),
    "study-name-twice": ((15, "name", 'the study "levels" stands twice'),),
    "study-name-with-hyphen": ((13, "name", 'found the text "four-sites"'),),
    "study-names-no-system": ((17, "", "the case has 2 systems and the study names none"),),
    "study-question-missing": ((10, "", 'the key "question" is missing'),),
    "study-unknown-question": ((11, "question", 'unknown question "levles"'),),
    "study-unknown-site": ((13, "add[0]", 'unknown site "B"'),),
    "study-unknown-system": ((19, "system", 'unknown system "tow"'),),
    "system-bond-twice": ((13, "couplings[1]", "the bond B–A in cell [0] stands twice"),),
    "system-empty": ((5, "", "an empty system"),),
    "system-missing": ((1, "", "there is no system"),),
    "system-name-a-number": ((8, "name", "found 1"),),
    "system-name-not-ascii": ((8, "name", 'found the text "β kurz"'),),
    "system-name-twice": ((12, "name", 'the system "one" stands twice'),),
    "system-second-unnamed": ((5, "", "a system without a name"), (10, "", "a system without a name")),
    "system-two-forms": ((8, "built_by", 'a system of two forms at once: "lattice" and "built_by"'),),
    "system-unknown-lattice": ((6, "lattice", 'unknown lattice "chian"'),),
    "system-unknown-site": ((12, "couplings[0].to", 'unknown site "C"'),),
    "text-for-number": ((7, "beta", 'found the text "strong"'),),
    "toml-capital-boolean": ((7, "", 'a boolean with capital letters in "beta = True"'),),
    "toml-colon": ((7, "", 'a colon after a key in "beta: -2.5"'),),
    "toml-decimal-comma-in-a-row": ((16, "", 'a decimal comma in ""levels.homo" = { value = 0,618034, with'),),
    "toml-decimal-comma": ((7, "", 'a decimal comma in "beta = -2,85"'),),
    "toml-deep": ((7, "", "a block nested too deeply"),),
    "toml-double-key": ((8, "", 'the key "beta" stands twice'),),
    "toml-double-table": ((20, "", 'the key "levels.homo" stands twice'),),
    "toml-many-digits": ((7, "", "a block with a number of too many digits"),),
    "toml-missing-comma": ((9, "", '"{ name = "B", at = [1.36, 0, 0], alpha = 0.0 }," is no TOML'),),
    "toml-no-digit-after-point": ((7, "", 'a number that ends with its point in "beta = -2."'),),
    "toml-no-digit-before-point": ((7, "", 'a number that begins with its point in "beta = -.5"'),),
    "toml-open-array": ((11, "", '"couplings = [" is no TOML'),),
    "toml-open-text": ((6, "", '"lattice = "chain" is no TOML'),),
    "toml-syntax": ((7, "", '"beta -2.5" is no TOML'),),
    "toml-text-without-quotes": ((6, "", 'a text without quotes in "lattice = chain"'),),
    "toml-two-decimal-commas": ((7, "", 'a decimal comma in "beta = -2,85"'), (8, "", 'a decimal comma in "period = 1,4"')),
    "toml-typeset-minus": ((7, "", 'a typeset minus sign in "beta = −2.5"'),),
    "toml-unit": ((7, "", 'a unit after the number in "beta = -2.5 eV"'),),
    "unknown-key": ((7, "bata", 'unknown key "bata"'),),
    "uses-a-folder": ((3, "uses[0]", 'there is no file "data"'),),
    "uses-absolute": ((3, "uses[0]", 'the path "/etc/passwd" leads out of the book'),),
    "uses-missing-file": ((5, "uses[1]", 'there is no file "data/gasp.csv"'),),
    "uses-no-text": ((3, "uses[0]", '"data/picture.png", line 1: the byte 0x89 is no UTF-8 text'),),
    "uses-out-of-book": ((3, "uses[0]", 'the path "../../secret.txt" leads out of the book'),),
    "uses-roundabout": ((3, "uses[0]", 'the path "data/../data/gaps.csv" is roundabout'),),
    "uses-too-long-a-name": ((3, "uses[0]", '"xxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxx…", line 1: it canno'),),
    "utf-16": ((1, "", "the byte 0xff is no UTF-8 text"),),
    "was-no-id": ((3, "was[0]", '"Old Name" is no id'),),
    "whole-number-too-large": ((7, "beta", "found a whole number of very many digits"),),
    "workings-indentation": ((13, "", '"y = 2" is no Python'),),
    "workings-return-outside": ((13, "", '"return 3" is no Python'),),
    "workings-syntax": ((12, "", '"return'),),
    "zero": ((7, "beta", "found 0.0"),),
}  # fmt: skip

#: file: the whole message.
EXACT = {
    "empty": "1: the file is empty; front matter, a system and a study; write the case or remove the file",
    "encoding": "2: the byte 0xfc is no UTF-8 text; text files are UTF-8; save the file as UTF-8",
    "front-unknown-key": '3: tittle: unknown key "tittle"; keys here are title, tags, state, private, authors, aim, conclusion, next, see, was, uses; did you mean "title"?',
    "front-syntax": "2: \"title: Chains: all of them\" is no YAML (mapping values are not allowed here); lines key: value, text with a colon or a sign of YAML's in quotes; put the text in quotes",
    "front-no-title": '1: the key "title" is missing; every case has a title; add title: …',
    "fence-unclosed": '15: the fence "toml reference" is not closed; a fence ends with a line of as many of its own signs; add the closing line',
    "fence-misspelt": '10: unknown block "toml studies"; blocks are "toml system", "toml study", "toml reference", "toml recorded", "python workings"; did you mean "toml study"?',
    "fence-in-a-list": '19: the block "toml study" stands inside a list, a quotation or an indented text; blocks stand at the left margin; move it to the left margin, or put a longer fence around an example',
    "toml-decimal-comma": '7: a decimal comma in "beta = -2,85"; the decimal sign is a point; write beta = -2.85',
    "toml-double-key": '8: the key "beta" stands twice; each key once; remove one of the two',
    "toml-syntax": "7: \"beta -2.5\" is no TOML (Expected '=' after a key in a key/value pair); a line is key = value, text in quotes, each key once; correct the line",
    "boolean-for-number": "7: beta: found the boolean true; allowed is a finite number in eV, not 0; correct it",
    "misspelt-question-key": '11: questoin: unknown key "questoin"; a study has a question; did you mean "question"?\ncontent/cases/misspelt-question-key.md:12: cells: found 0; allowed is a whole number (a list of them in two and three dimensions), 1 to 10,000,000; correct it',
    "missing-key": '5: the key "beta" is missing; it is resonance integral between neighbours: a finite number in eV, not 0; add beta = …',
    "row-key-unknown": '9: sites[1].alhpa: unknown key "alhpa"; keys here are name, at, alpha; did you mean "alpha"?',
    "set-unknown": '7: beta: unknown parameter set "sat"; parameter sets are "broken", "set"; did you mean "set"?',
    "set-reference-malformed": '7: beta: "@beta" is no reference to a parameter set; "@set.name"; write "@set.beta"',
    "system-second-unnamed": '5: a system without a name; with several systems each has one; add name = "…" to each\ncontent/cases/system-second-unnamed.md:10: a system without a name; with several systems each has one; add name = "…" to each',
    "system-name-not-ascii": '8: name: found the text "β kurz"; allowed is a name in quotes (letters, digits and _, a letter first); keep to the letters a to z, digits and _, such as "beta_kurz"',
    "system-unknown-lattice": '6: lattice: unknown lattice "chian"; lattices are "chain", "ring", "alternating-chain", "diatomic-chain", "polyacene", "armchair-ribbon", "zigzag-ribbon", "honeycomb", "square"; did you mean "chain"?',
    "study-missing": "1: there is no study; one or more; add a ```toml study block",
    "study-unknown-question": '11: question: unknown question "levles"; questions are "levels", "bands", "length_series"; did you mean "levels"?',
    "study-unknown-system": '19: system: unknown system "tow"; systems are "one", "two"; did you mean "two"?',
    "reference-unknown-quantity": '16: levels.hommo: "levels" has no quantity "hommo"; it gives homo, lumo, gap, pi_energy, open_shell, gap_levels, energy_<n>, k_<n>; did you mean "homo"?',
    "reference-no-origin": "16: levels.homo: neither source nor note; every value names one of the two; add source or note",
    "reference-unknown-source": '16: levels.homo.source: unknown source "know1961"; a source is a key of sources.bib; did you mean "known1961"?',
    "reference-twice": '20: levels.homo: the quantity "levels.homo" has a reference value already; one value each; remove one of the two',
    "workings-syntax": "12: \"return (half\" is no Python ('(' was never closed); workings are Python; correct the line",
    "builder-unknown": '6: built_by: no workings block defines "wal"; a function of a workings block; did you mean "wall"?',
    "builder-below-its-study": '10: its system is built by "wall", which is defined only in line 14; a function of an earlier workings block; move the workings above this study',
    "uses-out-of-book": '3: uses[0]: the path "../../secret.txt" leads out of the book; text files below the content folder, such as data/gaps.csv; correct the path',
    "uses-missing-file": '5: uses[1]: there is no file "data/gasp.csv"; text files below the content folder, such as data/gaps.csv; correct the path, or add the file',
    "see-unknown-case": '5: see[1]: unknown case "knwon"; ids of cases of this book; did you mean "known"?',
    "five-mistakes": '3: tittle: unknown key "tittle"; keys here are title, tags, state, private, authors, aim, conclusion, next, see, was, uses; did you mean "title"?\ncontent/cases/five-mistakes.md:8: a decimal comma in "beta = -2,85"; the decimal sign is a point; write beta = -2.85\ncontent/cases/five-mistakes.md:13: cells: found 0; allowed is a whole number (a list of them in two and three dimensions), 1 to 10,000,000; correct it\ncontent/cases/five-mistakes.md:14: ends: found the text "rings"; allowed is one of: "open", "ring"; did you mean "ring"?\ncontent/cases/five-mistakes.md:18: levels.homo.source: unknown source "know1961"; a source is a key of sources.bib; did you mean "known1961"?\ncontent/cases/five-mistakes.md:18: levels.homo.within: found -1e-06; allowed is a finite number, 0 or more; correct it',
}  # fmt: skip


@pytest.fixture(scope="module")
def book(tmp_path_factory: pytest.TempPathFactory) -> cases.Book:
    root = tmp_path_factory.mktemp("book")
    files = {
        "cases/known.md": b"---\ntitle: Known\n---\n",
        "data/gaps.csv": b"n,gap\n1,2\n",
        "data/picture.png": b"\x89PNG\r\n\x1a\n\x00",
        "parameters/set.toml": b'title = "A set"\nnote = "made up"\n[values]\nbeta = -2.5\n',
        "parameters/broken.toml": b'title = "Broken"\nnote = "made up"\n[values]\nbeta = strong\n',
        "sources.bib": b"@book{known1961, author = {A. Author}, title = {A book}, year = {1961}}\n",
    }
    for name, data in files.items():
        (root / "content" / name).parent.mkdir(parents=True, exist_ok=True)
        (root / "content" / name).write_bytes(data)
    return cases.read_book(root, root / "content")


@pytest.fixture
def checked(book: cases.Book) -> Callable[[str], CheckedCase]:
    def check(name: str) -> CheckedCase:
        case = cases.read_case(BAD / f"{name}.md", identity=name, file=f"content/cases/{name}.md")
        return cases.check_case(case, book, workflow._Vocabulary())  # noqa: SLF001 - the one that the commands use

    return check


def test_every_input_is_tested_and_every_test_has_its_input() -> None:
    assert sorted(path.name for path in BAD.iterdir()) == sorted(f"{name}.md" for name in TOLD)
    assert set(EXACT) <= set(TOLD)


@pytest.mark.parametrize("name", TOLD)
def test_each_mistake_is_told_at_its_line_and_nothing_else(name: str, checked: Callable[[str], CheckedCase]) -> None:
    found = checked(name)
    assert found.parameters is None
    assert [problem.file for problem in found.problems] == [f"content/cases/{name}.md"] * len(TOLD[name])
    told = [(problem.line, key_text(problem.key), problem.found) for problem in found.problems]
    assert [
        (line, key, text[: len(words)]) for (line, key, text), (_, _, words) in zip(told, TOLD[name], strict=True)
    ] == list(TOLD[name])


@pytest.mark.parametrize("name", TOLD)
def test_each_message_says_what_is_wrong_what_is_allowed_and_what_to_do(
    name: str, checked: Callable[[str], CheckedCase]
) -> None:
    for problem in checked(name).problems:
        assert is_three_clauses(problem), str(problem)
        assert str(problem).isprintable()
        assert len(str(problem)) < 600


def is_three_clauses(problem: Problem) -> bool:
    """Return whether the three clauses are there, none ends with a full stop, and none holds another."""
    clauses = (problem.found, problem.allowed, problem.remedy)
    return all(clause and not clause.endswith(".") and "; " not in clause for clause in clauses)


@pytest.mark.parametrize("name", EXACT)
def test_exact_texts(name: str, checked: Callable[[str], CheckedCase]) -> None:
    assert "\n".join(str(problem) for problem in checked(name).problems) == f"content/cases/{name}.md:{EXACT[name]}"


def test_the_input_without_its_mistake_is_good(book: cases.Book) -> None:
    text = (BAD / "toml-decimal-comma.md").read_text(encoding="utf-8").replace("-2,85", "-2.85")
    case = cases.case_of(text, identity="good", file="content/cases/good.md")
    found = cases.check_case(case, book, workflow._Vocabulary())  # noqa: SLF001 - the one that the commands use
    assert found.problems == ()
    assert found.parameters is not None
