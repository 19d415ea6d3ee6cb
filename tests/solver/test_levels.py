"""Levels of pieces against closed forms, networkx spectra, sympy polynomials and invariants."""

import math
from itertools import pairwise

import networkx as nx
import numpy as np
import pytest
import sympy
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from bandbook.errors import PhysicsError
from bandbook.model import Coupling, Model, Site
from bandbook.solver import Levels, Piece, cut_piece, frontier_energies, levels, selected, solve_levels

CHAIN = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
ACENE = Model(
    tuple(Site(name) for name in ("A1", "B1", "A2", "B2")),
    (
        Coupling(0, 1, -1.0, (0,)),
        Coupling(0, 2, -1.0, (0,)),
        Coupling(1, 3, -1.0, (0,)),
        Coupling(2, 0, -1.0, (1,)),
        Coupling(3, 1, -1.0, (1,)),
    ),
    dimension=1,
)


def pairs(inside: float, between: float) -> Model:
    return Model((Site("A"), Site("B")), (Coupling(0, 1, inside, (0,)), Coupling(1, 0, between, (1,))), dimension=1)


def molecule(graph: nx.Graph, *, beta: float = -1.0, electrons: float | None = None) -> Model:
    nodes = {node: index for index, node in enumerate(graph.nodes)}
    bonds = tuple(Coupling(nodes[a], nodes[b], beta) for a, b in graph.edges)
    return Model(tuple(Site(f"C{index}") for index in range(len(nodes))), bonds, electrons=electrons)


def x_of(model: Model, **piece: object) -> NDArray[np.float64]:
    """Return x = E/β for β = −1, falling: the bonding level first."""
    return -solve_levels(cut_piece(model, **piece)).energy  # type: ignore[arg-type]  # handed on as they are


def check_orbitals(piece: Piece, found: Levels) -> None:
    """Hold H c = E S c and cᵀ S c = 1."""
    H, S = piece.matrices()
    overlap = np.eye(piece.n_sites) if S is None else S
    assert H @ found.vectors == pytest.approx(overlap @ found.vectors * found.energy, abs=1e-9)
    assert found.vectors.T @ overlap @ found.vectors == pytest.approx(np.eye(piece.n_sites), abs=1e-10)


@pytest.mark.parametrize("n", [1, 2, 3, 4, 5, 10, 33, 200])
def test_open_chain(n: int) -> None:
    """x_j = 2 cos(jπ/(N+1)) (Coulson 1938); total energies Coulson & Longuet-Higgins 1947; gap of the even chains."""
    piece = cut_piece(CHAIN, cells=n)
    found = solve_levels(piece)
    assert -found.energy == pytest.approx(2 * np.cos(np.arange(1, n + 1) * np.pi / (n + 1)), abs=1e-12)
    angle = math.pi / (2 * (n + 1))
    total = 2 * ((1 / math.sin(angle) if n % 2 == 0 else 1 / math.tan(angle)) - 1)
    assert found.pi_energy == pytest.approx(-total, abs=1e-10)
    assert found.gap == pytest.approx(4 * math.sin(angle) if n % 2 == 0 else 0, abs=1e-12)
    assert found.is_open_shell == bool(n % 2)
    check_orbitals(piece, found)


def test_butadiene_orbitals() -> None:
    """Published coefficients 0.372, 0.602, signs ++++, ++−−, +−−+, +−+−; here the largest component is positive."""
    vectors = solve_levels(cut_piece(CHAIN, cells=4)).vectors
    small, large = 0.371748, 0.601501
    expected = [
        [small, large, large, small],
        [large, small, -small, -large],
        [large, -small, -small, large],
        [-small, large, -large, small],
    ]
    assert pytest.approx(np.array(expected), abs=1e-6) == vectors.T


@pytest.mark.parametrize("n", [3, 4, 5, 6, 7, 12, 61])
def test_rings(n: int) -> None:
    """x_m = 2 cos(2πm/N)."""
    piece = cut_piece(CHAIN, cells=n, ends="ring")
    found = solve_levels(piece)
    assert -found.energy == pytest.approx(np.sort(2 * np.cos(2 * np.pi * np.arange(n) / n))[::-1], abs=1e-12)
    assert set(found.degeneracy.tolist()) <= {1, 2}
    assert found.participation == pytest.approx(np.full(n, n), abs=1e-9)
    check_orbitals(piece, found)


def test_benzene_and_cyclobutadiene_fill_their_groups() -> None:
    benzene = solve_levels(cut_piece(CHAIN, cells=6, ends="ring"))
    assert [part.stop - part.start for part in benzene.groups] == [1, 2, 2, 1]
    assert benzene.occupation.tolist() == [2, 2, 2, 0, 0, 0]
    assert (benzene.homo, benzene.lumo) == pytest.approx((-1, 1))
    assert not benzene.is_open_shell
    assert benzene.pi_energy == pytest.approx(-8)
    square = solve_levels(cut_piece(CHAIN, cells=4, ends="ring"))
    assert square.occupation.tolist() == [2, 1, 1, 0]
    assert (square.homo, square.lumo) == pytest.approx((0, 0))
    assert square.gap == 0
    assert square.is_open_shell


def test_anthracene() -> None:
    """Coulson & Streitwieser: ±2.41421, ±2, ±1.41421 (×2), ±1 (×2), ±0.41421; Eπ 19.31371."""
    found = solve_levels(cut_piece(ACENE, cells=3, add=["A1", "B1"]))
    root = math.sqrt(2)
    half = [root + 1, 2, root, root, 1, 1, root - 1]
    assert -found.energy == pytest.approx(np.array([*half, *(-x for x in reversed(half))]), abs=1e-12)
    assert found.pi_energy == pytest.approx(-19.31371, abs=5e-6)
    assert found.degeneracy.tolist() == [1, 1, 2, 2, 2, 2, 1, 1, 2, 2, 2, 2, 1, 1]


@pytest.mark.parametrize(
    "graph",
    [
        nx.path_graph(9),
        nx.cycle_graph(10),
        nx.star_graph(4),
        nx.petersen_graph(),
        nx.cubical_graph(),
        nx.grid_2d_graph(4, 5),
    ],
    ids=["path", "cycle", "star", "petersen", "cube", "grid"],
)
def test_molecules_have_the_spectra_of_their_graphs(graph: nx.Graph) -> None:
    expected = np.sort(nx.adjacency_spectrum(graph).real)[::-1]
    assert x_of(molecule(graph)) == pytest.approx(expected, abs=1e-10)


@pytest.mark.parametrize("graph", [nx.lollipop_graph(3, 3), nx.cycle_graph(7), nx.path_graph(5), nx.wheel_graph(6)])
def test_levels_are_the_roots_of_the_characteristic_polynomial(graph: nx.Graph) -> None:
    x = sympy.Symbol("x")
    matrix = sympy.Matrix(nx.to_numpy_array(graph, dtype=int).tolist())
    polynomial = sympy.Poly(matrix.charpoly(x).as_expr(), x)
    roots = [
        float(sympy.re(root))
        for factor, times in polynomial.factor_list()[1]
        for root in factor.nroots(n=20)
        for _ in range(times)
    ]
    assert x_of(molecule(graph)) == pytest.approx(np.sort(roots)[::-1], abs=1e-10)


@settings(max_examples=60, deadline=None)
@given(st.integers(1, 40), st.floats(0.3, 3), st.floats(0.3, 3))
def test_open_alternating_chain(n: int, inside: float, between: float) -> None:
    """Every level: β₁ sin((n+1)θ) + β₂ sin(nθ) = 0 with E² = β₁² + β₂² + 2β₁β₂ cos θ, θ real or complex.

    β₁ inside the cells, β₂ between, as U_n(y) β₁ + U_{n−1}(y) β₂ = 0 of y = cos θ, which holds for both.
    """
    for energy in solve_levels(cut_piece(pairs(-inside, -between), cells=n)).energy:
        y = (energy**2 - inside**2 - between**2) / (2 * inside * between)
        before, now, scale = 0.0, 1.0, 1.0
        for _ in range(n):
            before, now = now, 2 * y * now - before
            scale = max(scale, abs(now), abs(before))
        slope = (n + 1) ** 2 * scale
        assert abs(inside * now + between * before) <= 1e-9 * slope


@settings(max_examples=50, deadline=None)
@given(st.data())
def test_invariants(data: st.DataObject) -> None:
    """Trace, second moment, rigid shift, scaling and the sum of electrons."""
    n = data.draw(st.integers(1, 9))
    number = st.floats(-3, 3).map(lambda value: round(value, 6))
    alphas = data.draw(st.lists(number, min_size=n, max_size=n))
    bonds = [(a, b, data.draw(number)) for a in range(n) for b in range(a + 1, n) if data.draw(st.booleans())]
    electrons = data.draw(st.integers(0, 2 * n))

    def solved(shift: float, factor: float) -> Levels:
        sites = tuple(Site(f"S{index}", alpha=factor * alpha + shift) for index, alpha in enumerate(alphas))
        couplings = tuple(Coupling(a, b, factor * beta) for a, b, beta in bonds)
        return solve_levels(cut_piece(Model(sites, couplings, electrons=electrons)))

    found = solved(0, 1)
    assert found.energy.sum() == pytest.approx(sum(alphas), abs=1e-10)
    moment = sum(alpha**2 for alpha in alphas) + 2 * sum(beta**2 for *_, beta in bonds)
    assert (found.energy**2).sum() == pytest.approx(moment, abs=1e-9)
    assert solved(1.5, 1).energy == pytest.approx(found.energy + 1.5, abs=1e-10)
    assert solved(0, 2.5).energy == pytest.approx(found.energy * 2.5, abs=1e-10)
    assert found.occupation.sum() == pytest.approx(electrons)
    assert found.pi_energy == pytest.approx(found.occupation @ found.energy)


@settings(max_examples=30, deadline=None)
@given(st.integers(2, 12), st.integers(0, 2**32 - 1))
def test_levels_of_alternants_come_in_pairs(n: int, seed: int) -> None:
    rng = np.random.default_rng(seed)
    bonds = [(a, b) for a in range(0, n, 2) for b in range(1, n, 2) if rng.random() < 0.6]
    assume(bonds)
    couplings = tuple(Coupling(a, b, float(rng.normal())) for a, b in bonds)
    energy = solve_levels(cut_piece(Model(tuple(Site(f"S{site}") for site in range(n)), couplings))).energy
    assert energy == pytest.approx(-energy[::-1], abs=1e-10)


@pytest.mark.parametrize("overlap", [0.0, 0.25])
def test_overlap_in_the_way_of_wheland(overlap: float) -> None:
    """With s proportional to β, E = (α + xβ)/(1 + Sx) (Wheland 1941)."""
    alpha, beta = -1.0, -2.5
    sites = tuple(Site(f"C{site}", alpha=alpha) for site in range(4))
    model = Model(sites, tuple(Coupling(a, b, beta, overlap=overlap) for a, b in pairwise(range(4))))
    piece = cut_piece(model)
    found = solve_levels(piece)
    x = 2 * np.cos(np.arange(1, 5) * np.pi / 5)
    assert found.energy == pytest.approx((alpha + x * beta) / (1 + overlap * x), abs=1e-12)
    check_orbitals(piece, found)
    assert piece.populations(found.vectors).sum(axis=0) == pytest.approx(np.ones(4))


def test_an_overlap_that_is_not_positive_is_refused() -> None:
    model = Model((Site("A"), Site("B")), (Coupling(0, 1, -1.0, overlap=1.2),))
    with pytest.raises(PhysicsError, match=r"smallest eigenvalue of the overlap matrix of the piece is -0\.2"):
        solve_levels(cut_piece(model))


def test_no_coupling_leaves_the_sites() -> None:
    found = solve_levels(cut_piece(pairs(-1.0, 0.0), cells=4))
    assert found.energy.tolist() == pytest.approx([-1] * 4 + [1] * 4)
    assert found.degeneracy.tolist() == [4] * 8
    assert found.gap == pytest.approx(2)
    assert found.participation == pytest.approx(np.full(8, 8))


@pytest.mark.parametrize(("electrons", "homo", "lumo"), [(0, None, -1.0), (4, 1.0, None), (1, -1.0, -1.0)])
def test_empty_full_and_single(electrons: int, homo: float | None, lumo: float | None) -> None:
    model = Model((Site("A"), Site("B")), (Coupling(0, 1, -1.0),), electrons=electrons)
    found = solve_levels(cut_piece(model))
    assert (found.homo, found.lumo) == (homo, lumo)
    assert found.is_open_shell == (electrons == 1)
    assert found.gap == (0 if electrons == 1 else None)


@pytest.mark.parametrize("cells", [2_001, 30_000])
def test_a_long_chain_gives_the_levels_around_its_fermi_energy(cells: int) -> None:
    found = solve_levels(cut_piece(CHAIN, cells=cells))
    low = cells // 2 - 20
    high = (cells + 1) // 2 + 20
    expected = -2 * np.cos(np.arange(low + 1, high + 1) * np.pi / (cells + 1))
    assert found.energy == pytest.approx(expected, abs=1e-13)
    assert (found.first, found.n_levels, found.is_selected, found.pi_energy) == (low, cells, True, None)
    assert found.is_open_shell == bool(cells % 2)
    assert found.gap == pytest.approx(0 if cells % 2 else 4 * math.sin(math.pi / (2 * (cells + 1))), abs=1e-13)


@pytest.mark.parametrize("ends", ["open", "ring"])
@pytest.mark.parametrize("overlap", [0.0, 0.1])
def test_selected_levels_are_those_of_the_full_solution(
    ends: str, overlap: float, monkeypatch: pytest.MonkeyPatch
) -> None:
    bonds = tuple(Coupling(c.start, c.end, c.beta, c.cell, overlap=overlap) for c in ACENE.couplings)
    piece = cut_piece(Model(ACENE.sites, bonds, dimension=1), cells=60, ends=ends)
    full = solve_levels(piece)
    monkeypatch.setattr(levels, "MOST_IN_FULL", 100)
    some = solve_levels(piece)
    part = slice(some.first, some.first + len(some.energy))
    assert len(some.energy) == 40
    assert some.energy == pytest.approx(full.energy[part], abs=1e-11)
    assert (some.homo, some.lumo, some.gap) == pytest.approx((full.homo, full.lumo, full.gap), abs=1e-11)
    assert some.occupation == pytest.approx(full.occupation[part])
    inner = slice(4, -4)
    assert some.vectors[:, inner] == pytest.approx(full.vectors[:, part][:, inner], abs=1e-7)
    assert some.participation[inner] == pytest.approx(full.participation[part][inner], rel=1e-7)


def test_degenerate_levels_inside_a_gap_are_all_found(monkeypatch: pytest.MonkeyPatch) -> None:
    """Two alternating chains that do not touch: four end states at 0, and packed band edges far from them."""
    bonds = tuple(Coupling(2 * leg, 2 * leg + 1, -1.0, (0,)) for leg in (0, 1))
    bonds += tuple(Coupling(2 * leg + 1, 2 * leg, -1.4, (1,)) for leg in (0, 1))
    piece = cut_piece(Model(tuple(Site(name) for name in "ABCD"), bonds, dimension=1), cells=150)
    full = solve_levels(piece)
    monkeypatch.setattr(levels, "MOST_IN_FULL", 100)
    some = solve_levels(piece)
    assert some.energy == pytest.approx(full.energy[some.first : some.first + 40], abs=1e-12)
    assert some.degeneracy[18:22].tolist() == [4] * 4
    assert some.is_open_shell == full.is_open_shell


def test_a_wide_piece_is_never_dense(monkeypatch: pytest.MonkeyPatch) -> None:
    """[2000]acene, levels ½(±1 ± √(9 + 8 cos(jπ/(n+1)))) and ±1 (Coulson 1948)."""
    monkeypatch.setattr(Piece, "matrices", None)
    n = 2_000
    found = solve_levels(cut_piece(ACENE, cells=n, add=["A1", "B1"]))
    root = np.sqrt(9 + 8 * np.cos(np.arange(1, n + 1) * np.pi / (n + 1)))
    inner = np.sort((root - 1) / 2)[:20]
    assert found.energy == pytest.approx(np.concatenate([-inner[::-1], inner]), abs=1e-11)


def test_a_sheet_is_solved_around_its_fermi_energy() -> None:
    """E = −2 cos(jπ/(n+1)) − 2 cos(lπ/(m+1)) of an open square of 60 × 51 sites."""
    model = Model((Site("A"),), (Coupling(0, 0, -1.0, (1, 0)), Coupling(0, 0, -1.0, (0, 1))), dimension=2)
    found = solve_levels(cut_piece(model, cells=(60, 51)), each_side=5)
    one, two = (-2 * np.cos(np.arange(1, n + 1) * np.pi / (n + 1)) for n in (60, 51))
    expected = np.sort((one[:, None] + two).ravel())[found.first : found.first + 10]
    assert found.energy == pytest.approx(expected, abs=1e-11)


def test_too_many_levels_at_the_fermi_energy_are_refused() -> None:
    model = Model((Site("A"), Site("B"), Site("C")), tuple(Coupling(0, end, -1.0, (0,)) for end in (1, 2)), dimension=1)
    with pytest.raises(PhysicsError, match=r"1000 levels of the piece lie between"):
        solve_levels(cut_piece(model, cells=1_000))


def test_a_wrong_count_is_an_error(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(selected, "_is_accurate", lambda *_: False)
    with pytest.raises(PhysicsError, match="could not be counted"):
        solve_levels(cut_piece(ACENE, cells=600))


@pytest.mark.parametrize("piece", [cut_piece(CHAIN, cells=12), cut_piece(ACENE, cells=5, add=["A1", "B1"])])
def test_energies_at_the_frontier(piece: Piece) -> None:
    found = solve_levels(piece)
    energy, first = frontier_energies(piece, each_side=3)
    assert energy == pytest.approx(found.energy[first : first + 6], abs=1e-13)
    assert first == piece.n_sites // 2 - 3
