"""Groups 5, 6, 7 and 10: bands, gaps and gap against length, against closed forms and published values.

Status: ``closed form`` unless a line says ``print`` (seen in print) or ``memory``.
"""

import math

import numpy as np
import pytest
from scipy import constants, special

from bandbook import lattices
from bandbook.solver import cut_piece, solve_levels
from bandbook.solver.bands import solve_bands
from bandbook.solver.fits import fit_series
from bandbook.solver.series import gap_series

ALTERNATING = lattices.alternating_chain(beta_inside=-1.0, beta_between=-0.8)


def test_5_01_uniform_chain_band() -> None:
    bands = solve_bands(lattices.chain(beta=-2.5, period=1.40))
    assert bands.energies[:, 0] == pytest.approx(-5.0 * np.cos(np.pi * bands.path.k[:, 0]), abs=1e-12)
    assert bands.total_width == pytest.approx(10.0, abs=1e-10)


def test_5_03_energy_per_atom() -> None:
    """Coulson 1939, memory: (4/π)β."""
    assert solve_bands(lattices.chain(beta=-1.0)).energy_per_cell == pytest.approx(-4 / math.pi, abs=1e-10)


def test_5_05_gap_and_width() -> None:
    bands = solve_bands(lattices.alternating_chain(beta_inside=-2.85, beta_between=-2.15))
    assert bands.gap == pytest.approx(1.40, abs=1e-10)
    assert bands.total_width == pytest.approx(10.0, abs=1e-10)


def test_5_06_energies() -> None:
    k = np.array([0.0, 0.5, 1.0])
    bands = solve_bands(ALTERNATING, n_points=240)
    found = np.interp(k, bands.path.k[:, 0], bands.energies[:, 0])
    assert found == pytest.approx([-1.8, -1.280625, -0.2], abs=1e-6)


@pytest.mark.parametrize("ratio", [0.8, 0.5])
def test_5_07_energy_per_cell(ratio: float) -> None:
    """Judge: scipy.special.ellipe; (4/π)(β₁ + β₂)E(m)."""
    bands = solve_bands(lattices.alternating_chain(beta_inside=-1.0, beta_between=-ratio))
    expected = 4 / math.pi * (1 + ratio) * special.ellipe(4 * ratio / (1 + ratio) ** 2)
    assert bands.energy_per_cell == pytest.approx(-expected, abs=1e-9)


@pytest.mark.parametrize(("n_cells", "energy", "tolerance"), [(8, 0.010764, 5e-7), (20, 2.339941e-5, 5e-11)])
def test_5_24_end_states(n_cells: int, energy: float, tolerance: float) -> None:
    piece = cut_piece(lattices.alternating_chain(beta_inside=-0.6, beta_between=-1.0), cells=n_cells)
    assert solve_levels(piece).lumo == pytest.approx(energy, abs=tolerance)


def test_5_25_two_kinds_of_site() -> None:
    """Rice & Mele 1982, memory: 2√(h² + (β₁ − β₂)²)."""
    model = lattices.diatomic_chain(beta_inside=-2.85, beta_between=-2.15, alpha_a=0.5, alpha_b=-0.5)
    assert solve_bands(model).gap == pytest.approx(2 * math.hypot(0.5, 0.7), abs=1e-10)


def test_6_01_graphene() -> None:
    """Wallace 1947, memory: ±3t at Γ, ±t at M, 0 at K."""
    bands = solve_bands(lattices.honeycomb(beta=-1.0))
    assert [float(bands.points[name][1]) for name in ("Gamma", "M", "K")] == pytest.approx([3, 1, 0], abs=1e-10)
    assert bands.gap == 0.0
    assert bands.kind == "bands touch"


@pytest.mark.parametrize(
    ("lines", "gap"),
    [(3, 0.828427), (4, 0.763932), (5, 0), (6, 0.493959), (8, 0), (10, 0.338340), (11, 0), (12, 0.272259)],
)
def test_6_09_armchair_ribbons(lines: int, gap: float) -> None:
    """Zheng et al. 2007, print for the period of three; the numbers are closed forms."""
    found = solve_bands(lattices.armchair_ribbon(beta=-1.0, lines=lines)).gap
    p = np.arange(1, lines + 1)
    exact = 2 * np.abs(1 + 2 * np.cos(p * np.pi / (lines + 1))).min()
    assert found == pytest.approx(exact, abs=1e-10)
    assert found == pytest.approx(gap, abs=5e-7)


@pytest.mark.parametrize("lines", [2, 3, 6])
def test_6_10_zigzag_ribbons_have_no_gap(lines: int) -> None:
    """Nakada et al. 1996, print for the statement."""
    assert solve_bands(lattices.zigzag_ribbon(beta=-1.0, lines=lines)).gap == 0.0


@pytest.mark.parametrize("lines", [2, 5])
def test_6_11_zigzag_ribbon_at_the_zone_edge(lines: int) -> None:
    found = solve_bands(lattices.zigzag_ribbon(beta=-1.0, lines=lines)).points["X"]
    expected = np.sort([*[-1.0] * (lines - 1), 0, 0, *[1.0] * (lines - 1)])
    assert found == pytest.approx(expected, abs=1e-10)


def test_6_17_square_lattice_width() -> None:
    assert solve_bands(lattices.square(beta=-1.0)).total_width == pytest.approx(8.0, abs=1e-10)


def test_6_31_polyacene_touches() -> None:
    """Kivelson & Chapman 1983, print."""
    bands = solve_bands(lattices.polyacene(beta=-1.0))
    assert (bands.gap, bands.kind) == (0.0, "bands touch")


def test_6_32_polyacene_bands() -> None:
    bands = solve_bands(lattices.polyacene(beta=-1.0))
    root = np.sqrt(9 + 8 * np.cos(np.pi * bands.path.k[:, 0]))
    expected = np.sort(np.stack([(1 + root) / 2, (1 - root) / 2, (-1 + root) / 2, (-1 - root) / 2]), axis=0)
    assert pytest.approx(expected, abs=1e-10) == bands.energies.T


@pytest.mark.parametrize(("n", "homo"), list(enumerate([1, 0.61803, 0.41421, 0.29496, 0.21969, 0.16937], start=1)))
def test_6_33_acenes(n: int, homo: float) -> None:
    """Coulson 1948, memory."""
    piece = cut_piece(lattices.polyacene(beta=-1.0), cells=n, add=["A1", "B1"])
    found = solve_levels(piece).homo
    assert found == pytest.approx(-(-1 + math.sqrt(9 + 8 * math.cos(n * math.pi / (n + 1)))) / 2, abs=1e-10)
    assert found == pytest.approx(-homo, abs=5e-6)


def test_6_34_gapped_honeycomb() -> None:
    assert solve_bands(lattices.honeycomb(beta=-2.7, alpha_a=1.0, alpha_b=-1.0)).gap == pytest.approx(2.0, abs=1e-9)


def test_7_04_fits_of_oligothiophenes() -> None:
    """Wavelengths from memory (not authoritative): a check of the fitting only."""
    gap = 1239.84198 / np.array([302.0, 354.0, 390.0, 416.0, 432.0])
    n = np.arange(2.0, 7.0)
    inverse, kuhn = fit_series("inverse", n, gap), fit_series("kuhn", n, gap)
    assert [inverse.parameters["A"], inverse.parameters["B"]] == pytest.approx([2.2452, 3.7318], abs=5e-5)
    assert inverse.rms == pytest.approx(0.0083, abs=5e-5)
    assert kuhn.limit == pytest.approx(2.4562, abs=5e-4)
    assert fit_series("exponential", n, gap).limit == pytest.approx(2.7305, abs=5e-4)


def test_7_06_fits_of_oligophenylenes() -> None:
    """Gillam & Hey 1939, memory: a check of the fitting only."""
    gap = 1239.84198 / np.array([251.5, 280.0, 300.0, 310.0, 317.5])
    n = np.arange(2.0, 7.0)
    assert fit_series("inverse", n, gap).limit == pytest.approx(3.3780, abs=5e-5)
    assert fit_series("kuhn", n, gap).limit == pytest.approx(3.5949, abs=5e-4)


def test_7_07_a_kuhn_series_is_recovered() -> None:
    n = np.arange(1.0, 9.0)
    gap = np.array([5, 3.70810, 3.01488, 2.60713, 2.34828, 2.17444, 2.05249, 1.96390])
    fit = fit_series("kuhn", n, gap)
    assert [fit.parameters["E0"], fit.parameters["r"], fit.limit] == pytest.approx([5, -0.45, 1.58114], abs=2e-5)


def test_7_08_uniform_chain() -> None:
    lengths = [2 * n for n in range(1, 8)]
    found = gap_series(lattices.chain(beta=-1.0), lengths=lengths).gap
    assert found == pytest.approx([2, 1.236068, 0.890084, 0.694593, 0.569259, 0.482147, 0.418114], abs=5e-7)


def test_7_09_alternating_chain() -> None:
    series = gap_series(ALTERNATING, lengths=range(1, 9))
    assert series.gap == pytest.approx(
        [2, 1.354066, 1.058683, 0.892177, 0.786268, 0.713487, 0.660718, 0.620927], abs=5e-7
    )
    assert series.band_gap == pytest.approx(0.4, abs=1e-10)


@pytest.mark.parametrize(("form", "limit"), [("inverse", 0.4055), ("quadratic", 0.3184), ("kuhn", 0.4216)])
def test_7_10_what_fits_give(form: str, limit: float) -> None:
    series = gap_series(ALTERNATING, lengths=range(2, 7))
    assert fit_series(form, series.n_cells.astype(float), series.gap).limit == pytest.approx(limit, abs=5e-5)


@pytest.mark.parametrize(("inside", "between"), [(-2.85, -2.15), (-2.15, -2.85)])
def test_the_extended_gap_falls_in_shrinking_steps(inside: float, between: float) -> None:
    """An invariant: in both terminations, from two cells on, towards the computed limit."""
    model = lattices.alternating_chain(beta_inside=inside, beta_between=between)
    series = gap_series(model, lengths=range(1, 41))
    steps = np.diff(series.extended_gap[1:])
    assert (steps < 0).all()
    assert (np.diff(np.abs(steps)) < 0).all()
    assert series.extended_gap[-1] > series.band_gap
    assert series.n_gap_levels == (0 if inside < between else 2)


def test_10_01_mass_of_a_chain() -> None:
    """Closed form ħ²/(2|β|a²) at the band's bottom: one electron pair in a doubled cell would fill it."""
    hbar_squared = constants.hbar**2 / constants.m_e / constants.e * 1e20
    assert hbar_squared / (2 * 2.5 * 1.40**2) == pytest.approx(0.77755, abs=5e-6)


def test_10_02_mass_of_the_alternating_chain() -> None:
    bands = solve_bands(lattices.alternating_chain(beta_inside=-2.85, beta_between=-2.15, period=2.46))
    assert bands.mass_hole.mean == pytest.approx(0.14385, abs=5e-6)
    assert bands.mass_electron.mean == pytest.approx(0.14385, abs=5e-6)
