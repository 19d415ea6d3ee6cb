"""The checker with a small vocabulary of its own: what crosses to the kernel, and what rests on what."""

import ast
import json
import re
from collections.abc import Collection, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from bandbook import cases
from bandbook.cases import ParameterValue
from bandbook.cases.fences import Block
from bandbook.cases.workings import ANY, bound_names
from bandbook.errors import Problem
from bandbook.parameters import Field, check, one_of

SYSTEM = (
    Field("kind", "choice", "kind of the system", choices=("plain", "built"), default="plain"),
    Field("name", "name", "its name", default=None),
    Field("beta", "number", "a number", default=-1.0, nonzero=True),
    Field("rows", "rows", "rows", default=(), fields=(Field("x", "number", "a number", least=-3.0),)),
    Field("built_by", "name", "a function", default=None),
    Field("with", "table", "its arguments", default=None),
)
STUDY = (
    Field("question", "choice", "the question", choices=("gap", "width")),
    Field("name", "name", "its name", default=None),
    Field("system", "name", "its system", default=None),
    Field("cells", "integer", "cells", default=1, least=1),
)


@dataclass(frozen=True)
class Quantity:
    pattern: str

    def fits(self, name: str) -> bool:
        return re.fullmatch(self.pattern.replace("<n>", r"\d+"), name) is not None


class Small:
    """Two questions, one form of system."""

    def check_system(self, given: Mapping[str, Any]) -> tuple[dict[str, Any] | None, list[Problem]]:
        checked, problems = check(SYSTEM, given)
        del checked["name"]
        return (None if problems else checked), problems

    def check_study(
        self, given: Mapping[str, Any], systems: Mapping[str, dict[str, Any] | None]
    ) -> tuple[dict[str, Any] | None, list[Problem]]:
        checked, problems = check(STUDY, given)
        name = checked.pop("system") or next(iter(systems), None)
        del checked["name"]
        if name not in systems and systems:
            problems.append(one_of(str(name), list(systems), "system").below("system"))
        return (None if problems else {**checked, "system": name}), problems

    def formula_mistakes(self, text: str) -> list[tuple[int, str]]:
        return [(1, "a formula")] if "$x$" in text else []

    def quantity_names(self, question: str) -> Collection[Quantity]:
        return {"gap": (Quantity("gap"), Quantity("energy_<n>")), "width": (Quantity("width"),)}.get(question, ())


BOOK = cases.Book(
    Path("book"),
    Path("book/content"),
    (cases.Case("known", "known.md"), cases.Case("a", "a.md")),
    {
        "my.set-1": cases.ParameterSet("my.set-1", "my.set-1.toml", values={"beta": ParameterValue(-2.5), "x": ParameterValue(2.0)}),
        "low": cases.ParameterSet("low", "low.toml", values={"x": ParameterValue(-9.0)}),
    },
    cases.Sources({"known1961": cases.Source("known1961", "A. Author")}),
)  # fmt: skip
FRONT = "---\ntitle: A case\n---\n"


def block(info: str, text: str) -> str:
    return f"```{info}\n{text.strip()}\n```\n"


def checked_of(*blocks: str) -> cases.CheckedCase:
    text = FRONT + "".join(blocks)
    return cases.check_case(cases.case_of(text, identity="a", file="a.md"), BOOK, Small())


def told(*blocks: str) -> list[tuple[int, str]]:
    return [(problem.line, problem.found) for problem in checked_of(*blocks).problems]


STUDY_BLOCK = block("toml study", 'question = "gap"')


def test_what_crosses_is_plain_json_in_file_order() -> None:
    checked = checked_of(
        block("python workings", "x = 1"),
        block("toml system", "beta = -2"),
        STUDY_BLOCK,
        block("python workings", "y = 2"),
        block("toml study", 'question = "gap"\nname = "again"\ncells = 7'),
    )
    assert checked.problems == ()
    system = {"kind": "plain", "beta": -2.0, "rows": [], "built_by": None, "with": None}
    assert checked.parameters == {
        "format": 1,
        "systems": {"system": system},
        "studies": {
            "gap": {"question": "gap", "cells": 1, "system": "system"},
            "again": {"question": "gap", "cells": 7, "system": "system"},
        },
        "workings": ["x = 1\n", "y = 2\n"],
        "steps": [["workings", 0], ["study", "gap"], ["workings", 1], ["study", "again"]],
        "files": {},
    }
    assert json.loads(json.dumps(checked.parameters, allow_nan=False)) == checked.parameters
    assert dict(checked.blocks) == {
        "system system": 7,
        "step-1": 4,
        "gap": 10,
        "step-2": 10,
        "step-3": 13,
        "again": 16,
        "step-4": 16,
    }


def test_references_to_sets_are_resolved_wherever_a_number_stands() -> None:
    checked = checked_of(
        block(
            "toml system",
            'beta = "@my.set-1.beta"\nrows = [\n  { x = 1 },\n  { x = "@my.set-1.x" },\n]\nwith = { from = ["@my.set-1.x"] }',
        ),
        block("toml study", 'question = "gap"\ncells = "@my.set-1.x"'),
        block("toml reference", '"gap.gap" = { value = "@my.set-1.x", within = 0.1, note = "@ is no reference here" }'),
    )
    assert checked.problems == ()
    assert checked.parameters is not None
    system = checked.parameters["systems"]["system"]
    assert (system["beta"], system["rows"], system["with"]) == (-2.5, [{"x": 1.0}, {"x": 2.0}], {"from": [2.0]})
    assert checked.parameters["studies"]["gap"]["cells"] == 2
    assert [(use.set, use.name, use.key, use.block, use.value) for use in checked.uses] == [
        ("my.set-1", "beta", "beta", 4, -2.5),
        ("my.set-1", "x", "rows[1].x", 4, 2.0),
        ("my.set-1", "x", "with.from[0]", 4, 2.0),
        ("my.set-1", "x", "cells", 12, 2.0),
        ("my.set-1", "x", "gap.gap.value", 16, 2.0),
    ]
    assert checked.references == (cases.Reference("gap.gap", 2.0, 0.1, note="@ is no reference here", line=17),)


def test_a_value_of_a_set_is_judged_by_its_field() -> None:
    assert told(block("toml system", 'rows = [\n  { x = "@low.x" },\n]'), STUDY_BLOCK) == [(6, "found -9.0")]


def test_a_failed_reference_is_told_once() -> None:
    """The study's number would be out of range too, whatever stood in for it."""
    assert told(block("toml system", 'rows = [\n  { x = "@low.y" },\n  { x = "@low" },\n]'), STUDY_BLOCK) == [
        (6, 'the set "low" has no value "y"'),
        (7, '"@low" is no reference to a parameter set'),
    ]


def test_several_systems_and_studies_that_name_them() -> None:
    two = block("toml system", 'name = "one"') + block("toml system", 'name = "two"\nbeta = 2')
    checked = checked_of(two, block("toml study", 'question = "gap"\nsystem = "two"'))
    assert checked.parameters is not None
    assert checked.parameters["studies"]["gap"]["system"] == "two"
    assert list(checked.parameters["systems"]) == ["one", "two"]
    assert told(two, block("toml study", 'question = "gap"\nsystem = "tow"')) == [(13, 'unknown system "tow"')]


def test_a_broken_block_makes_no_noise() -> None:
    """Its name is known where its line can be read; what names a block that cannot be read is not called wrong."""
    reference = block("toml reference", '"first.gap" = { value = 1, within = 1, note = "n" }')
    assert told(block("toml system", "beta = -2,5"), STUDY_BLOCK) == [(5, 'a decimal comma in "beta = -2,5"')]
    broken = block("toml study", 'question = "gap"\nname = "first"\ncells = 2,5')
    assert told(block("toml system", "beta = 1"), broken, reference) == [(10, 'a decimal comma in "cells = 2,5"')]
    nameless = block("toml study", 'question = "gap"\nname = "first\n')
    assert [line for line, _ in told(block("toml system", "beta = 1"), nameless, reference)] == [9]


def test_wrong_blocks_of_one_case_are_all_told() -> None:
    assert [line for line, _ in told(
        block("toml system", "beta = 0\nbta = 1"),
        block("toml study", 'question = "gap"\ncells = 0'),
        block("toml reference", '"gap.width" = { value = 1, within = -1, source = "none" }\n"width.width" = 1'),
    )] == [5, 6, 10, 13, 13, 13, 14, 14]  # fmt: skip


def test_recorded_values_may_be_of_anything() -> None:
    checked = checked_of(
        block("toml system", "beta = 1"),
        STUDY_BLOCK,
        block(
            "toml recorded",
            '"older.gap" = { value = 1.5, source = "known1961" }\nolder.width = { value = 2, unit = "beta", note = "n" }',
        ),
    )
    assert checked.problems == ()
    assert checked.recorded == (
        cases.Reference("older.gap", 1.5, None, source="known1961", line=11),
        cases.Reference("older.width", 2.0, None, unit="beta", note="n", line=12),
    )


def test_quantities_are_known_by_their_pattern() -> None:
    def reference(name: str) -> str:
        return block("toml reference", f'"{name}" = {{ value = 1, within = 1, note = "n" }}')

    system = block("toml system", "beta = 1")
    assert told(system, STUDY_BLOCK, reference("gap.energy_12")) == []
    assert told(system, STUDY_BLOCK, reference("gap.energy_x")) == [(11, '"gap" has no quantity "energy_x"')]
    assert told(system, STUDY_BLOCK, reference("workings.x"), block("python workings", "1")) == []
    assert told(system, STUDY_BLOCK, reference("gap.energy_1"), reference("gap.energy_1")) == [
        (14, 'the quantity "gap.energy_1" has a reference value already')
    ]


BUILT = block("toml system", 'built_by = "wall"')
WALL = block("python workings", "def wall():\n    return 1")


def test_a_builder_stands_above_the_first_study_that_needs_it() -> None:
    assert told(BUILT, WALL, STUDY_BLOCK) == []
    assert told(WALL, BUILT, STUDY_BLOCK) == []
    late = 'its system is built by "wall", which is defined only in line 10'
    assert told(BUILT, STUDY_BLOCK, WALL) == [(7, late)]
    assert told(BUILT) == [(1, "there is no study"), (5, 'no workings block defines "wall"')]
    assert told(BUILT, block("python workings", "from tools import *"), STUDY_BLOCK) == []
    assert told(BUILT, block("python workings", "def wall(:"), STUDY_BLOCK) == [
        (8, '"def wall(:" is no Python (invalid syntax)')
    ]


@pytest.mark.parametrize(
    ("source", "names"),
    [
        ("def f():\n    g = 1\n", {"f"}),
        ("async def f(): pass\nclass C:\n    x = 1", {"f", "C"}),
        ("import a.b, c as d\nfrom e import f as g, h", {"a", "d", "g", "h"}),
        ("a = b, (c, *d) = [1, (2, 3)]\ne: int = 1\nf += 1\n(g := 2)", {"a", "b", "c", "d", "e", "f", "g"}),
        ("if x:\n    def f(): pass\nelse:\n    f = 1\nfor i in y:\n    j = i\nwith z as w:\n    pass", {"f", "i", "j", "w"}),
        ("f = lambda: (g := 1)", {"f"}),
        ("from a import *", {ANY}),
        ("%matplotlib inline\nx = !ls\ny = 1\nlist?\n  ", {"y"}),
        ("x = (7\n% 3)", {"x"}),
        ("%%time\nx = 1", {"x"}),
        ("%%bash\nfor x in; do", set()),
        ("x = await f()", {"x"}),
        ("", set()),
    ],
)  # fmt: skip
def test_names_bound_at_top_level(source: str, names: set[str]) -> None:
    assert bound_names(Block("workings", 5, source + "\n")) == (names, [])


@pytest.mark.parametrize(
    ("source", "line"),
    [
        ("x = (\n", 6), ("x = 1\ny = = 2\n", 7), ("  x = 1\n", 6), ("return 3\n", 6), ("x = 1\nbreak\n", 7), ("x\0y\n", 6),
        ("def f(:\n", 6), ("'''\n\n", 6), ("f'{'\n", 6), ("x = 1 +\n", 6), ("é = ‘a’\n", 6), ("if x:\n", 6), ("-" * 100_000 + "1\n", 5),
        ("a" + ".a" * 100_000 + "\n", 5), ("(" * 300 + "\n", 6), ("lambda:" * 20_000 + "1\n", 5),
    ],
)  # fmt: skip
def test_no_python_is_told_at_its_line(source: str, line: int) -> None:
    names, problems = bound_names(Block("workings", 5, source))
    assert names == set()
    assert [problem.line for problem in problems] == [line]


def test_workings_are_never_executed(tmp_path: Path) -> None:
    trace = tmp_path / "executed"
    source = f"open({str(trace)!r}, 'w').close()\nimport no_such_module\nraise SystemExit(3)\n"
    assert ast.parse(source)
    assert told(block("python workings", source), block("toml system", "beta = 1"), STUDY_BLOCK) == []
    assert not trace.exists()
