"""What every form of system must hold: a key of its own, checked parameters that are plain JSON, and no way to fall over."""

import copy
import json
from collections.abc import Iterator
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bandbook import lattices, registry
from bandbook.model import Model
from bandbook.parameters import KINDS, REQUIRED, Field
from bandbook.systems import COMMON, FORMS, Form

EXAMPLES: dict[str, dict[str, Any]] = {
    "named-lattice": {"lattice": "diatomic-chain", "beta_inside": -2.85, "beta_between": -2.15, "alpha_a": 0.5, "period": 2.46},
    "written-out": {
        "vectors": [[2.46, 0, 0]],
        "sites": [{"name": "A", "at": [0.0, 0, 0], "alpha": 0.5}, {"name": "B", "at": [1.36, 0, 0]}],
        "couplings": [
            {"from": "A", "to": "B", "beta": -2.85},
            {"from": "B", "to": "A", "cell": [1], "beta": -2.15, "overlap": 0.1},
        ],
    },
    "built-by": {"built_by": "wall", "with": {"half": 2, "bonds": [-2.5, -2.0]}},
}  # fmt: skip
COMMON_VALUES = {"name": "one", "electrons": 3, "charge": 1, "beta_unit": -2.5}
every_form = pytest.mark.parametrize("form", FORMS, ids=lambda form: form.name)


def wall(half: int = 1, bonds: tuple[float, float] = (-1.0, -1.0)) -> Model:
    assert half >= 1
    return lattices.alternating_chain(beta_inside=bonds[0], beta_between=bonds[1])


def every(fields: tuple[Field, ...]) -> Iterator[Field]:
    """Yield fields and the fields of their rows."""
    for field in fields:
        yield field
        yield from every(field.fields)


def test_names_and_keys_stand_once() -> None:
    assert len({form.name for form in FORMS}) == len({form.key for form in FORMS}) == len(FORMS)
    assert registry.FORM_NAMES == tuple(form.name for form in FORMS) == tuple(EXAMPLES)


@every_form
def test_fields_have_words(form: Form) -> None:
    fields = form.fields(EXAMPLES[form.name])
    assert form.meaning
    assert not form.meaning.endswith(".")
    assert form.key in {field.name for field in fields}
    assert set(COMMON) <= set(fields)
    for field in every(fields):
        assert field.kind in KINDS
        assert field.meaning
        assert not field.meaning.endswith(".")
        assert field.unit or field.kind not in {"number", "vector", "vectors"} or field.name == "overlap"
    names = [field.name for field in fields]
    assert len(set(names)) == len(names)


@every_form
def test_the_key_is_needed(form: Form) -> None:
    key = next(field for field in form.fields(EXAMPLES[form.name]) if field.name == form.key)
    assert key.default == REQUIRED
    _, problems = registry.check_system(
        {name: value for name, value in EXAMPLES[form.name].items() if name != form.key}
    )
    assert len(problems) == 1


@every_form
def test_fields_are_known_whatever_is_given(form: Form) -> None:
    tables: tuple[dict[str, Any], ...] = (
        {},
        {form.key: 5},
        {form.key: None},
        {form.key: []},
        {form.key: "none of them"},
    )
    for strange in tables:
        assert set(COMMON) <= set(form.fields(strange))


@every_form
def test_checked_parameters_are_plain_json_and_build_a_model(form: Form) -> None:
    example = copy.deepcopy(EXAMPLES[form.name])
    checked, problems = registry.check_system(example)
    assert problems == []
    assert checked is not None
    assert example == EXAMPLES[form.name], "what an author wrote is left as it is"
    assert checked["form"] == form.name
    assert "name" not in checked
    assert set(checked) == {"form", *(field.name for field in form.fields(example))} - {"name"}
    assert json.loads(json.dumps(checked, allow_nan=False)) == checked
    model = registry.build_system(checked, {"wall": wall})
    assert isinstance(model, Model)
    assert registry.build_system(json.loads(json.dumps(checked)), {"wall": wall}) == model


@every_form
def test_what_is_checked_checks_again(form: Form) -> None:
    checked, _ = registry.check_system({**EXAMPLES[form.name], **COMMON_VALUES})
    assert checked is not None
    given_again = without_none({name: value for name, value in checked.items() if name != "form"})
    assert registry.check_system(given_again) == (checked, [])


def without_none(value: Any) -> Any:
    """Return a table as an author writes it: TOML has no null."""
    if isinstance(value, dict):
        return {name: without_none(entry) for name, entry in value.items() if entry is not None}
    return [without_none(entry) for entry in value] if isinstance(value, list) else value


@every_form
def test_electrons_charge_and_unit_are_everybodys(form: Form) -> None:
    checked, problems = registry.check_system({**EXAMPLES[form.name], **COMMON_VALUES})
    assert problems == []
    assert checked is not None
    model = registry.build_system(checked, {"wall": wall})
    assert (model.n_electrons, model.beta_unit) == (2.0, -2.5)
    for name, wrong in [("electrons", 2.5), ("electrons", -1), ("charge", "1"), ("beta_unit", 0), ("name", "a-b")]:
        checked, problems = registry.check_system({**EXAMPLES[form.name], name: wrong})
        assert checked is None
        assert [problem.key for problem in problems] == [(name,)]


@every_form
def test_two_forms_at_once_are_one_problem(form: Form) -> None:
    for other in FORMS:
        if other is not form:
            both = {**EXAMPLES[form.name], other.key: EXAMPLES[other.name][other.key]}
            checked, problems = registry.check_system(both)
            assert checked is None
            assert len(problems) == 1
            assert "two forms at once" in problems[0].found


JUNK = st.one_of(
    st.none(), st.booleans(), st.integers(), st.floats(), st.text(max_size=6), st.just(10**400), st.dates(),
    st.lists(st.integers(-1, 3), max_size=4), st.dictionaries(st.sampled_from(["name", "beta", "x"]), st.integers(), max_size=2),
    st.sampled_from(["A", "B", "C", "ring", "chain", [-1], [1], [[1, 0, 0], [2, 0, 0]], []]),
)  # fmt: skip


@st.composite
def damaged(draw: st.DrawFn) -> dict[str, Any]:
    """Return an example with some values, rows or keys replaced, taken out or added."""
    table: dict[str, Any] = copy.deepcopy(EXAMPLES[draw(st.sampled_from(list(EXAMPLES)))])
    for _ in range(draw(st.integers(1, 4))):
        place: Any = table
        for _ in range(draw(st.integers(0, 3))):
            keys = list(place) if isinstance(place, dict) else list(range(len(place)))
            inner = [key for key in keys if isinstance(place[key], dict | list) and place[key]]
            if not inner:
                break
            place = place[draw(st.sampled_from(inner))]
        key = draw(st.sampled_from(list(place) if isinstance(place, dict) else list(range(len(place)))))
        if draw(st.booleans()):
            place[key] = copy.deepcopy(draw(JUNK))
        elif isinstance(place, dict) and len(place) > 1:
            del place[key]
        elif isinstance(place, dict):
            place[draw(st.sampled_from(["lattice", "sites", "electrons", "charge", "unknown"]))] = copy.deepcopy(
                draw(JUNK)
            )
        else:
            place.append(copy.deepcopy(place[key]))
    return table


@given(damaged())
def test_whatever_is_written_is_checked_or_told(table: dict[str, Any]) -> None:
    checked, problems = registry.check_system(table)
    assert (checked is None) == bool(problems)
    for problem in problems:
        assert all((problem.found, problem.allowed, problem.remedy))
        assert "\n" not in str(problem)
        assert not problem.key or problem.key[0] in table
    if checked is not None and checked["form"] != "built-by":
        assert isinstance(registry.build_system(checked, {}), Model)
