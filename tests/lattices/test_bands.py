"""Each lattice against the closed form of its bands, and its pieces as its manual page says."""

import math
from typing import Any

import networkx as nx
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from bandbook import lattices
from bandbook.model import Model
from bandbook.solver import Piece, cut_piece, solve_levels
from bandbook.solver.hamiltonian import bloch

K = np.linspace(-1.0, 1.0, 41)
energies = st.floats(-5, 5, allow_nan=False)


def bands(model: Model, k: NDArray[np.float64] = K) -> NDArray[np.float64]:
    """Return E(k), ``(k, band)``, ascending."""
    return np.asarray(np.linalg.eigvalsh(bloch(model, k.reshape(len(k), -1))[0]))


@given(energies, energies)
def test_chain(alpha: float, beta: float) -> None:
    found = bands(lattices.chain(beta=beta or 1.0, alpha=alpha))
    assert found[:, 0] == pytest.approx(alpha + 2 * (beta or 1.0) * np.cos(np.pi * K), abs=1e-12)


@given(energies, energies, energies, energies)
def test_diatomic_chain(inside: float, between: float, alpha_a: float, alpha_b: float) -> None:
    """Rice & Mele 1982, closed form; the alternating chain is the case α_A = α_B (Lennard-Jones 1937)."""
    model = lattices.diatomic_chain(beta_inside=inside, beta_between=between, alpha_a=alpha_a, alpha_b=alpha_b)
    h = (alpha_a - alpha_b) / 2
    square = h**2 + inside**2 + between**2 + 2 * inside * between * np.cos(np.pi * K)
    expected = (alpha_a + alpha_b) / 2 + np.outer(np.sqrt(np.clip(square, 0, None)), [-1, 1])
    assert bands(model) == pytest.approx(expected, abs=1e-7)


def test_alternating_chain_is_the_diatomic_one_of_equal_sites() -> None:
    alike = lattices.diatomic_chain(beta_inside=-2.85, beta_between=-2.15, alpha=0.5, period=2.46)
    assert lattices.alternating_chain(beta_inside=-2.85, beta_between=-2.15, alpha=0.5, period=2.46) == alike


def test_alphas_of_a_diatomic_lattice_default_to_alpha() -> None:
    for build in (_diatomic, _sheet):
        assert [site.alpha for site in build(alpha=0.5).sites] == [0.5, 0.5]
        assert [site.alpha for site in build(alpha=0.5, alpha_b=0.0).sites] == [0.5, 0.0]
        assert build(alpha=0.5, alpha_b=0.0).alpha_unit == 0.5


def _diatomic(**more: Any) -> Model:
    return lattices.diatomic_chain(beta_inside=-1.0, beta_between=-2.0, **more)


def _sheet(**more: Any) -> Model:
    return lattices.honeycomb(beta=-2.7, **more)


@pytest.mark.parametrize("n_cells", [1, 2, 5])
def test_an_open_alternating_chain_ends_with_the_bond_inside(n_cells: int) -> None:
    piece = cut_piece(lattices.alternating_chain(beta_inside=-2.0, beta_between=-1.0), cells=n_cells)
    assert piece.chain is not None
    _, betas = piece.chain
    assert betas.tolist() == [-2.0, -1.0] * (n_cells - 1) + [-2.0]


def test_polyacene() -> None:
    """Closed form: α ± (β/2)(1 ± √(9 + 8 cos k))."""
    root = np.sqrt(9 + 8 * np.cos(np.pi * K))
    expected = 0.3 + 1.25 * np.stack([-1 - root, 1 - root, -1 + root, 1 + root], axis=1)
    assert bands(lattices.polyacene(beta=-2.5, alpha=0.3)) == pytest.approx(expected, abs=1e-12)


@pytest.mark.parametrize("n_rings", [1, 2, 3, 6])
def test_cells_of_polyacene_with_a1_and_b1_are_an_acene(n_rings: int) -> None:
    """Judge: networkx, whether the bonds are those of fused hexagons in a row."""
    piece = cut_piece(lattices.polyacene(beta=-1.0), cells=n_rings, add=["A1", "B1"])
    rings = nx.Graph()
    for ring in range(n_rings):
        upper, lower = [("u", 2 * ring + step) for step in range(3)], [("l", 2 * ring + step) for step in range(3)]
        nx.add_cycle(rings, [*upper, *reversed(lower)])
    assert nx.is_isomorphic(graph(piece), rings)
    assert (piece.n_sites, piece.electrons) == (4 * n_rings + 2, 4 * n_rings + 2)


def graph(piece: Piece) -> nx.Graph:
    return nx.Graph(zip(piece.start.tolist(), piece.end.tolist(), strict=True))


@given(st.floats(-1, 1), st.floats(-1, 1), energies, energies)
def test_honeycomb(k1: float, k2: float, alpha_a: float, alpha_b: float) -> None:
    """Wallace 1947, closed form."""
    found = bands(_sheet(alpha_a=alpha_a, alpha_b=alpha_b), np.array([[k1, k2]]))[0]
    reach = 2.7 * abs(1 + np.exp(1j * np.pi * k1) + np.exp(1j * np.pi * k2))
    expected = (alpha_a + alpha_b) / 2 + math.hypot((alpha_a - alpha_b) / 2, reach) * np.array([-1, 1])
    assert found == pytest.approx(expected, abs=1e-12)


def test_honeycomb_vectors_are_at_60_degrees() -> None:
    first, second = np.array(_sheet(bond_length=1.42).vectors)
    assert first @ second == pytest.approx(3 * 1.42**2 / 2)
    assert np.linalg.norm(first) == pytest.approx(2.4595, abs=5e-5)


def test_square() -> None:
    k = np.random.default_rng(3).uniform(-1, 1, (20, 2))
    expected = 0.2 - 2 * np.cos(np.pi * k).sum(axis=1)
    assert bands(lattices.square(beta=-1.0, alpha=0.2), k)[:, 0] == pytest.approx(expected, abs=1e-12)


@pytest.mark.parametrize("n_sites", [3, 4, 7, 30])
def test_ring(n_sites: int) -> None:
    """Hückel 1931, closed form; the bonds of the picture are 1.40 Å."""
    model = lattices.ring(beta=-2.5, sites=n_sites, alpha=0.3)
    expected = np.sort(0.3 - 5.0 * np.cos(2 * np.pi * np.arange(n_sites) / n_sites))
    assert bands(model, np.zeros((1, 0)))[0] == pytest.approx(expected, abs=1e-12)
    at = np.array([site.at for site in model.sites])
    assert np.linalg.norm(at[1] - at[0]) == pytest.approx(1.40)
    assert [site.name for site in model.sites] == [f"A{number}" for number in range(1, n_sites + 1)]


@pytest.mark.parametrize("lines", [2, 3, 4, 7, 12])
def test_armchair_ribbon_is_a_sheet_with_standing_waves(lines: int) -> None:
    """Closed form: ±|β| √(1 + 4 c cos(k/2) + 4c²), c = cos(pπ/(N + 1)), p = 1 … N; k over the cell of 3 bond lengths."""
    c = np.cos(np.arange(1, lines + 1) * np.pi / (lines + 1))
    k = np.pi * K[:, None]
    half = np.sqrt(np.clip(1 + 4 * c * np.cos(k / 2) + 4 * c**2, 0, None))
    expected = np.sort(np.concatenate([-half, half], axis=1), axis=1)
    found = bands(lattices.armchair_ribbon(beta=-1.0, lines=lines))
    assert found == pytest.approx(expected, abs=1e-7)


@pytest.mark.parametrize("lines", [1, 2, 3, 8])
def test_zigzag_ribbon_is_an_alternating_chain_across(lines: int) -> None:
    """Closed form: at each k an open chain of 2N sites, its bonds 2β cos(k/2) and β in turn."""
    found = bands(lattices.zigzag_ribbon(beta=-1.0, lines=lines))
    for row, k in enumerate(K):
        inside = -2 * math.cos(math.pi * k / 2)
        betas = [inside if site % 2 == 0 else -1.0 for site in range(2 * lines - 1)]
        chain = np.diag(betas, 1) + np.diag(betas, -1)
        assert found[row] == pytest.approx(np.linalg.eigvalsh(chain), abs=1e-12)


@pytest.mark.parametrize("build", [lattices.armchair_ribbon, lattices.zigzag_ribbon])
@pytest.mark.parametrize("lines", [3, 4, 9])
def test_ribbons_are_cut_from_the_sheet(build: Any, lines: int) -> None:
    """Inside a ribbon every site has three neighbours, and a closed one has two kinds of edge sites only."""
    piece = cut_piece(build(beta=-1.0, lines=lines), cells=6, ends="ring")
    counts = np.bincount(piece.coordination, minlength=4)
    edges = {"armchair_ribbon": 4, "zigzag_ribbon": 2}[build.__name__]
    assert counts.tolist() == [0, 0, 6 * edges, 6 * (2 * lines - edges)]
    assert nx.is_bipartite(graph(piece))
    assert nx.check_planarity(graph(piece))[0]


@pytest.mark.parametrize(
    ("build", "lines", "ends"),
    [
        (lattices.armchair_ribbon, 3, {}),
        (lattices.armchair_ribbon, 4, {"drop": ["B4"], "changes": [{"cell": 5, "site": "A4", "remove": True}]}),
        (lattices.armchair_ribbon, 7, {}),
        (lattices.armchair_ribbon, 8, {"drop": ["B8"], "changes": [{"cell": 5, "site": "A8", "remove": True}]}),
        (lattices.zigzag_ribbon, 2, {"drop": ["A1", "B2"]}),
        (lattices.zigzag_ribbon, 4, {"drop": ["A1", "B4"]}),
        (lattices.zigzag_ribbon, 3, {"drop": ["A1"], "changes": [{"cell": 5, "site": "B3", "remove": True}]}),
        (lattices.zigzag_ribbon, 5, {"drop": ["A1"], "changes": [{"cell": 5, "site": "B5", "remove": True}]}),
    ],
)  # fmt: skip
def test_a_ribbon_finished_as_its_page_says_has_no_dangling_site(build: Any, lines: int, ends: dict[str, Any]) -> None:
    model = build(beta=-1.0, lines=lines)
    dangling = np.count_nonzero(cut_piece(model, cells=6).coordination == 1)
    assert dangling == (2 if ends else 0)
    piece = cut_piece(model, cells=6, **ends)
    assert piece.coordination.min() == 2
    assert nx.is_connected(graph(piece))


def test_an_armchair_ribbon_of_two_lines_is_a_chain() -> None:
    piece = cut_piece(lattices.armchair_ribbon(beta=-1.0, lines=2), cells=3)
    found = solve_levels(piece).energy
    assert found == pytest.approx(np.sort(2 * np.cos(np.arange(1, 13) * np.pi / 13)), abs=1e-12)
