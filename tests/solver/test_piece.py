"""Pieces: their matrices against those written by hand, and rings against the crystal at N values of k."""

import itertools
import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bandbook.errors import PhysicsError
from bandbook.model import Coupling, Model, Site
from bandbook.solver import Piece, cut_piece
from bandbook.solver.hamiltonian import band_energies

CHAIN = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
PAIRS = Model((Site("A"), Site("B")), (Coupling(0, 1, -2.0, (0,)), Coupling(1, 0, -1.0, (1,))), dimension=1)
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
SQUARE = Model((Site("A"),), (Coupling(0, 0, -1.0, (1, 0)), Coupling(0, 0, -0.6, (0, 1))), dimension=2)
HONEYCOMB = Model(
    (Site("A", alpha=0.3), Site("B")),
    (Coupling(0, 1, -1.0, (0, 0)), Coupling(1, 0, -0.8, (1, 0)), Coupling(1, 0, -0.9, (0, 1))),
    dimension=2,
)


def h_of(piece: Piece) -> list[list[float]]:
    H: list[list[float]] = piece.matrices()[0].tolist()
    return H


def test_an_open_piece_ends_where_the_cells_end() -> None:
    assert h_of(cut_piece(PAIRS, cells=2)) == [[0, -2, 0, 0], [-2, 0, -1, 0], [0, -1, 0, -2], [0, 0, -2, 0]]


def test_added_sites_close_the_far_end() -> None:
    piece = cut_piece(PAIRS, cells=1, add=["A"])
    assert h_of(piece) == [[0, -2, 0], [-2, 0, -1], [0, -1, 0]]
    assert piece.cell[:, 0].tolist() == [0, 0, 1]
    assert piece.site.tolist() == [0, 1, 0]
    assert (piece.electrons, piece.n_cells, piece.is_finished) == (3, (1,), True)


def test_dropped_sites_leave_the_first_cell() -> None:
    piece = cut_piece(PAIRS, cells=2, drop=["A"])
    assert h_of(piece) == [[0, -1, 0], [-1, 0, -2], [0, -2, 0]]
    assert piece.cell[:, 0].tolist() == [0, 1, 1]


def test_finished_acenes_have_all_their_bonds() -> None:
    for n in (1, 2, 3, 7):
        piece = cut_piece(ACENE, cells=n, add=["A1", "B1"])
        assert (piece.n_sites, len(piece.beta)) == (4 * n + 2, 5 * n + 1)
        assert set(piece.coordination.tolist()) == ({2} if n == 1 else {2, 3})


def test_an_unfinished_acene_shows_its_loose_ends() -> None:
    assert np.flatnonzero(cut_piece(ACENE, cells=2).coordination == 1).tolist() == [6, 7]


def test_a_molecule_is_its_own_piece() -> None:
    model = Model((Site("A", alpha=0.5), Site("B")), (Coupling(0, 1, -1.0),), electrons=3)
    piece = cut_piece(model)
    assert h_of(piece) == [[0.5, -1], [-1, 0]]
    assert (piece.electrons, piece.dimension, piece.cell.shape) == (3, 0, (2, 0))


def test_changes_reach_sites_and_bonds() -> None:
    changes = [
        {"cell": 0, "site": "A", "alpha": 0.5},
        {"cell": 1, "from": "A", "to": "B", "beta": -3.0},
        {"cell": 1, "from": "B", "to": "A", "to_cell": 2, "beta": -0.5},
        {"cell": 2, "site": "B", "remove": True},
    ]
    piece = cut_piece(PAIRS, cells=3, changes=changes)
    H = np.diag([0.5, 0, 0, 0, 0])
    for row, beta in enumerate([-2.0, -1.0, -3.0, -0.5]):
        H[row, row + 1] = H[row + 1, row] = beta
    assert h_of(piece) == H.tolist()
    assert piece.is_edited
    assert piece.electrons == 5


def test_a_changed_bond_without_a_cell_for_its_end_is_the_crystals_own() -> None:
    piece = cut_piece(CHAIN, cells=4, changes=[{"cell": 1, "from": "A", "to": "A", "beta": -0.5}])
    assert np.diag(np.array(h_of(piece)), 1).tolist() == [-1, -0.5, -1]


def test_a_changed_bond_can_be_removed_or_added() -> None:
    cut = cut_piece(CHAIN, cells=3, changes=[{"cell": 0, "from": "A", "to": "A", "remove": True}])
    assert h_of(cut) == [[0, 0, 0], [0, 0, -1], [0, -1, 0]]
    closed = cut_piece(CHAIN, cells=3, changes=[{"cell": 0, "from": "A", "to": "A", "to_cell": 2, "beta": -1.0}])
    assert h_of(closed) == h_of(cut_piece(CHAIN, cells=3, ends="ring"))


def test_a_molecule_is_changed_without_a_cell() -> None:
    model = Model((Site("A"), Site("B"), Site("C")), (Coupling(0, 1, -1.0), Coupling(1, 2, -1.0)))
    changes = [{"site": "B", "alpha": -1.0}, {"from": "B", "to": "C", "beta": -0.5}]
    assert h_of(cut_piece(model, changes=changes)) == [[0, -1, 0], [-1, -1, -0.5], [0, -0.5, 0]]


def test_small_rings_add_up_what_wraps() -> None:
    assert h_of(cut_piece(CHAIN, cells=1, ends="ring")) == [[-2]]
    assert h_of(cut_piece(CHAIN, cells=2, ends="ring")) == [[0, -2], [-2, 0]]
    assert h_of(cut_piece(CHAIN, cells=3, ends="ring")) == [[0, -1, -1], [-1, 0, -1], [-1, -1, 0]]


@pytest.mark.parametrize("n", [1, 2, 3, 4, 7])
@pytest.mark.parametrize("model", [CHAIN, PAIRS, ACENE], ids=["chain", "pairs", "acene"])
def test_a_ring_has_the_energies_of_the_crystal_at_n_values_of_k(model: Model, n: int) -> None:
    ring = np.linalg.eigvalsh(cut_piece(model, cells=n, ends="ring").matrices()[0])
    k = 2 * np.arange(n)[:, None] / n
    assert ring == pytest.approx(np.sort(band_energies(model, k).ravel()), abs=1e-12)


@pytest.mark.parametrize("shape", [(1, 1), (1, 2), (2, 2), (3, 2), (1, 4), (4, 3)])
@pytest.mark.parametrize("model", [SQUARE, HONEYCOMB], ids=["square", "honeycomb"])
def test_a_torus_has_the_energies_of_the_crystal_at_its_k(model: Model, shape: tuple[int, int]) -> None:
    torus = np.linalg.eigvalsh(cut_piece(model, cells=shape, ends="ring").matrices()[0])
    k = np.array([[2 * one / shape[0], 2 * two / shape[1]] for one, two in itertools.product(*map(range, shape))])
    assert torus == pytest.approx(np.sort(band_energies(model, k).ravel()), abs=1e-12)


@settings(max_examples=40, deadline=None)
@given(
    st.integers(1, 6),
    st.lists(st.floats(-3, 3), min_size=4, max_size=4),
    st.lists(st.floats(-0.09, 0.09), min_size=4, max_size=4),
)
def test_a_ring_with_far_bonds_and_overlap_is_the_crystal_too(
    n: int, betas: list[float], overlaps: list[float]
) -> None:
    places = [(0, 1, (0,)), (1, 0, (1,)), (0, 0, (2,)), (1, 1, (1,))]
    bonds = tuple(
        Coupling(a, b, beta, cell, overlap=s) for (a, b, cell), beta, s in zip(places, betas, overlaps, strict=True)
    )
    model = Model((Site("A"), Site("B", alpha=0.4)), bonds, dimension=1)
    H, S = cut_piece(model, cells=n, ends="ring").matrices()
    half = np.linalg.inv(np.linalg.cholesky(np.eye(2 * n) if S is None else S))
    expected = np.sort(band_energies(model, 2 * np.arange(n)[:, None] / n).ravel())
    assert np.linalg.eigvalsh(half @ H @ half.T) == pytest.approx(expected, abs=1e-10)


def test_sparse_and_dense_matrices_agree() -> None:
    piece = cut_piece(HONEYCOMB, cells=(3, 4), changes=[{"cell": [1, 1], "site": "A", "remove": True}])
    assert piece.sparse[0].toarray().tolist() == h_of(piece)
    assert piece.n_sites == 23


def test_the_path_of_a_chain_is_found_from_either_kind_of_order() -> None:
    model = Model(
        tuple(Site(name) for name in "ABCD"), (Coupling(2, 0, -1.0), Coupling(0, 3, -2.0), Coupling(3, 1, -3.0))
    )
    piece = cut_piece(model)
    assert piece.path is not None
    assert piece.path.tolist() == [1, 3, 0, 2]
    assert piece.chain is not None
    assert piece.chain[1].tolist() == [-3, -2, -1]


@pytest.mark.parametrize(
    "piece",
    [
        cut_piece(CHAIN, cells=5, ends="ring"),
        cut_piece(ACENE, cells=2),
        cut_piece(CHAIN, cells=5, changes=[{"cell": 2, "site": "A", "remove": True}]),
        cut_piece(CHAIN, cells=5, changes=[{"cell": 2, "from": "A", "to": "A", "beta": 0.0}]),
    ],
    ids=["ring", "ladder", "hole", "broken"],
)
def test_what_is_no_unbranched_open_chain_has_no_path(piece: Piece) -> None:
    assert piece.path is None


def test_electrons_of_a_charged_cell_are_shared_by_its_sites() -> None:
    model = Model(PAIRS.sites, PAIRS.couplings, dimension=1, electrons=1)
    assert cut_piece(model, cells=6).electrons == 6
    with pytest.raises(PhysicsError, match=r"6\.5 electrons; a whole number"):
        cut_piece(model, cells=6, add=["A"])


def test_a_million_cells_are_cut_in_seconds() -> None:
    began = time.perf_counter()
    piece = cut_piece(CHAIN, cells=10**6)
    assert piece.path is not None
    assert piece.path[-1] == 10**6 - 1
    assert time.perf_counter() - began < 5
    with pytest.raises(PhysicsError, match=r"1000000 sites need 8000\.0 GB"):
        piece.matrices()


@pytest.mark.parametrize(
    ("model", "asked", "words"),
    [
        (CHAIN, {}, "give cells"),
        (CHAIN, {"cells": [2, 2]}, "cells has 2 numbers"),
        (CHAIN, {"cells": 0}, "1 to 10000000 cells"),
        (CHAIN, {"cells": 10**7 + 1}, "1 to 10000000 cells"),
        (CHAIN, {"cells": 2, "ends": "closed"}, '"open" or "ring"'),
        (CHAIN, {"cells": 2, "add": ["B"]}, "no site 'B'; the sites of a cell are A"),
        (CHAIN, {"cells": 2, "add": ["A"], "ends": "ring"}, "given for a ring"),
        (SQUARE, {"cells": [2, 2], "drop": ["A"]}, "a piece in 2D"),
        (CHAIN, {"cells": 1, "drop": ["A"]}, "no site is left"),
        (CHAIN, {"cells": 2, "changes": [{"cell": 2, "site": "A", "alpha": 1.0}]}, "no cell 2 in this piece"),
        (CHAIN, {"cells": 2, "changes": [{"site": "A", "alpha": 1.0}]}, "no cell None"),
        (CHAIN, {"cells": 2, "changes": [{"cell": 1, "site": "A"}]}, "changes nothing"),
        (CHAIN, {"cells": 2, "changes": [{"cell": 1}]}, "neither a site nor a bond"),
        (CHAIN, {"cells": 2, "changes": [{"cell": 0, "from": "A", "to": "A"}]}, "changes nothing"),
        (CHAIN, {"cells": 1, "changes": [{"cell": 0, "from": "A", "to": "A", "beta": 1.0}]}, "leaves this cell"),
        (PAIRS, {"cells": 2, "drop": ["A"], "changes": [{"cell": 0, "site": "A", "alpha": 1.0}]}, "has no site 'A'"),
        (ACENE, {"cells": 1, "changes": [{"cell": 0, "from": "A1", "to": "B2", "remove": True}]}, "no bond A1–B2"),
    ],
)
def test_a_piece_that_does_not_fit_is_refused(model: Model, asked: dict[str, object], words: str) -> None:
    with pytest.raises(PhysicsError, match=words) as caught:
        cut_piece(model, **asked)  # type: ignore[arg-type]  # the rows hold one wrong argument each
    assert str(caught.value).count("; ") == 2
