"""Group 5: bands, gaps and end states in one dimension, and group 10: effective masses."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import constants, optimize, special

from bandbook import lattices
from bandbook.solver import cut_piece, solve_levels
from bandbook.solver.bands import Bands, Extreme, solve_bands
from bandbook.solver.hamiltonian import bloch
from bandbook.solver.masses import mass_at
from bandbook.solver.series import gap_series
from tests.reference.crystals import PHENYLENE, THIOPHENE
from tests.reference.rows import CLOSED, DIGITS, EXACT, MEMORY, PRINT, Row, each

COMPUTED = "computed for the list"
#: ħ²/m_e, eV Å².
SQUARE = constants.hbar**2 / constants.m_e / constants.e * 1e20


def alternating(inside: float, between: float, period: float | None = None) -> Bands:
    model = lattices.alternating_chain(beta_inside=-inside, beta_between=-between, period=period)
    return solve_bands(model, n_points=16)


def ring_energies() -> list[float]:
    """Return the energies of an alternating ring of four cells that belong to kA = 0, π/2, π, in β₁, falling."""
    model = lattices.alternating_chain(beta_inside=-1.0, beta_between=-0.8)
    found = -solve_levels(cut_piece(model, cells=4, ends="ring")).energy
    return [float(found[index]) for index in (0, 1, 2, 3, 4, 5, 6, 7)]


def end_states(n_cells: int) -> float:
    piece = cut_piece(lattices.alternating_chain(beta_inside=-0.6, beta_between=-1.0), cells=n_cells)
    return solve_levels(piece).lumo or math.nan


def chain_mass(beta: float, period: float) -> float | None:
    model = lattices.chain(beta=beta, period=period)
    return mass_at(model, np.zeros(1), band=0, width=4 * abs(beta)).mean


def gaps(model: object, lengths: list[int]) -> list[float]:
    return [float(gap) for gap in gap_series(model, lengths=lengths).gap]  # type: ignore[arg-type]


def displaced(u: float) -> Bands:
    """Return the bands of the SSH chain of 1979: t₀ = 2.5 eV, slope 4.1 eV/Å."""
    return alternating(2.5 + 2 * 4.1 * u, 2.5 - 2 * 4.1 * u)


ROWS = (
    Row("5.01 uniform chain, width", lambda: solve_bands(lattices.chain(beta=-2.5), n_points=8).total_width, 10, EXACT, "Feiguin, course notes", PRINT),
    Row("5.03 uniform chain, energy per atom", lambda: -(solve_bands(lattices.chain(beta=-1.0), n_points=8).energy_per_cell or 0), 1.273240, DIGITS[6], "Coulson 1939", MEMORY),
    Row("5.03 the same, exact", lambda: -(solve_bands(lattices.chain(beta=-1.0), n_points=8).energy_per_cell or 0), 4 / math.pi, EXACT, "Coulson 1939", CLOSED),
    Row("5.05 alternating chain, gap", lambda: alternating(2.85, 2.15).gap, 1.4, EXACT, "Lennard-Jones 1937", CLOSED),
    Row("5.05 alternating chain, where the gap is", lambda: alternating(2.85, 2.15).direct_k, [1.0], EXACT, "Lennard-Jones 1937", CLOSED),
    Row("5.05 alternating chain, total width", lambda: alternating(2.85, 2.15).total_width, 10, EXACT, "Lennard-Jones 1937", CLOSED),
    Row("5.06 alternating ring, energies", ring_energies, [1.8, 1.280625, 1.280625, 0.2, -0.2, -1.280625, -1.280625, -1.8], DIGITS[6], COMPUTED, CLOSED),
    Row("5.07 energy per cell, ratio 0.8", lambda: -(alternating(1, 0.8).energy_per_cell or 0), 2.335619, DIGITS[6], COMPUTED, CLOSED),
    Row("5.07 energy per cell, ratio 0.5", lambda: -(alternating(1, 0.5).energy_per_cell or 0), 2.127089, DIGITS[6], COMPUTED, CLOSED),
    Row("5.09 SSH, width 4t₀", lambda: displaced(0.0).total_width, 10, EXACT, "Su, Schrieffer & Heeger 1979", MEMORY),
    Row("5.10 SSH, gap 8αu", lambda: displaced(0.04).gap, 8 * 4.1 * 0.04, EXACT, "Su, Schrieffer & Heeger 1979", CLOSED),
    Row("5.17 trans-(CH)x, gap 8αu at u = 0.03 Å", lambda: displaced(0.03).gap, 0.98, DIGITS[2] * 1.01, "u: Fincher et al. 1982", PRINT),
    Row("5.24 end states, 8 cells", lambda: end_states(8), 0.010764, DIGITS[6], "exact levels for Asbóth, Oroszlány & Pályi's formula", CLOSED),
    Row("5.24 end states, 20 cells", lambda: end_states(20) * 1e5, 2.339941, DIGITS[6], "the same; there the formula w(1 − v²/w²)(v/w)ⁿ has the same digits", CLOSED),
    Row("5.25 two kinds of site, gap", lambda: solve_bands(lattices.diatomic_chain(beta_inside=-2.85, beta_between=-2.15, alpha_a=0.5, alpha_b=-0.5), n_points=8).gap, 2 * math.hypot(0.5, 0.7), EXACT, "Rice & Mele 1982", CLOSED),
    Row("5.26 poly(p-phenylene), gap", lambda: solve_bands(PHENYLENE, n_points=8).gap, 2 * (math.sqrt(2) - 1), EXACT, COMPUTED, CLOSED),
    Row("5.26 poly(p-phenylene), where the gap is", lambda: solve_bands(PHENYLENE, n_points=8).direct_k, [0.0], EXACT, COMPUTED, CLOSED),
    Row("5.26 oligo-p-phenylenes, gaps", lambda: gaps(PHENYLENE, [1, 2, 3, 4, 5, 6]), [2, 1.40925, 1.18529, 1.07225, 1.00623, 0.96403], DIGITS[5], COMPUTED, CLOSED),
    Row("5.27 polythiophene, gap", lambda: solve_bands(THIOPHENE, n_points=8).gap, 0.371681, DIGITS[6], "Van-Catledge's parameters, computed", CLOSED),
    Row("5.27 polythiophene, HOMO", lambda: edge(solve_bands(THIOPHENE, n_points=8).valence), 0, EXACT, "Van-Catledge's parameters, computed", CLOSED),
    Row("5.27 oligothiophenes, gaps", lambda: gaps(THIOPHENE, [1, 2, 3, 4, 5, 6]), [1.58492, 1.00838, 0.78468, 0.66759, 0.59652, 0.54936], DIGITS[5], "Van-Catledge's parameters, computed", CLOSED),
    Row("8.17 ħ²/m_e", lambda: SQUARE, 7.619964222, 1e-7, "scipy.constants", PRINT),
    Row("10.01 mass of a chain, 1.40 Å", lambda: chain_mass(-2.5, 1.40), 0.77755, DIGITS[5], COMPUTED, CLOSED),
    Row("10.01 mass of a chain, 1.22 Å", lambda: chain_mass(-2.5, 1.22), 1.02391, DIGITS[5], COMPUTED, CLOSED),
    Row("10.01 mass of a chain, 2.4 eV", lambda: chain_mass(-2.4, 1.40), 0.80995, DIGITS[5], COMPUTED, CLOSED),
    Row("10.02 mass of the alternating chain", lambda: [alternating(2.85, 2.15, 2.46).mass_hole.mean, alternating(2.85, 2.15, 2.46).mass_electron.mean], [0.14385, 0.14385], DIGITS[5], COMPUTED, CLOSED),
    Row("10.02 the same, exact", lambda: alternating(2.85, 2.15, 2.46).mass_hole.mean, SQUARE * 0.7 / (2.85 * 2.15 * 2.46**2), 1e-7, COMPUTED, CLOSED),
    Row("10.03 mass of the square lattice", lambda: mass_at(lattices.square(beta=-1.0, period=3.0), np.zeros(2), band=0, width=8.0).principal, [0.42333, 0.42333], DIGITS[5], COMPUTED, CLOSED),
)  # fmt: skip


def edge(extreme: Extreme | None) -> float:
    assert extreme is not None
    return extreme.energy


@each(ROWS)
def test_one_dimension(row: Row) -> None:
    row.check()


@given(st.floats(0.2, 4), st.floats(0.2, 4), st.floats(-1, 1))
def test_5_04_alternating_chain(inside: float, between: float, k: float) -> None:
    """Lennard-Jones 1937: α ± √(β₁² + β₂² + 2β₁β₂ cos kA)."""
    model = lattices.alternating_chain(beta_inside=-inside, beta_between=-between)
    found = np.linalg.eigvalsh(bloch(model, np.array([[k]]))[0][0])
    expected = abs(inside + between * np.exp(1j * math.pi * k))
    assert found == pytest.approx([-expected, expected], abs=EXACT)


@given(st.floats(0.3, 1.0))
def test_5_07_energy_is_an_elliptic_integral(ratio: float) -> None:
    """(4/π)(β₁ + β₂) E(m), m = 4β₁β₂/(β₁ + β₂)². Judge: scipy.special.ellipe."""
    expected = 4 / math.pi * (1 + ratio) * special.ellipe(4 * ratio / (1 + ratio) ** 2)
    assert alternating(1.0, ratio).energy_per_cell == pytest.approx(-expected, abs=1e-9)


@given(st.integers(1, 40), st.floats(0.3, 3.0))
def test_5_08_levels_of_an_open_alternating_chain(n_cells: int, ratio: float) -> None:
    """β₁ sin((n + 1)θ) + β₂ sin(nθ) = 0 for every level inside a band, E² = β₁² + β₂² + 2β₁β₂ cos θ."""
    piece = cut_piece(lattices.alternating_chain(beta_inside=-1.0, beta_between=-ratio), cells=n_cells)
    cosine = (solve_levels(piece).energy ** 2 - 1 - ratio**2) / (2 * ratio)
    inside = np.abs(cosine) < 1 - 1e-6
    theta = np.arccos(cosine[inside])
    scale = 1 + np.abs(np.sin(theta)) ** -1.0 * n_cells
    assert np.abs((np.sin((n_cells + 1) * theta) + ratio * np.sin(n_cells * theta)) / scale).max(initial=0) < EXACT
    outside = 2 if ratio > 1 + 1 / n_cells else 0
    assert abs(abs(ratio - 1 - 1 / n_cells)) < 1e-4 or np.count_nonzero(cosine < -1) == outside


def test_5_08_roots_are_found_one_by_one() -> None:
    """Judge: scipy.optimize.brentq, a root between the zeros of sin(nθ)."""
    n, ratio = 6, 0.8
    found = solve_levels(cut_piece(lattices.alternating_chain(beta_inside=-1.0, beta_between=-ratio), cells=n)).energy

    def condition(theta: float) -> float:
        return math.sin((n + 1) * theta) + ratio * math.sin(n * theta)

    roots = [
        optimize.brentq(condition, (j - 1) * math.pi / n + 1e-9, j * math.pi / n - 1e-9, xtol=1e-14)
        for j in range(1, n + 1)
    ]
    expected = np.sqrt(1 + ratio**2 + 2 * ratio * np.cos(roots))
    assert found == pytest.approx(np.sort([*expected, *-expected]), abs=EXACT)


@pytest.mark.parametrize("u", [0.01, 0.04, 0.1])
def test_5_11_electrons_of_the_displaced_chain(u: float) -> None:
    """Su, Schrieffer & Heeger 1979: −(4t₀/π) E(1 − z²) a site, z = 2αu/t₀. Judge: scipy.special.ellipe."""
    z = 2 * 4.1 * u / 2.5
    expected = -4 * 2.5 / math.pi * special.ellipe(1 - z**2)
    assert (displaced(u).energy_per_cell or 0) / 2 == pytest.approx(expected, abs=1e-8)


@pytest.mark.parametrize("n_cells", [3, 5, 8])
def test_end_states_fall_by_the_ratio_of_the_bonds(n_cells: int) -> None:
    """5.24: amplitudes −v/w a cell on one sublattice, seen in the sum and difference of the two levels."""
    piece = cut_piece(lattices.alternating_chain(beta_inside=-0.3, beta_between=-1.0), cells=4 * n_cells)
    vectors = solve_levels(piece).vectors[:, 4 * n_cells - 1 : 4 * n_cells + 1]
    left = (vectors @ vectors[0])[::2][:n_cells]
    assert left[1:] / left[:-1] == pytest.approx(np.full(n_cells - 1, -0.3), abs=1e-6)
