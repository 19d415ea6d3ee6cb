"""A record is what formats.md says, and reference values are judged on the host."""

import json
from pathlib import Path
from typing import Any

import pytest

from bandbook.cases import Book, CheckedCase, ParameterSet, ParameterUse, Reference, case_of
from bandbook.exhibits import Quantity
from bandbook.records import Record, is_within, make_record
from bandbook.store import Result

QUANTITIES = (
    Quantity("levels.homo", "level", -1.545084972, "eV", "highest filled level", 0.618033989),
    Quantity("levels.gap", "difference", 3.09016994, "eV", "gap"),
    Quantity("levels.gap_levels", "count", 2, "", "gap levels"),
    Quantity("levels.k_1", "wavenumber", 0.2, "π/a", "k"),
    Quantity("levels.pi_energy", "total", None, "eV", "energy of the π electrons"),
    Quantity("workings.edge", "number", 0.25, "Å", "an edge"),
)
FILE = "content/cases/a/b.md"


def record(*references: Reference, recorded: tuple[Reference, ...] = (), **more: Any) -> Record:
    case = case_of("---\ntitle: A chain\n---\n", identity="a/b", file=FILE)
    uses = (ParameterUse("pi", "beta", "beta", 7, -2.5), ParameterUse("pi", "alpha", "alpha", 7, 0.0))
    checked = CheckedCase(case, {}, references, recorded, uses)
    book = Book(
        Path("/book"), Path("/book/docs"), sets={"pi": ParameterSet("pi", "docs/parameters/pi.toml", digest="sha256:5")}
    )
    exhibits = {
        "study": "levels",
        "kind": "table",
        "name": "levels",
        "file": "tables/levels.csv",
        "alt": "",
        "caption": "Levels.",
    }
    rows = tuple(quantity.as_dict() for quantity in more.get("quantities", QUANTITIES))
    warnings = ({"study": "levels", "text": "Mind the end."},)
    inputs, versions = {"system": "sha256:1"}, {"python": "3.11"}
    step = {**exhibits, "step": "step-1", "html": "<table>"}
    return make_record(checked, Result("sha256:0", rows, (step,), warnings, inputs, versions, {}, Path("/s")), book)


def reference(quantity: str = "levels.homo", value: float = -1.545, within: float = 0.001, **more: Any) -> Reference:
    return Reference(quantity, value, within, **{"note": "closed form", "line": 21, **more})


def test_as_dict_is_the_record_of_formats_md() -> None:
    found = record(
        reference(source="known1961", note=""),
        recorded=(
            Reference("levels.homo", 0.62, None, "beta", "known1961", "", 30),
            Reference("old.x", 1.5, None, note="notebook 3"),
        ),
    ).as_dict()
    assert list(found) == [
        "format", "case", "title", "key", "quantities", "references", "exhibits", "warnings", "inputs", "environment",
    ]  # fmt: skip
    assert (found["format"], found["case"], found["title"], found["key"]) == (1, "a/b", "A chain", "sha256:0")
    assert list(found["quantities"][0].items()) == [
        ("name", "levels.homo"),
        ("kind", "level"),
        ("value", -1.545084972),
        ("unit", "eV"),
        ("in_beta", 0.618033989),
        ("uncertainty", None),
        ("recorded", False),
        ("meaning", "highest filled level"),
    ]
    assert found["references"] == [
        {
            "quantity": "levels.homo",
            "value": -1.545,
            "within": 0.001,
            "found": -1.545084972,
            "unit": "eV",
            "agrees": True,
            "source": "known1961",
            "note": None,
        }
    ]
    assert found["exhibits"] == [
        {"study": "levels", "kind": "table", "file": "tables/levels.csv", "alt": "", "caption": "Levels."}
    ]
    assert found["warnings"] == ["levels: Mind the end."]
    assert found["inputs"] == {"system": "sha256:1", "parameters/pi.toml": "sha256:5"}
    assert found["environment"] == {"python": "3.11"}
    assert json.loads(json.dumps(found, allow_nan=False)) == found


def test_recorded_values_stand_among_the_quantities_and_say_so() -> None:
    recorded = (
        Reference("levels.homo", 0.62, None, "beta", "known1961"),
        Reference("old.x", 1.5, None, note="notebook 3"),
    )
    rows = record(recorded=recorded).as_dict()["quantities"]
    assert [row["name"] for row in rows if not row["recorded"]] == [quantity.name for quantity in QUANTITIES]
    assert rows[-2] == {
        "name": "levels.homo",
        "kind": "level",
        "value": None,
        "unit": "eV",
        "in_beta": 0.62,
        "uncertainty": None,
        "recorded": True,
        "meaning": "known1961",
    }
    assert (rows[-1]["value"], rows[-1]["unit"], rows[-1]["kind"], rows[-1]["meaning"]) == (
        1.5,
        "",
        "number",
        "notebook 3",
    )


@pytest.mark.parametrize(
    ("found", "stated", "within", "decimals", "agrees"),
    [
        (1.45, 1.40, 0.05, 9, True),
        (1.35, 1.40, 0.05, 9, True),
        (1.4500001, 1.40, 0.05, 9, False),
        (0.333333333, 1 / 3, 0.0, 9, True),  # half a unit of the ninth decimal
        (0.333333333, 1 / 3, 1e-12, 9, True),
        (0.333333334, 1 / 3, 0.0, 9, False),
        (0.333333333333, 1 / 3, 0.0, 12, True),
        (0.333333333, 1 / 3, 0.0, 12, False),
        (2.0, 2.0, 0.0, 0, True),
        (2.0, 3.0, 0.0, 0, False),
        (2.0, 2.5, 0.25, 0, False),
        (-0.0, 0.0, 0.0, 9, True),
        (12345.678901234, 12345.678901234, 0.0, 9, True),
        (None, 0.0, 1e9, 9, False),
    ],
)
def test_the_bound_is_included_and_stored_decimals_are_allowed_for(
    found: float | None,
    stated: float,
    within: float,
    decimals: int,
    agrees: bool,  # noqa: FBT001 - a column of the table
) -> None:
    assert is_within(found, stated, within, decimals=decimals) is agrees


def test_a_value_in_units_of_beta() -> None:
    (row,) = record(reference(value=0.618, unit="beta")).references
    assert (row["found"], row["unit"], row["agrees"]) == (0.618033989, "beta", True)
    assert record(reference(value=0.618)).agrees is False


def test_decimals_go_by_the_kind() -> None:
    assert record(reference("levels.k_1", 0.2 + 1e-10, 0.0)).agrees is False
    assert record(reference("levels.homo", -1.545084972 + 4e-10, 0.0)).agrees is True
    assert record(reference("levels.gap_levels", 2.0, 0.0)).agrees is True
    assert record(reference("levels.gap_levels", 2.4, 0.0)).agrees is False


@pytest.mark.parametrize("unit", ["", "beta"])
def test_no_answer_disagrees_with_every_number(unit: str) -> None:
    made = record(reference("levels.pi_energy", 0.0, 1e9, unit=unit))
    assert not made.agrees
    assert made.references[0]["found"] is None
    assert made.problems == ()
    assert made.disagreements[0].startswith(f"{FILE}:21: levels.pi_energy has no answer; the reference value is 0.0 ±")


def test_a_disagreement_names_its_line_both_numbers_and_the_source() -> None:
    made = record(
        reference(value=-1.6, source="known1961", note=""), reference(), reference(value=0.7, unit="beta", line=25)
    )
    assert made.agrees is False
    assert made.disagreements == (
        f"{FILE}:21: levels.homo is -1.545084972 eV; the reference value is -1.6 ± 0.001 eV (known1961); correct the case or the reference value",
        f"{FILE}:25: levels.homo is 0.618033989 β; the reference value is 0.7 ± 0.001 β (closed form); correct the case or the reference value",
    )


@pytest.mark.parametrize(
    ("stated", "text"),
    [
        (
            reference("levels.hommo"),
            'levels.hommo: the run gave "levels" no quantity "hommo"; it gave homo, gap, gap_levels, k_1, pi_energy; did you mean "homo"?',
        ),
        (
            reference("workings.egde"),
            'workings.egde: the run gave "workings" no quantity "egde"; it gave edge; did you mean "edge"?',
        ),
        (
            reference("bands.gap"),
            'bands.gap: the run gave no quantity "bands.gap"; it gave levels.homo, levels.gap, levels.gap_levels, levels.k_1, '
            "levels.pi_energy, workings.edge; name one of them",
        ),
        (
            reference("levels.gap", 1.0, unit="beta"),
            'levels.gap: "levels.gap" has no value in β; unit = "beta" needs a system with a β; '
            "give the system a beta_unit, or remove unit",
        ),
        (
            reference("workings.edge", 1.0, unit="beta"),
            'workings.edge: "workings.edge" has no value in β; a number has none; those of kind level, difference, total, fit,'
            " fit level have one; remove unit",
        ),
    ],
)
def test_a_mistake_that_only_a_run_shows(stated: Reference, text: str) -> None:
    made = record(stated, reference())
    assert [str(problem) for problem in made.problems] == [f"{FILE}:21: {text}"]
    assert [row["quantity"] for row in made.references] == ["levels.homo"]
    assert made.agrees


def test_a_run_that_gave_nothing() -> None:
    made = record(reference(), quantities=())
    assert "it gave nothing; name one of them" in str(made.problems[0])
    assert made.summary == ""


def test_a_long_list_of_names_is_cut() -> None:
    many = tuple(Quantity(f"levels.energy_{number}", "level", 1.0, "eV") for number in range(1, 40))
    (problem,) = record(reference("levels.zzz"), quantities=many).problems
    assert problem.allowed.endswith("energy_12, …")


def test_the_summary_leaves_out_what_has_no_answer_or_is_recorded() -> None:
    made = record(recorded=(Reference("old.gap", 9.0, None, note="n"),))
    assert [row["name"] for row in made.key_quantities] == ["levels.gap", "levels.homo"]
    assert made.summary == "levels.gap 3.0902 eV, levels.homo −1.5451 eV"
