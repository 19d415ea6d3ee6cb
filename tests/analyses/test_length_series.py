"""Gap against length as a study reports it: closed forms, limits, and how far the forms miss them."""

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from scipy import optimize

from bandbook import lattices
from bandbook.exhibits import Answer
from bandbook.model import Coupling, Model, Site
from bandbook.parameters import Problem
from bandbook.solver.fits import FORMS

Ask = Callable[..., Answer]
Column = Callable[[Answer, str, str], list[Any]]
Texts = Callable[[Answer, str], list[str]]

ALTERNATING = lattices.alternating_chain(beta_inside=-2.85, beta_between=-2.15)
ENDED = lattices.alternating_chain(beta_inside=-2.15, beta_between=-2.85)
CHAIN = lattices.chain(beta=-2.5)


def alternating_gap(inside: float, between: float, n: int) -> float:
    """Return 2|E| at the largest root θ of β₁ sin((n + 1)θ) + β₂ sin(nθ) = 0, found by bracketing."""
    theta = np.linspace(1e-6, math.pi - 1e-6, 4001)
    values = inside * np.sin((n + 1) * theta) + between * np.sin(n * theta)
    last = np.flatnonzero(np.diff(np.sign(values)))[-1]
    root = optimize.brentq(
        lambda t: inside * math.sin((n + 1) * t) + between * math.sin(n * t), theta[last], theta[last + 1], xtol=1e-15
    )
    return 2 * math.sqrt(inside**2 + between**2 + 2 * inside * between * math.cos(root))


def test_alternating_chain(ask: Ask) -> None:
    """Every gap against its quantisation condition; the limit is 2||β₁| − |β₂||."""
    answer = ask(ALTERNATING, "length_series", cells="1..12")
    for n in range(1, 13):
        assert answer.value(f"gap_{n}") == pytest.approx(alternating_gap(2.85, 2.15, n), abs=1e-9)
        assert answer.value(f"extended_gap_{n}") == answer.value(f"gap_{n}")
    assert answer.value("band_gap") == pytest.approx(1.4, abs=1e-9)


def test_published_series(ask: Ask) -> None:
    """β₂/β₁ = 0.8 (closed form of Lennard-Jones 1937): 2, 1.354066, 1.058683, 0.892177, …; limit 0.4."""
    answer = ask(lattices.alternating_chain(beta_inside=-1.0, beta_between=-0.8), "length_series", cells="1..8")
    expected = [2, 1.354066, 1.058683, 0.892177, 0.786268, 0.713487, 0.660718, 0.620927]
    assert [answer.value(f"gap_{n}") for n in range(1, 9)] == pytest.approx(expected, abs=5e-7)
    assert answer.value("band_gap") == pytest.approx(0.4, abs=1e-9)


def test_end_levels_stay_out_of_the_extended_gap(ask: Ask, column: Column, texts: Texts) -> None:
    answer = ask(ENDED, "length_series", cells="1..20")
    assert answer.value("extended_gap_1") is None, "nothing remains"
    extended = np.array([answer.value(f"extended_gap_{n}") for n in range(2, 21)])
    assert np.all(np.diff(extended) < 0)
    assert np.all(np.diff(extended, 2) > 0)
    assert extended.min() > 1.4
    gaps = column(answer, "gaps", "gap")
    assert gaps[-1] < 0.1
    assert "Long pieces have 2 gap levels in the fundamental gap; the fits rest on the extended gap." in answer.warnings
    assert column(answer, "gaps", "fitted") == [False] + [True] * 19
    assert {"gap", "extended gap"} <= set(texts(answer, "series"))


def test_every_form_is_judged_by_the_limit(ask: Ask, column: Column) -> None:
    """Miss = limit less 1.4 eV; a warning for each form that misses by more than its window error."""
    answer = ask(ALTERNATING, "length_series", cells="1..40", fits=list(FORMS))
    limits, misses = column(answer, "fits", "limit"), column(answer, "fits", "miss")
    errors = column(answer, "fits", "window_error")
    assert misses == pytest.approx([limit - 1.4 for limit in limits], abs=1.1e-5)
    warned = {form for form in FORMS if any(text.startswith(f"The form {form} misses") for text in answer.warnings)}
    beyond = {form for form, miss, error in zip(FORMS, misses, errors, strict=True) if abs(miss) > error + 2e-5}
    assert warned == beyond
    assert [answer.value(f"limit_{form}") for form in FORMS] == limits
    assert all("=" in text for text in column(answer, "fits", "parameters"))


def test_open_shells_are_listed_and_left_out(ask: Ask, column: Column, texts: Texts) -> None:
    """Chains of odd length have one electron in the level at 0; those of even length 4|β| sin(π/(2(N + 1)))."""
    answer = ask(CHAIN, "length_series", cells="1..10")
    assert column(answer, "gaps", "open_shell") == [n % 2 == 1 for n in range(1, 11)]
    assert column(answer, "gaps", "fitted") == [n % 2 == 0 for n in range(1, 11)]
    for n in range(2, 11, 2):
        assert answer.value(f"gap_{n}") == pytest.approx(10 * math.sin(math.pi / (2 * (n + 1))), abs=1e-9)
    assert answer.value("extended_gap_4") is None
    assert answer.value("band_gap") == 0.0
    assert "5 lengths with an open shell: left out of the fits." in answer.warnings
    assert "There is no extended gap: the infinite system has no gap." in answer.warnings
    assert "gap, open shell" in texts(answer, "series")
    assert answer.figures[0].caption.startswith("Gap from 5.000 eV at N = 2 to ")


def test_rings_are_families(ask: Ask) -> None:
    answer = ask(CHAIN, "length_series", cells="3..12", ends="ring")
    assert [n for n in range(3, 13) if answer.value(f"gap_{n}")] == [6, 10]
    assert any("electrons mod 4" in text for text in answer.warnings)


def test_too_few_lengths_have_no_fit(ask: Ask, column: Column) -> None:
    answer = ask(ALTERNATING, "length_series", cells=[5])
    assert (answer.value("limit_inverse"), answer.value("limit_inverse-square")) == (None, None)
    assert column(answer, "fits", "remark") == ["1 lengths, and the form has 2 parameters"] * 2
    assert answer.figures[0].caption == (
        f"Gap {alternating_gap(2.85, 2.15, 5):.3f} eV at N = 5; the infinite system has 1.400 eV."
    )


def test_oscillators_enter_the_kuhn_form(ask: Ask, column: Column) -> None:
    """E₀√(1 + 2r cos(π/(N_o + 1))) with N_o = N · oscillators_per_cell; its limit is E₀√(1 + 2r)."""
    answers = [ask(ALTERNATING, "length_series", cells="2..12", fits=["kuhn"], oscillators_per_cell=n) for n in (1, 2)]
    one, two = (answer.value("limit_kuhn") for answer in answers)
    assert one is not None
    assert two is not None
    assert one != two
    e0, r = (
        float(part.split(" = ")[1].replace("−", "-"))
        for part in column(answers[1], "fits", "parameters")[0].split(", ")
    )
    assert two == pytest.approx(e0 * math.sqrt(1 + 2 * r), abs=1e-3), "five decimals of r"


def test_no_electrons_have_no_limit(ask: Ask) -> None:
    empty = Model((Site("A", electrons=0.0),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    answer = ask(empty, "length_series", cells="1..4")
    assert answer.value("band_gap") is None
    assert answer.value("gap_4") is None
    assert "no answer" in answer.figures[0].caption


def test_the_limit_is_written_at_its_end(ask: Ask, texts: Texts) -> None:
    words = texts(ask(ALTERNATING, "length_series", cells="1..10"), "series")
    assert {"limit", "1.400 eV", "gap / eV", "N / cells", "1/N (N in cells)", "inverse", "inverse-square"} <= set(words)


@pytest.mark.parametrize(
    "model", [lattices.square(beta=-1.0), lattices.ring(beta=-1.0, sites=6)], ids=["2D", "molecule"]
)
def test_a_series_needs_one_dimension(inspect: Callable[..., list[Problem]], model: Model) -> None:
    (problem,) = inspect(model, "length_series", cells="1..4")
    assert problem.key == ("question",)
    assert "a length series needs one" in str(problem)


def test_a_change_must_fit_the_shortest_piece(inspect: Callable[..., list[Problem]]) -> None:
    change = [{"cell": 2, "site": "A", "alpha": 0.5}]
    assert inspect(CHAIN, "length_series", cells="3..6", changes=change) == []
    (problem,) = inspect(CHAIN, "length_series", cells="1..6", changes=change)
    assert problem.key == ("changes", 0, "cell")


def test_rings_fall_into_families(ask: Ask, column: Column) -> None:
    """Rings of N atoms: 4|β| sin(π/N) for 4m + 2 electrons, open shell for 4m; alternating bonds close that: 1.4 eV."""
    answer = ask(CHAIN, "length_series", cells=list(range(3, 23)), ends="ring", fits=["inverse"])
    for n in (6, 10, 14, 18, 22):
        assert answer.value(f"gap_{n}") == pytest.approx(10.0 * math.sin(math.pi / n), abs=1e-8)
    assert [answer.value(f"gap_{n}") for n in (4, 8, 12)] == [0.0, 0.0, 0.0]
    assert answer.value("limit_inverse") is not None, "one family has closed shells, so its limit needs no name"
    answer = ask(
        ALTERNATING, "length_series", cells=list(range(2, 22)), ends="ring", fits=["inverse", "inverse-square"]
    )
    for n in (4, 8, 20):
        assert answer.value(f"gap_{n}") == pytest.approx(1.4, abs=1e-8)
    assert answer.value("limit_inverse_4m") == pytest.approx(1.4, abs=1e-5)
    assert answer.value("limit_inverse-square_4m+2") == pytest.approx(1.4, abs=0.4)
    assert set(column(answer, "fits", "family")) == {"4m", "4m+2"}


def test_a_measured_series_stands_beside_the_computed_one(ask: Ask, column: Column, texts: Texts) -> None:
    lengths = [2, 3, 4, 5, 6, 8]
    measured = {
        "label": "onsets (invented)",
        "lengths": lengths[::-1], "gaps": [1.5 + 3.0 / n for n in lengths[::-1]], "errors": [0.05] * 6,
    }  # fmt: skip
    answer = ask(ALTERNATING, "length_series", cells=list(range(1, 11)), fits=["inverse"], measured=measured)
    assert answer.value("measured_limit_inverse") == pytest.approx(1.5, abs=1e-5)
    design = np.array([[1, 1 / n] for n in lengths]) / 0.05
    assert answer.value("measured_limit_inverse_error") == pytest.approx(
        math.sqrt(np.linalg.inv(design.T @ design)[0, 0]), abs=1e-5
    )
    assert column(answer, "measured", "cells") == lengths
    gap = [answer.value(f"gap_{n}") or 0.0 for n in lengths]
    assert column(answer, "measured", "difference") == pytest.approx(
        [1.5 + 3.0 / n - one for n, one in zip(lengths, gap, strict=True)], abs=2e-6
    )
    assert "onsets (invented)" in texts(answer, "series")
    assert "measured series" in texts(answer, "limits")
    assert any("no one-electron gap" in warning for warning in answer.warnings)


def test_levels_of_several_lengths_stand_on_one_band(ask: Ask, texts: Texts) -> None:
    answer = ask(CHAIN, "length_series", cells=list(range(1, 21)))
    picture = next(figure for figure in answer.figures if figure.name == "on-band")
    assert (
        "N = 2: 2 on the bands, N = 4: 4 on the bands, N = 6: 6 on the bands, N = 10: 10 on the bands"
        in picture.caption
    )
    assert [text for text in texts(answer, "on-band") if text.startswith("N =")] == [
        "N = 2",
        "N = 4",
        "N = 6",
        "N = 10",
    ]
