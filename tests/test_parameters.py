"""Fields and their check: what is taken, what is told of what is not, and that nothing makes it fall over."""

import datetime as dt
import json
import math
import re
import sys
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bandbook.errors import Problem
from bandbook.parameters import KINDS, NAME, Field, check, describe, listed, near, one_of, plain_name, shortened, shown

NUMBER = Field("beta", "number", "resonance integral", unit="eV")
WHOLE = Field("sites", "integer", "number of sites", least=3, most=100)
ROWS = Field("sites", "rows", "the sites", fields=(Field("name", "name", "its name"), NUMBER))
#: One field of every kind.
EVERY = tuple(
    Field(kind, kind, f"a {kind}", choices=("open", "ring"), fields=(NUMBER,) if "row" in kind else ())
    for kind in KINDS
)


def read(field: Field, value: Any) -> tuple[Any, list[Problem]]:
    checked, problems = check((field,), {field.name: value})
    return checked[field.name], problems


def told(field: Field, value: Any) -> Problem:
    checked, (problem,) = read(field, value)
    assert checked is None or isinstance(checked, list)
    return problem


@pytest.mark.parametrize(("given_", "taken"), [(1, 1.0), (-2.5, -2.5), (-0.0, 0.0), (2**53, 2.0**53), (1e-320, 1e-320)])
def test_a_number_becomes_a_float(given_: float, taken: float) -> None:
    found, problems = read(NUMBER, given_)
    assert problems == []
    assert isinstance(found, float)
    assert (found, math.copysign(1.0, found)) == (taken, math.copysign(1.0, taken))


@pytest.mark.parametrize(
    ("value", "words"),
    [
        (True, "found the boolean true"),
        (float("nan"), "found the number nan"),
        (float("inf"), "found the number inf"),
        (float("1e400"), "found the number inf"),
        (-(10**400), "found a whole number of very many digits"),
        ("-2,5", "write the decimal point as a point, without quotes: -2.5"),
        (" +2,50 ", "without quotes: +2.50"),
        ("-2.5", "remove the quotes"),
        ("strong", 'found the text "strong"'),
        ("two\nlines\x1b[31m", r'found the text "two\nlines\x1b[31m"'),
        ([1.0], "found a list of 1"),
        ({"a": 1}, "found a table"),
        (dt.date(2026, 1, 2), "found 2026-01-02"),
        (None, "found nothing"),
    ],
)  # fmt: skip
def test_what_is_no_number_is_told(value: Any, words: str) -> None:
    problem = told(NUMBER, value)
    assert words in str(problem)
    assert "a finite number in eV" in problem.allowed
    assert problem.key == ("beta",)


@pytest.mark.parametrize(
    ("limits", "inside", "outside"),
    [
        ({"least": 0.0}, [0, 1], [-1e-300, -(10**400)]),
        ({"most": 2.0}, [2, -5], [2.0000001]),
        ({"above": 0.0}, [1e-300], [0, -0.0]),
        ({"nonzero": True}, [1e-300, -1], [0, -0.0]),
        ({"least": -1e6, "most": 1e6}, [1e6, -1e6], [1e300, -1000001]),
    ],
)
def test_ranges(limits: dict[str, Any], inside: list[float], outside: list[float]) -> None:
    field = Field("x", "number", "a number", **limits)
    assert [read(field, value)[1] for value in inside] == [[] for _ in inside]
    assert all(told(field, value) for value in outside)


def test_a_range_of_size_is_named_only_where_it_was_left() -> None:
    field = Field("x", "number", "a number", unit="eV", least=-1e6, most=1e6)
    assert describe(field) == "a finite number in eV"
    assert told(field, 1e300).remedy == "write a number from -1,000,000 to 1,000,000"


@pytest.mark.parametrize(("value", "taken"), [(4, 4), (4.0, 4), (100, 100)])
def test_whole_numbers(value: float, taken: int) -> None:
    found, problems = read(WHOLE, value)
    assert (found, type(found), problems) == (taken, int, [])


@pytest.mark.parametrize("value", [2, 101, 4.5, True, "4", 10**400, float("inf"), float("nan"), 1e300, [4]])
def test_what_is_no_whole_number_is_told(value: Any) -> None:
    assert "a whole number, 3 to 100" in told(WHOLE, value).allowed


@pytest.mark.parametrize("value", [2**53 + 1, -(2**60), 2.0**60])
def test_whole_numbers_stay_exact_in_json(value: float) -> None:
    assert told(Field("n", "integer", "a number"), value).key == ("n",)


@pytest.mark.parametrize(
    ("value", "words"),
    [
        ("1A", "begin with a letter"),
        ("end cap", 'write "end_cap"'),
        ("β1", 'such as "beta1"'),
        ("A\n", 'write "A"'),
        ("", "begin with a letter"),
        (7, "begin with a letter"),
    ],
)
def test_names(value: Any, words: str) -> None:
    assert words in told(Field("name", "name", "a name"), value).remedy


@given(st.text(max_size=100))
def test_the_nearest_name_is_a_name(text: str) -> None:
    name = plain_name(text)
    assert name == "" or NAME.match(name)


def test_texts_flags_and_choices() -> None:
    choice = Field("ends", "choice", "the ends", choices=("open", "ring"))
    assert read(choice, "ring") == ("ring", [])
    assert told(choice, "rings").remedy == 'did you mean "ring"?'
    assert "write true or false" in told(Field("x", "flag", "a flag"), "yes").remedy
    assert told(Field("x", "text", "a text"), "  ").remedy == "write something, or remove the key"
    assert told(Field("x", "text", "a text"), 5).remedy == "put it in quotes"


def test_a_word_stands_once_in_a_list() -> None:
    """``fits = ["kuhn", "kuhn"]`` would report one quantity twice."""
    found = told(Field("fits", "choices", "forms", choices=("kuhn", "inverse")), ["kuhn", "inverse", "kuhn"])
    assert (found.found, found.key) == ('"kuhn" stands twice', ("fits", 2))
    assert told(Field("add", "names", "sites"), ["A1", "A1"]).key == ("add", 1)


@pytest.mark.parametrize(
    ("kind", "value", "key", "allowed"),
    [
        ("numbers", [1, True], ("x", 1), "allowed is a finite number in Å"),
        ("vector", [0, "1", 2], ("x", 1), "allowed is a finite number in Å"),
        ("vectors", [[0, 1, 2], [0, 1]], ("x", 1), "allowed is three numbers in Å"),
        ("vectors", [[0, 1, 2], [0, float("nan"), 3]], ("x", 1, 1), "allowed is a finite number in Å"),
        ("rows", [{"beta": 1}, 5], ("x", 1), "allowed is a table in Å"),
        ("cells", [2, 2.5], ("x", 1), "allowed is a whole number in Å"),
        ("lengths", [2, "3"], ("x", 1), "allowed is a whole number in Å"),
    ],
)
def test_a_mistake_in_a_list_is_placed_at_its_row(
    kind: str, value: Any, key: tuple[str | int, ...], allowed: str
) -> None:
    problem = told(Field("x", kind, "something", unit="Å", fields=(NUMBER,)), value)
    assert (problem.key, problem.allowed) == (key, allowed)


def test_the_length_of_a_list() -> None:
    field = Field("cell", "integers", "a cell", length=(1, 3))
    assert told(field, [1, 2, 3, 4]).remedy == "give 1 to 3 entries, not 4"
    assert told(field, 5).remedy == "write a list in brackets"


@pytest.mark.parametrize(
    ("value", "taken"), [("1..4", [1, 2, 3, 4]), ([4, 2, 4.0], [2, 4]), (" 3 .. 3 ", [3]), ([7], [7])]
)
def test_lengths(value: Any, taken: list[int]) -> None:
    assert read(Field("cells", "lengths", "lengths", least=1), value) == (taken, [])


@pytest.mark.parametrize(
    "value", ["4..1", "1..1000000", "0..4", "1-4", [], [0], [True], "", 5, "१..४", "1..9999999999"]
)
def test_what_are_no_lengths_is_told_once(value: Any) -> None:
    assert told(Field("cells", "lengths", "lengths", least=1, most=10**7), value).key[0] == "cells"


def test_cells() -> None:
    field = Field("cells", "cells", "cells", least=1)
    assert read(field, [4]) == (4, [])
    assert read(field, [4, 5.0]) == ([4, 5], [])
    assert told(field, []).remedy == "give one number for each lattice vector"


def test_a_free_table_is_plain_json() -> None:
    field = Field("with", "table", "arguments")
    value = {"half": 40, "law": {"form": "exponential", "x": [1, -0.0, True, "a"]}}
    found, problems = read(field, value)
    assert problems == []
    assert json.loads(json.dumps(found)) == found == value
    assert math.copysign(1.0, found["law"]["x"][1]) == 1.0
    for bad, key in [
        ({"a": [1, float("nan")]}, ("with", "a", 1)),
        ({"a": {"b": dt.date(2026, 1, 1)}}, ("with", "a", "b")),
        ({"a": 10**400}, ("with", "a")),
    ]:
        checked, (problem,) = check((field,), {"with": bad})
        assert problem.key == key, checked
    deep: Any = 1
    for _ in range(5000):
        deep = [deep]
    assert told_in(field, {"a": deep}).found == "found tables in one another too deep to read"


def told_in(field: Field, value: Any) -> Problem:
    return read(field, value)[1][0]


def test_rows_are_told_with_their_numbers_and_missing_keys() -> None:
    _, problems = read(ROWS, [{"name": "A", "beta": 1}, {"nam": "B", "beta": True}, {"beta": 1}])
    assert [problem.key for problem in problems] == [("sites", 1, "nam"), ("sites", 1, "beta"), ("sites", 2)]
    assert problems[0].remedy == 'did you mean "name"?'
    assert problems[2].found == 'the key "name" is missing'


def test_every_field_is_there_and_defaults_are_lists_of_their_own() -> None:
    fields = (NUMBER, Field("add", "names", "sites", default=()), Field("period", "number", "repeat", default=None))
    checked, problems = check(fields, {})
    assert list(checked) == ["beta", "add", "period"]
    assert (checked["beta"], checked["add"], checked["period"]) == (None, [], None)
    assert [problem.found for problem in problems] == ['the key "beta" is missing']
    checked["add"].append("A")
    assert check(fields, {"beta": 1})[0]["add"] == []


def test_all_mistakes_at_once_in_the_order_of_the_table() -> None:
    _, problems = check((NUMBER, WHOLE, ROWS), {"bata": 1, "sites": 1, 3: 4, "": 2})  # type: ignore[dict-item]
    assert [problem.key for problem in problems] == [("bata",), ("sites",), ("3",), ("",)]


@given(
    st.dictionaries(
        st.sampled_from([*KINDS, "unknown", ""]),
        st.recursive(
            st.none() | st.booleans() | st.integers() | st.floats() | st.text() | st.dates() | st.just(10**400)
            | st.just(sys.float_info.max),
            lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text(max_size=5), inner, max_size=3),
            max_leaves=8,
        ),
    )
)  # fmt: skip
def test_whatever_is_given_is_checked_or_told(table: dict[str, Any]) -> None:
    """Never an exception; every message one line in three clauses; what is checked is plain JSON that checks again."""
    checked, problems = check(EVERY, table)
    assert list(checked) == list(KINDS)
    for problem in problems:
        assert "\n" not in str(problem)
        assert all((problem.found, problem.allowed, problem.remedy))
        assert len(str(problem)) < 1000
    wrong = {problem.key[0] for problem in problems if problem.key}
    right = {name: checked[name] for name in table if name in checked and name not in wrong}
    assert json.loads(json.dumps(right, allow_nan=False)) == right
    again, more = check(EVERY, right)
    assert {name: again[name] for name in right} == right
    assert not {problem.key for problem in more if problem.key}


def test_near_names_and_long_lists() -> None:
    assert near("BETA_INSID", ["beta_inside", "alpha"]) == 'did you mean "beta_inside"?'
    assert near("", ["a"]) == near("x" * 10**6, ["a"]) == ""
    many = [f"A{number}" for number in range(5000)]
    assert len(str(one_of("B", many, "site"))) < 400
    assert (
        str(one_of("B", [], "system"))
        == 'unknown system "B"; there is no system yet; use one of the systems that exist'
    )
    assert listed(["a", "b"]) == "a, b"


@given(st.text())
def test_what_is_shown_is_short_and_printable(text: str) -> None:
    assert shortened(text).isprintable()
    assert len(re.sub(r"\\(x..|u.{4}|U.{8}|.)", "", shortened(text))) <= 40
    assert shown(text).startswith('the text "')


@pytest.mark.parametrize("kind", KINDS)
def test_every_kind_has_its_words(kind: str) -> None:
    assert describe(Field("x", kind, "something", choices=("a",)))
