"""Groups, bases and signs: the same whatever basis, sign or last bits the eigensolver gave."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from bandbook.model import Coupling, Model, Site
from bandbook.solver import canonical_basis, cut_piece, group_levels, solve_levels
from bandbook.solver.canonical import fix_signs

CHAIN = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)


def turned(vectors: NDArray[np.float64], seed: int) -> NDArray[np.float64]:
    """Return the columns in a random orthogonal basis of their space, with noise in the last bits."""
    rng = np.random.default_rng(seed)
    rotation = np.linalg.qr(rng.standard_normal((vectors.shape[1],) * 2))[0]
    noisy: NDArray[np.float64] = vectors @ rotation * (1 + 1e-15 * rng.standard_normal(vectors.shape))
    return noisy


def ring_pair(n: int, m: int) -> NDArray[np.float64]:
    angle = 2 * np.pi * m * np.arange(n) / n
    pair: NDArray[np.float64] = np.stack([np.cos(angle), np.sin(angle)], axis=1) * np.sqrt(2 / n)
    return pair


@settings(max_examples=60, deadline=None)
@given(st.integers(2, 12), st.integers(1, 6), st.integers(0, 2**32 - 1))
def test_the_basis_depends_on_the_space_only(n: int, size: int, seed: int) -> None:
    size = min(n, size)
    space = np.linalg.qr(np.random.default_rng(seed).standard_normal((n, size)))[0]
    basis = canonical_basis(space)
    assert basis.T @ basis == pytest.approx(np.eye(size), abs=1e-12)
    assert basis @ basis.T == pytest.approx(space @ space.T, abs=1e-12)
    assert canonical_basis(turned(space, seed + 1)) == pytest.approx(basis, abs=1e-10)


@pytest.mark.parametrize(("n", "m"), [(6, 1), (60, 7), (60, 25), (1024, 3), (1024, 512 - 1), (2000, 1)])
def test_the_pair_of_a_ring_is_a_cosine_and_a_sine(n: int, m: int) -> None:
    """All sites of a ring have the same weight: the lowest index is the pivot, whatever the last bits say."""
    for seed in range(6):
        basis = canonical_basis(turned(ring_pair(n, m), seed))
        assert basis[:, 0] == pytest.approx(ring_pair(n, m)[:, 0], abs=1e-11)
        assert np.abs(basis[:, 1]) == pytest.approx(np.abs(ring_pair(n, m)[:, 1]), abs=1e-11)


def test_a_whole_space_becomes_the_sites() -> None:
    assert canonical_basis(turned(np.eye(5), 3)) == pytest.approx(np.eye(5), abs=1e-14)


def test_a_sign_is_that_of_the_first_component_close_to_the_largest() -> None:
    vectors = np.array([[-0.5, 0.1, 0.0], [0.5 + 1e-9, -0.9, 0.0], [0.0, 0.3, -1.0]])
    assert fix_signs(vectors)[:, 0].tolist() == [0.5, -0.5 - 1e-9, 0.0]
    assert fix_signs(vectors)[:, 1].tolist() == [-0.1, 0.9, -0.3]
    assert fix_signs(vectors)[2, 2] == 1.0


def test_minus_zero_is_zero() -> None:
    assert not np.signbit(fix_signs(np.array([[-1.0], [0.0]]))[1, 0])


def test_groups_follow_the_width_and_never_drift() -> None:
    assert group_levels(np.array([0.0, 1e-9, 2e-9]), 10.0) == (slice(0, 2), slice(2, 3))
    assert group_levels(np.array([0.0, 1e-9]), 1.0) == (slice(0, 1), slice(1, 2))
    assert group_levels(np.array([0.0, 9e-11]), 0.0) == (slice(0, 2),)
    assert group_levels(np.zeros(0), 1.0) == ()


@pytest.mark.parametrize("n", [3, 6, 12, 60])
def test_orbitals_of_a_ring_do_not_depend_on_where_counting_starts(n: int) -> None:
    """The ring solved from another first site gives the same orbitals, site by site of the new count."""
    levels = solve_levels(cut_piece(CHAIN, cells=n, ends="ring"))
    names = tuple(Site(f"S{site}") for site in range(n))
    moved = Model(names, tuple(Coupling((site + 5) % n, (site + 6) % n, -1.0) for site in range(n)))
    again = solve_levels(cut_piece(moved))
    assert again.energy == pytest.approx(levels.energy, abs=1e-13)
    assert again.vectors == pytest.approx(levels.vectors, abs=1e-10)
