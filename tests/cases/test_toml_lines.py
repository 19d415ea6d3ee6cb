"""Lines of keys and rows are those that the text has: found here by marks that stand in the values."""

import tomllib
from collections.abc import Iterator
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bandbook.cases.toml_lines import find_lines, find_unfinished, read_toml

TEXT = r"""
title = "x"            # a ] comment
"a.b" = { value = 1, "c" = [1,
2] }
sites = [ {name="A"}, {name="B"},
  { name = "C" }, # comment ]
  [1, 2],
]
's' = '''
[ x = 1
'''
t = "a \" ["
[values]
beta = 1
gamma . x = [1,
  2]
[[bond]]
k = 1
[[bond]]
k = 2
[bond.sub]
j = 1979-05-27T07:32:00Z
[[bond.row]]
z = 'a#b]'
"""


def test_every_key_and_row_has_its_line() -> None:
    assert find_lines(TEXT, 0) == {
        ("title",): 2, ("a.b",): 3, ("sites",): 5, ("sites", 0): 5, ("sites", 1): 5, ("sites", 2): 6, ("sites", 3): 7, ("s",): 9,
        ("t",): 12, ("values",): 13, ("values", "beta"): 14, ("values", "gamma"): 15, ("values", "gamma", "x"): 15,
        ("values", "gamma", "x", 0): 15, ("values", "gamma", "x", 1): 16, ("bond",): 17, ("bond", 0): 17, ("bond", 0, "k"): 18,
        ("bond", 1): 19, ("bond", 1, "k"): 20, ("bond", 1, "sub"): 21, ("bond", 1, "sub", "j"): 22, ("bond", 1, "row"): 23,
        ("bond", 1, "row", 0): 23, ("bond", 1, "row", 0, "z"): 24,
    }  # fmt: skip


def test_lines_count_from_the_fence() -> None:
    assert find_lines("a = 1\n", 41) == {("a",): 42}


VALUE = st.recursive(
    st.sampled_from(
        ["1", "-2.5", "true", '"a#]b"', "'c=[d'", '"""two\n  "lines" """', "'''\n[x]\n'''", "{ x = 1, y = [2] }"]
    ),
    lambda inner: st.builds(
        lambda parts, gap: "[" + gap + f",{gap}".join(parts) + gap + "]",
        st.lists(inner, max_size=4),
        st.sampled_from(["", " ", "\n", "\n\n  # a comment [\n"]),
    ),
    max_leaves=12,
)


@settings(max_examples=300, deadline=None)
@given(values=st.lists(VALUE, max_size=6), gap=st.sampled_from(["\n", "\n\n", "\n# x = 1\n"]))
def test_a_key_begins_where_its_line_begins_with_it(values: list[str], gap: str) -> None:
    text = gap.join(f"key{number} = {value}" for number, value in enumerate(values)) + "\n"
    table = tomllib.loads(text)
    lines = find_lines(text, 0)
    rows = text.split("\n")
    for name, value in table.items():
        assert rows[lines[name,] - 1].startswith(f"{name} = ")
        if isinstance(value, list):
            assert {key[1] for key in lines if key[0] == name and len(key) == 2} == set(range(len(value)))
            numbers = [lines[name, row] for row in range(len(value))]
            assert numbers == sorted(numbers)


def marked(value: Any) -> Iterator[int]:
    if isinstance(value, dict):
        yield from (row for entry in value.values() for row in marked(entry))
    elif isinstance(value, list):
        yield from (row for entry in value for row in marked(entry))
    else:
        yield value


def test_a_row_stands_where_its_first_number_does() -> None:
    """Every number of this text is the line it stands on."""
    text = "a = [\n  2,\n  [3, 3,\n   4],\n\n  { x = 6, y = [\n    7,\n  ] }, 8\n]\n"
    lines = find_lines(text, 0)
    for row, entry in enumerate(tomllib.loads(text)["a"]):
        assert lines["a", row] == next(marked(entry))


@pytest.mark.parametrize(
    ("text", "line"),
    [("a = 1\nb = [\n1,\n\n", 2), ('a = 1\nb = """x\ny\n', 2), ("a = {\n", 1), ("a =", 1), ("", 1), ("[x\n", 1)],
)
def test_what_the_end_cuts_off_stands_where_it_begins(text: str, line: int) -> None:
    assert find_unfinished(text) == line


def test_several_mistakes_of_one_block_are_told() -> None:
    table, lines, problems = read_toml('a = 1,5\nb = -2.5 eV\nname = "x"\nc = 3\nc = 4\n', 10)
    assert [(problem.line, problem.remedy) for problem in problems] == [
        (11, "write a = 1.5"),
        (12, "write b = -2.5"),
        (15, "remove one of the two"),
    ]
    assert table == {"name": "x", "c": 3}
    assert lines["name",] == 13


def test_no_more_than_ten_are_told() -> None:
    assert len(read_toml("".join(f"a{n} = 1,5\n" for n in range(50)), 0)[2]) == 10


@pytest.mark.parametrize(
    ("line", "remedy"),
    [
        ("beta = -2,85 # eV", "write beta = -2.85"),
        ('"levels.gap" = { value = 1,40, within = 0.1 }', 'write "levels.gap" = { value = 1.40, within = 0.1 }'),
        ("beta = −2.5", "write beta = -2.5"),
        ("beta = -2.5 eV", "write beta = -2.5"),
        ("bond_length = 1.40 Å", "write bond_length = 1.40"),
        ("beta = .5", "write beta = 0.5"),
        ("beta = -5.", "write beta = -5.0"),
        ("flag = False", "write flag = false"),
        ("lattice = chain", 'write lattice = "chain"'),
        ("beta = @set.beta", 'write beta = "@set.beta"'),
        ("beta: -2.5", "write beta = -2.5"),
    ],
)
def test_habits_are_answered_with_the_line_as_it_should_be(line: str, remedy: str) -> None:
    _, _, problems = read_toml(line + "\n", 0)
    assert [problem.remedy for problem in problems] == [remedy]
    tomllib.loads(remedy.removeprefix("write "))
