"""A named lattice: near names, mistakes of its fields and of the common keys, all at once."""

from typing import Any

import pytest

from bandbook import registry
from bandbook.errors import PhysicsError
from bandbook.systems import named_lattice
from bandbook.systems.form import Form, problems_of
from bandbook.systems.named_lattice import NAMED_LATTICE

RING: dict[str, Any] = {"lattice": "ring", "beta": -2.5, "sites": 6}


def keys(given: dict[str, Any]) -> list[tuple[str | int, ...]]:
    return [problem.key for problem in registry.check_system(given)[1]]


def test_a_ring_has_sites_of_its_own() -> None:
    """The key that tells a system written out is also a ring's number of sites."""
    checked, problems = registry.check_system(RING)
    assert problems == []
    assert checked is not None
    assert registry.build_system(checked, {}).n_sites == 6
    assert keys({**RING, "sites": 2}) == [("sites",)]
    assert keys({**RING, "sites": [{"name": "A"}]}) == [("sites",)]


@pytest.mark.parametrize("name", ["rign", "Ring", "ring "])
def test_a_misspelt_ring_is_no_system_written_out(name: str) -> None:
    (problem,) = registry.check_system({**RING, "lattice": name})[1]
    assert problem.key == ("lattice",)
    assert problem.remedy == 'did you mean "ring"?'


def test_an_unknown_lattice_hides_no_mistake_of_other_keys() -> None:
    given = {"lattice": "alternating chain", "beta_inside": True, "charge": 0.5, "electrons": -1}
    assert keys(given) == [("beta_inside",), ("charge",), ("electrons",), (), ("lattice",)]
    assert 'did you mean "alternating-chain"' in registry.check_system(given)[1][-1].remedy


@pytest.mark.parametrize("name", [5, True, None, ["chain"], "", {"name": "chain"}])
def test_a_lattice_that_is_no_name(name: Any) -> None:
    assert keys({"lattice": name, "beta": -1.0}) == [("lattice",)]


@pytest.mark.parametrize(
    ("given", "found"),
    [
        ({"electrons": 13}, "13 electrons on 6 sites"),
        ({"charge": 7}, "-1 electrons on 6 sites, with the charge 7"),
        ({"sites": 100_000, "charge": -200_000}, "300000 electrons on 100000 sites, with the charge -200000"),
    ],
)
def test_electrons_of_a_ring_are_counted_without_building_it(
    given: dict[str, Any], found: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    def refuse(*_: Any) -> None:
        raise AssertionError

    monkeypatch.setattr(named_lattice, "build", refuse)
    (problem,) = registry.check_system({**RING, **given})[1]
    assert problem.found == found


def test_charge_and_electrons_of_a_cell() -> None:
    chain = {"lattice": "chain", "beta": -2.5}
    assert keys({**chain, "charge": 2}) == [("charge",)]
    assert keys({**chain, "electrons": 3}) == [("electrons",)]
    checked, _ = registry.check_system({**chain, "electrons": 2, "charge": 1, "beta_unit": -2.7})
    assert checked is not None
    model = registry.build_system(checked, {})
    assert (model.n_electrons, model.beta_unit) == (1.0, -2.7)


def test_a_refusal_of_the_model_becomes_a_problem() -> None:
    def build(*_: Any) -> Any:
        raise PhysicsError("this; that is allowed; do so")

    form = Form("x", "x", "x", NAMED_LATTICE.fields, NAMED_LATTICE.inspect, build)
    (problem,) = problems_of({}, form.build)
    assert (problem.found, problem.allowed, problem.remedy) == ("this", "that is allowed", "do so")
