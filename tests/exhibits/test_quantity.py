"""Kinds fix decimals and the conversion to β; numbers are stored and shown without surprises."""

import json
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from bandbook.exhibits import KINDS, Quantity, QuantityName, fixed, in_beta, typeset

finite = st.floats(-1e6, 1e6, allow_nan=False)


def test_every_kind_has_decimals_and_a_tolerance_above_them() -> None:
    """Across processors a stored value may differ by one unit of its last decimal."""
    for name, kind in KINDS.items():
        assert kind.name == name
        assert kind.beta in {"", "level", "difference", "total"}
        assert bool(kind.beta) == (kind.unit == "eV")
        assert kind.shown <= kind.decimals
        assert kind.tolerance >= 10.0**-kind.decimals or kind.name == "count"


@pytest.mark.parametrize(
    ("value", "stored"),
    [
        (1 / 3, 0.333333333),
        (-1e-12, 0.0),
        (-0.0, 0.0),
        (float("nan"), None),
        (float("-inf"), None),
        (10**400, None),
        (np.float64(0.5), 0.5),
        (True, 1.0),
        (1e300, 1e300),
    ],
)
def test_numbers_have_fixed_decimals(value: float, stored: float | None) -> None:
    found = fixed(value, 9)
    assert found == stored
    if found is not None:
        assert type(found) is float
        assert math.copysign(1.0, found) == 1.0


@given(finite)
def test_what_is_fixed_stays_and_is_near(value: float) -> None:
    found = fixed(value, 9)
    assert found is not None
    assert abs(found - value) <= 5.001e-10 + math.ulp(value)
    assert fixed(found, 9) == found
    assert json.loads(json.dumps(found)) == found


def test_a_quantity_stores_rounded_numbers() -> None:
    found = Quantity("levels.homo", "level", np.float64(-1 / 3), "eV", "highest", in_beta=1 / 7, uncertainty=0.01 / 3)
    assert found.as_dict() == {
        "name": "levels.homo", "kind": "level", "value": -0.333333333, "unit": "eV", "in_beta": 0.142857143,
        "uncertainty": 0.003333333, "meaning": "highest",
    }  # fmt: skip
    assert json.loads(json.dumps(found.as_dict(), allow_nan=False)) == found.as_dict()
    assert found.named("other.homo").name == "other.homo"
    nothing = Quantity("levels.gap", "difference", float("nan"), "eV", in_beta=float("inf"))
    assert (nothing.value, nothing.in_beta) == (None, None)
    with pytest.raises(KeyError):
        Quantity("levels.gap", "differnce", 1.0)


@pytest.mark.parametrize(
    ("kind", "value", "expected"),
    [
        ("level", -5.1, (-5.1 - 0.4) / -2.5),
        ("difference", 5.0, 2.0),
        ("total", -22.0, (-22.0 - 4 * 0.4) / -2.5),
        ("number", 5.0, None),
        ("wavenumber", 0.5, None),
    ],
)
def test_units_of_beta(kind: str, value: float, expected: float | None) -> None:
    found = in_beta(value, kind, beta=-2.5, alpha=0.4, electrons=4)
    assert found == (None if expected is None else pytest.approx(expected, abs=1e-14))


def test_without_a_value_or_a_unit_there_is_no_beta() -> None:
    assert in_beta(None, "level", beta=-2.5) is None
    assert in_beta(1.0, "level", beta=None) is None
    assert in_beta(1.0, "level", beta=0.0) is None


@given(finite, finite, st.floats(0.1, 10))
def test_a_bonding_level_is_positive_and_a_difference_has_no_sign_of_beta(alpha: float, x: float, size: float) -> None:
    for beta in (size, -size):
        found = in_beta(alpha + x * beta, "level", beta=beta, alpha=alpha)
        assert found == pytest.approx(x, abs=1e-8 * (1 + abs(alpha) / size + abs(x)))
        assert in_beta(abs(x), "difference", beta=beta) == pytest.approx(abs(x) / size)


@pytest.mark.parametrize(
    ("pattern", "name", "does"),
    [
        ("gap", "gap", True), ("gap", "gap_levels", False), ("gap_<N>", "gap_12", True), ("gap_<N>", "gap_levels", False),
        ("gap_<N>", "gap_", False), ("energy_<n>", "energy_1", True), ("energy_<n>", "energy_0", False),
        ("energy_<n>", "energy_01", False), ("energy_<n>", "energy_-1", False), ("energy_<n>", "energy_١", False),
        ("energy_<point>_<n>", "energy_Gamma_2", True), ("energy_<point>_<n>", "energy_2", False),
        ("limit_<fit>", "limit_inverse-square", True), ("limit_<fit>", "limit_", False), ("a.b", "axb", False),
    ],
)  # fmt: skip
def test_names_of_a_pattern(pattern: str, name: str, does: bool) -> None:  # noqa: FBT001 - a column of the table
    assert QuantityName(pattern, "number", "a number").fits(name) is does


@pytest.mark.parametrize(
    ("value", "decimals", "uncertainty", "text"),
    [
        (None, 3, None, "—"),
        (float("nan"), 3, None, "—"),
        (-2.1499999, 3, None, "−2.150"),
        (-1e-9, 3, None, "0.000"),
        (3, 0, None, "3"),
        (1.6183, 4, 0.081, "1.62(8)"),
        (1.6183, 4, 0.0958, "1.6(1)"),
        (1.6183, 4, 0.1, "1.6(1)"),
        (-1.6183, 4, 0.001, "−1.618(1)"),
        (-0.0004, 4, 0.01, "0.00(1)"),
        (161.83, 4, 12.0, "162(12)"),
        (161.83, 4, 1.5, "162(2)"),
        (1.6183, 2, 0.0, "1.62"),
        (1.6183, 2, float("nan"), "1.62"),
        (1.6183, 2, -1.0, "1.62"),
    ],
)
def test_typesetting(value: float | None, decimals: int, uncertainty: float | None, text: str) -> None:
    assert typeset(value, decimals, uncertainty) == text


@given(finite, st.floats(1e-9, 1e3))
def test_a_typeset_uncertainty_has_the_decimals_of_its_value(value: float, uncertainty: float) -> None:
    text = typeset(value, 4, uncertainty).replace("−", "-")
    number, _, digits = text.rstrip(")").partition("(")
    decimals = len(number.partition(".")[2])
    assert int(digits) * 10.0**-decimals == pytest.approx(uncertainty, rel=0.5)
    assert float(number) == pytest.approx(value, abs=0.500001 * 10.0**-decimals + math.ulp(value))
