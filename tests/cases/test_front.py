"""Front matter: what YAML offers that a case does not need never hurts, and lines are those of an editor."""

import pytest

from bandbook.cases.front import FIELDS, FrontMatter, read_front


def front_of(yaml: str) -> FrontMatter:
    front, rest, line, problems = read_front(f"---\n{yaml}\n---\nrest\n")
    assert problems == []
    assert rest == "rest\n"
    assert line == yaml.count("\n") + 4
    return front


def test_every_field() -> None:
    front = front_of(
        "title: A chain\ntags: [a, b, a]\nstate: finished\nprivate: true\nauthors:\n- A. Author\n- Ö. Zwei\naim: this\n"
        "conclusion: that\nnext: more\nsee: [x/y]\nwas: [old]\nuses: [data/a.csv]"
    )
    lists = {
        "tags": ("a", "b"),
        "authors": ("A. Author", "Ö. Zwei"),
        "see": ("x/y",),
        "was": ("old",),
        "uses": ("data/a.csv",),
    }
    assert {name: getattr(front, name) for name in lists} == lists
    assert (front.title, front.state, front.private) == ("A chain", "finished", True)
    assert (front.aim, front.conclusion, front.next) == ("this", "that", "more")
    assert set(front.lines) == {field.name for field in FIELDS}
    assert (front.line_of("authors"), front.line_of("authors", 1), front.line_of("next")) == (6, 8, 11)
    assert FrontMatter().line_of("see", 3) == 1


def test_what_may_be_left_out_may_be_left_empty() -> None:
    front = front_of("title: A chain\ntags:\nstate:\naim: ''\nsee: []\nprivate: null")
    assert (front.tags, front.state, front.aim, front.see, front.private) == ((), "active", "", (), False)


def test_one_word_is_a_list_and_several_lines_are_one() -> None:
    front = front_of("title: A\n  chain\naim: >\n  two\n\n  lines\ntags: polyene")
    assert (front.title, front.aim, front.tags) == ("A chain", "two lines", ("polyene",))


def test_aliases_are_read() -> None:
    assert front_of("title: &a A chain\naim: *a").aim == "A chain"


@pytest.mark.parametrize("sign", ["\u2028", "\u2029", "\x85", "\x0c"])
def test_signs_that_yaml_takes_for_line_ends_are_none(sign: str) -> None:
    _, _, line, problems = read_front(f'---\ntitle: "a{sign}b"\ntittle: c\n---\n')
    assert line == 5
    assert problems[-1].line in {2, 3}
    assert problems[-1].line == 3 or sign == "\x0c"


def test_an_empty_one() -> None:
    _, rest, line, problems = read_front("---\n---\nrest")
    assert (rest, line) == ("rest", 3)
    assert [problem.found for problem in problems] == ["the front matter holds no keys"]


def test_a_wrong_key_leaves_the_others() -> None:
    front, _, _, problems = read_front("---\ntitle: A chain\naim: [1]\nprivate: perhaps\ntags: [a]\n---\n")
    assert (front.title, front.aim, front.private, front.tags) == ("A chain", "", False, ("a",))
    assert [(problem.line, problem.key) for problem in problems] == [(3, ("aim",)), (4, ("private",))]
