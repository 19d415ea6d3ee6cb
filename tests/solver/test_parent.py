"""k on the parent band, W, gap levels and node labels, against closed forms."""

import math

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from bandbook.errors import PhysicsError
from bandbook.model import Coupling, Model, Site
from bandbook.solver import Levels, Piece, Places, cut_piece, extended_k, node_labels, place_on_bands, solve_levels
from bandbook.solver.branches import branches_of, solve_for_k
from bandbook.solver.hamiltonian import band_energies, band_slopes
from bandbook.solver.labels import sign_changes
from bandbook.solver.ranges import outside_bands

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


def pairs(inside: float, between: float, *, alpha: float = 0.0) -> Model:
    sites = (Site("A", alpha=alpha), Site("B", alpha=-alpha))
    return Model(sites, (Coupling(0, 1, inside, (0,)), Coupling(1, 0, between, (1,))), dimension=1)


def backbone(n: int, beta: float = -1.0) -> Model:
    """Return a uniform chain written with n sites a cell."""
    bonds = tuple(Coupling(site, (site + 1) % n, beta, (int(site == n - 1),)) for site in range(n))
    return Model(tuple(Site(f"S{site}") for site in range(n)), bonds, dimension=1)


def placed(model: Model, **asked: object) -> tuple[Piece, Levels, Places]:
    piece = cut_piece(model, **asked)  # type: ignore[arg-type]  # handed on as they are
    found = solve_levels(piece)
    return piece, found, place_on_bands(model, piece, found)


def numbers(values: tuple[float | None, ...]) -> list[float]:
    assert None not in values
    return [float(value) for value in values if value is not None]


@pytest.mark.parametrize("n", [1, 2, 3, 4, 6, 7, 50, 400])
def test_open_chain(n: int) -> None:
    """k_j = j/(N+1), W = 1; the node labels are (j − 1)/(N − 1)."""
    piece, found, places = placed(CHAIN, cells=n)
    assert numbers(places.k) == pytest.approx(np.arange(1, n + 1) / (n + 1), abs=1e-10)
    assert numbers(places.W) == pytest.approx(np.ones(n), abs=1e-10)
    assert places.extended_k == places.k
    assert set(places.reason) == {""}
    assert places.n_gap_levels == 0
    labels = node_labels(piece, found)
    assert labels is None if n == 1 else labels == pytest.approx(np.arange(n) / (n - 1))


def test_four_atoms_have_both_labels_and_they_differ() -> None:
    piece, found, places = placed(CHAIN, cells=4)
    assert node_labels(piece, found) == pytest.approx([0, 1 / 3, 2 / 3, 1])
    assert numbers(places.k) == pytest.approx([0.2, 0.4, 0.6, 0.8], abs=1e-10)


@pytest.mark.parametrize("n", [2, 3, 4, 5, 10, 41])
def test_node_labels_count_the_sign_changes(n: int) -> None:
    for beta in (-1.0, 1.0):
        model = pairs(beta, 0.6 * beta, alpha=0.2)
        piece, found, _ = placed(model, cells=n)
        assert piece.path is not None
        nodes = sign_changes(found.vectors[piece.path])
        assert node_labels(piece, found) == pytest.approx(nodes / (2 * n - 1))
    mixed, found, places = placed(pairs(-1.0, 0.7), cells=n)
    assert node_labels(mixed, found) == pytest.approx(sign_changes(found.vectors) / (2 * n - 1))
    assert not places.has_extended_zone


@pytest.mark.parametrize(
    "asked", [{"cells": 6, "ends": "ring"}, {"cells": 6, "changes": [{"cell": 3, "site": "A", "remove": True}]}]
)
def test_other_pieces_have_no_node_labels(asked: dict[str, object]) -> None:
    piece, found, _ = placed(CHAIN, **asked)
    assert node_labels(piece, found) is None
    branched, found, _ = placed(ACENE, cells=1, add=["A1", "B1"])
    assert node_labels(branched, found) is None


def test_benzene_on_the_chain() -> None:
    _, _, places = placed(CHAIN, cells=6, ends="ring")
    assert numbers(places.k) == pytest.approx([0, 1 / 3, 1 / 3, 2 / 3, 2 / 3, 1], abs=1e-10)
    assert places.W[1:5] == pytest.approx([1, 1, 1, 1], abs=1e-10)
    assert (places.W[0], places.W[5], places.reason[0]) == (None, None, "at a band edge")


@pytest.mark.parametrize("n", [3, 5, 8, 30])
def test_rings_lie_at_two_pi_m_over_n(n: int) -> None:
    _, _, places = placed(CHAIN, cells=n, ends="ring")
    expected = np.sort([min(2 * m / n, 2 - 2 * m / n) for m in range(n)])
    assert numbers(places.k) == pytest.approx(expected, abs=1e-10)
    assert [W for W in places.W if W is not None] == pytest.approx([1.0] * (n - 1 - (n % 2 == 0)), abs=1e-10)


@pytest.mark.parametrize("n", [1, 2, 3, 6])
def test_acenes_lie_on_polyacene(n: int) -> None:
    """½(±1 ± √(9 + 8 cos(jπ/(n+1)))) at k = j/(n+1), W = 1; ±1 at the zone boundary, where the outer bands end."""
    _, found, places = placed(ACENE, cells=n, add=["A1", "B1"])
    expected = []
    for j in range(1, n + 1):
        root = math.sqrt(9 + 8 * math.cos(j * math.pi / (n + 1)))
        expected += [(sign * (root + step) / 2, j / (n + 1)) for sign in (-1, 1) for step in (-1, 1)]
    expected += [(-1.0, 1.0), (1.0, 1.0)]
    expected.sort(key=lambda pair: (round(pair[0], 9), pair[1]))
    assert found.energy == pytest.approx([energy for energy, _ in expected], abs=1e-12)
    assert numbers(places.k) == pytest.approx([k for _, k in expected], abs=1e-10)
    for k, W, reason in zip(places.k, places.W, places.reason, strict=True):
        is_edge = k == pytest.approx(1, abs=1e-10)
        assert reason == ("at a band edge" if is_edge else "")
        assert W is None if is_edge else pytest.approx(1, abs=1e-10) == W
    assert not places.has_extended_zone


def theta_of_open_alternating(n: int, inside: float, between: float) -> list[float]:
    """Return the θ in (0, π) with β₁ sin((n+1)θ) + β₂ sin(nθ) = 0, one in each interval where they are sure to lie."""

    def f(theta: float) -> float:
        return inside * math.sin((n + 1) * theta) + between * math.sin(n * theta)

    mesh = np.linspace(1e-9, math.pi - 1e-9, 400 * n + 2)
    values = [f(theta) for theta in mesh]
    return [
        float(brentq(f, mesh[i], mesh[i + 1], xtol=1e-15, rtol=1e-14))
        for i in range(len(mesh) - 1)
        if values[i] * values[i + 1] < 0
    ]


@settings(max_examples=40, deadline=None)
@given(st.integers(1, 25), st.floats(0.3, 3), st.floats(0.3, 3))
def test_open_alternating_chain(n: int, inside: float, between: float) -> None:
    """Every band level has k = θ/π and W = 1; two gap levels where β₂/β₁ > 1 + 1/n, none otherwise."""
    assume(abs(between - inside) > 1e-3)
    assume(abs(n * (between - inside) - inside) > 1e-3)
    _, found, places = placed(pairs(-inside, -between), cells=n)
    thetas = theta_of_open_alternating(n, inside, between)
    has_ends = n * between > (n + 1) * inside
    assert places.n_gap_levels == (2 if has_ends else 0)
    assert len(thetas) == n - (1 if has_ends else 0)
    lower = sorted(
        (-math.sqrt(inside**2 + between**2 + 2 * inside * between * math.cos(t)), t / math.pi) for t in thetas
    )
    k = [k for k, is_gap in zip(places.k, places.is_gap_level, strict=True) if not is_gap]
    assert numbers(tuple(k)) == pytest.approx([k for _, k in lower] + [k for _, k in reversed(lower)], abs=1e-10)
    W = [W for W, is_gap in zip(places.W, places.is_gap_level, strict=True) if not is_gap]
    assert numbers(tuple(W)) == pytest.approx(np.ones(len(W)), abs=1e-9)
    assert list(found.energy[: len(lower)]) == pytest.approx([energy for energy, _ in lower], abs=1e-10)


def test_the_weak_termination_has_its_levels_at_both_ends() -> None:
    _, found, places = placed(pairs(-2.15, -2.85), cells=20)
    assert np.flatnonzero(places.is_gap_level).tolist() == [19, 20]
    assert places.place[18:22] == (None, "both ends", "both ends", None)
    assert (places.k[19], places.W[19], places.reason[19]) == (None, None, "outside every band")
    assert found.gap == pytest.approx(2 * abs(found.energy[19]))


def test_an_odd_chain_has_its_level_at_one_end() -> None:
    """E = 0 sits where the weak bond ends the chain."""
    _, _, right = placed(pairs(-2.85, -2.15), cells=20, add=["A"])
    assert right.place[20] == "right end"
    _, _, left = placed(pairs(-2.15, -2.85), cells=20, add=["A"])
    assert left.place[20] == "left end"


def test_a_defect_in_the_middle_sits_inside() -> None:
    _, _, places = placed(CHAIN, cells=31, changes=[{"cell": 15, "site": "A", "alpha": -2.0}])
    assert places.place[0] == "inside"
    assert places.n_gap_levels == 1
    ring = placed(CHAIN, cells=31, ends="ring", changes=[{"cell": 0, "site": "A", "alpha": -2.0}])[2]
    assert ring.place[0] == "inside"


def test_an_edited_chain_keeps_its_parent_with_a_smaller_w() -> None:
    _, found, places = placed(CHAIN, cells=10, changes=[{"cell": 4, "site": "A", "alpha": 0.6}])
    for energy, k, W, is_gap in zip(found.energy, places.k, places.W, places.is_gap_level, strict=True):
        if not is_gap:
            assert k is not None
            assert -2 * math.cos(math.pi * k) == pytest.approx(energy, abs=1e-12)
            assert W is not None
            assert 0.3 < W <= 1


def test_a_dense_chain_of_long_bonds_takes_the_candidate_that_fits_best() -> None:
    """With a strong second neighbour one energy has two k; rings show which one a level is: 2m/N."""
    model = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)), Coupling(0, 0, 0.7, (2,))), dimension=1)
    n = 11
    _, found, places = placed(model, cells=n, ends="ring")
    k = np.array([min(2 * m / n, 2 - 2 * m / n) for m in range(n)])
    energy = -2 * np.cos(np.pi * k) + 1.4 * np.cos(2 * np.pi * k)
    order = np.lexsort((k, energy.round(9)))
    assert found.energy == pytest.approx(energy[order], abs=1e-12)
    assert numbers(places.k) == pytest.approx(k[order], abs=1e-10)


def test_two_chains_that_do_not_touch_share_their_groups() -> None:
    """Levels of chains of n sites with different β meet in a group with two k, rising."""
    sites = (Site("A"), Site("B"))
    model = Model(sites, (Coupling(0, 0, -1.0, (1,)), Coupling(1, 1, -2.0, (1,))), dimension=1)
    _, found, places = placed(model, cells=2)
    assert found.energy == pytest.approx([-2, -1, 1, 2])
    assert numbers((places.k[0], places.W[0])) == pytest.approx([1 / 3, 1], abs=1e-10)
    double = Model(sites, (Coupling(0, 0, -1.0, (1,)), Coupling(1, 1, -math.sqrt(2), (1,))), dimension=1)
    _, found, places = placed(double, cells=3)
    assert found.energy == pytest.approx([-2, -math.sqrt(2), 0, 0, math.sqrt(2), 2])
    assert numbers(places.k[1:5]) == pytest.approx([0.25, 0.5, 0.5, 0.75], abs=1e-10)
    assert places.k[0] == pytest.approx(0.25)


def test_a_flat_band_has_no_k_and_says_so() -> None:
    """The stub chain's middle band is flat at 0: of three levels a cell, one."""
    model = Model(
        (Site("A"), Site("B"), Site("C")),
        (Coupling(0, 1, -1.0, (0,)), Coupling(0, 2, -1.0, (0,)), Coupling(1, 0, -1.0, (1,))),
        dimension=1,
    )
    _, found, places = placed(model, cells=5, ends="ring")
    assert found.energy[5:10] == pytest.approx(np.zeros(5), abs=1e-12)
    assert places.k[5:10] == (None,) * 5
    assert places.reason[5:10] == ("in a flat band",) * 5
    assert None not in places.k[:5]


def test_bands_that_a_flat_one_crosses_are_flat_in_pieces() -> None:
    """A site on its own at E = 0.5 crosses the chain's band: 0.5 has no k, the others have."""
    model = Model((Site("A"), Site("B", alpha=0.5)), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    crystal = branches_of(model)
    assert crystal.flat == pytest.approx([0.5])
    _, found, places = placed(model, cells=4)
    for energy, k in zip(found.energy, places.k, strict=True):
        assert (
            k is None
            if energy == pytest.approx(0.5)
            else k == pytest.approx(math.acos(-energy / 2) / math.pi, abs=1e-10)
        )


def test_cells_without_coupling_are_flat() -> None:
    _, found, places = placed(pairs(-1.0, 0.0), cells=3)
    assert found.energy == pytest.approx([-1, -1, -1, 1, 1, 1])
    assert set(places.reason) == {"in a flat band"}
    assert places.n_gap_levels == 0


@pytest.mark.parametrize("n", [2, 3, 5])
@pytest.mark.parametrize("beta", [-1.0, 1.0])
def test_the_extended_zone_of_a_folded_chain_is_that_of_the_chain(n: int, beta: float) -> None:
    """N sites: k = j/(N+1) of π/spacing, so n j/(N+1) of π/a with n sites a cell; β > 0 turns the order round."""
    cells = 6
    _, _, places = placed(backbone(n, beta), cells=cells)
    k = n * np.arange(1, n * cells + 1) / (n * cells + 1)
    assert numbers(places.extended_k) == pytest.approx(k if beta < 0 else k[::-1], abs=1e-9)


def test_crossing_bands_are_followed_through_the_crossing() -> None:
    """Two legs of a ladder, ±1 apart: bands −2 cos k ± 1 cross nothing; with legs of opposite β they cross at E = 0."""
    model = Model((Site("A"), Site("B")), (Coupling(0, 0, -1.0, (1,)), Coupling(1, 1, 1.0, (1,))), dimension=1)
    solutions = solve_for_k(branches_of(model), np.array([0.0, 1.0]))
    assert {(found.row, round(found.k, 10)) for found in solutions} == {
        (0, 0.5),
        (1, round(2 / 3, 10)),
        (1, round(1 / 3, 10)),
    }
    _, _, places = placed(model, cells=3)
    assert numbers(places.k) == pytest.approx([0.25, 0.75, 0.5, 0.5, 0.25, 0.75], abs=1e-10)


@settings(max_examples=25, deadline=None)
@given(st.integers(1, 4), st.integers(0, 2**32 - 1))
def test_every_k_of_an_energy_is_found(n: int, seed: int) -> None:
    """At a k of one's own choice, the energies of all bands have that k among their solutions."""
    rng = np.random.default_rng(seed)
    bonds = [Coupling(a, b, float(rng.normal()), (0,)) for a in range(n) for b in range(a + 1, n)]
    bonds += [Coupling(a, b, float(rng.normal()), (1,)) for a in range(n) for b in range(n)]
    model = Model(tuple(Site(f"S{a}", alpha=float(rng.normal())) for a in range(n)), tuple(bonds), dimension=1)
    chosen = float(rng.uniform(0.05, 0.95))
    energies = band_energies(model, np.array([[chosen]]))[0]
    slopes = band_slopes(model, np.array([[chosen]]))[0, :, 0]
    solutions = solve_for_k(branches_of(model), energies)
    for band in range(n):
        assume(abs(slopes[band]) > 1e-2)
        assert min(abs(found.k - chosen) for found in solutions if found.row == band) < 1e-10


@pytest.mark.parametrize("overlap", [0.1, 0.25])
def test_overlap_keeps_the_ks_of_the_open_chain(overlap: float) -> None:
    """With s proportional to β the orbitals are those of the plain chain (Wheland 1941): k = j/(N+1), W = 1."""
    model = Model((Site("A"),), (Coupling(0, 0, -2.5, (1,), overlap=overlap),), dimension=1)
    _, _, places = placed(model, cells=9)
    assert numbers(places.k) == pytest.approx(np.arange(1, 10) / 10, abs=1e-10)
    assert numbers(places.W) == pytest.approx(np.ones(9), abs=1e-10)


def test_an_overlap_that_is_not_positive_is_refused_with_its_k() -> None:
    model = Model((Site("A"),), (Coupling(0, 0, -2.5, (1,), overlap=0.55),), dimension=1)
    piece = cut_piece(model, cells=2)
    with pytest.raises(PhysicsError, match=r"k = .*1\.0000.*-0\.1"):
        place_on_bands(model, piece, solve_levels(piece))


@pytest.mark.parametrize("cells", [3_000, 20_000])
def test_a_long_chain_keeps_its_ks(cells: int) -> None:
    _, found, places = placed(CHAIN, cells=cells)
    j = np.arange(found.first + 1, found.first + 41)
    assert numbers(places.k) == pytest.approx(j / (cells + 1), abs=1e-10)
    assert numbers(places.W) == pytest.approx(np.ones(40), abs=1e-8)


def test_molecules_and_sheets_have_no_k() -> None:
    molecule = Model((Site("A"), Site("B")), (Coupling(0, 1, -1.0),))
    assert placed(molecule)[2].reason == ("no infinite parent",) * 2
    sheet = Model((Site("A"),), (Coupling(0, 0, -1.0, (1, 0)), Coupling(0, 0, -1.0, (0, 1))), dimension=2)
    assert set(placed(sheet, cells=(2, 2))[2].k) == {None}


def test_a_strong_site_on_a_sheet_is_a_gap_level() -> None:
    """Gapped honeycomb, bands ±√(Δ² + |f|²), |f| ≤ 3: a site at −5 leaves them; the sheet alone has no such level."""
    bonds = tuple(Coupling(0, 1, -1.0, cell) for cell in ((0, 0), (-1, 0), (0, -1)))
    model = Model((Site("A", alpha=0.5), Site("B", alpha=-0.5)), bonds, dimension=2)
    assert placed(model, cells=(4, 4), ends="ring")[2].n_gap_levels == 0
    _, found, places = placed(model, cells=(4, 4), ends="ring", changes=[{"cell": [1, 1], "site": "B", "alpha": -5.0}])
    assert found.energy[0] < -math.sqrt(9.25)
    assert places.is_gap_level[0]
    assert places.reason[0] == "outside every band"
    assert outside_bands(model, np.array([-0.5, -0.499, 0.0, 0.501, -math.sqrt(9.25), 3.05])).tolist() == [
        False,
        True,
        True,
        False,
        False,
        True,
    ]


def test_the_extended_zone_is_for_one_backbone() -> None:
    assert extended_k(CHAIN, 0.3, 0) == 0.3
    assert extended_k(backbone(3), 0.25, 2) == 2.25
    assert extended_k(ACENE, 0.3, 0) is None
    assert extended_k(CHAIN, None, None) is None
