"""Levels of a piece: energies, canonical orbitals and their occupation at 0 K."""

import math
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.errors import PhysicsError
from bandbook.solver.canonical import canonical_basis, fix_signs, group_levels
from bandbook.solver.hamiltonian import LEAST_OVERLAP
from bandbook.solver.piece import Piece
from bandbook.solver.selected import chain_levels, has_tridiagonal, spectrum_bounds, window_energies, window_levels

#: Sites above which only levels around the Fermi energy are computed.
MOST_IN_FULL: Final = 2_000
#: Levels computed beyond the window, so that a degenerate group is seen whole.
MARGIN: Final = 4


@dataclass(frozen=True, eq=False)
class Levels:
    """Levels of a piece, ascending; all of them unless ``is_selected``.

    Attributes:
        energy: Energies, eV, ``(state,)``; members of a degenerate group share the mean.
        vectors: Orbitals, ``(site, state)``, in the canonical basis; orthonormal (with overlap: S-orthonormal).
        occupation: Electrons of each level, 0 to 2, ``(state,)``.
        groups: The degenerate groups as slices into the levels.
        participation: 1/Σ p² of the populations p of the level's group, ``(state,)``: over how many sites it spreads.
        first: How many levels lie below the first one here; level number n of entry i is ``first + i + 1``.
        n_levels: Levels of the piece.
        is_selected: Whether only levels around the Fermi energy are here.
        total_width: Lowest to highest level, eV; an upper bound when selected.
        homo: Highest occupied level, eV; ``None`` without electrons.
        lumo: Lowest level with room, eV; ``None`` when all are full.
        is_open_shell: Whether a group is partly filled; then ``homo`` = ``lumo`` = its energy.
        pi_energy: Σ occupation × energy, eV; ``None`` when selected.
    """

    energy: NDArray[np.float64]
    vectors: NDArray[np.float64]
    occupation: NDArray[np.float64]
    groups: tuple[slice, ...]
    participation: NDArray[np.float64]
    first: int
    n_levels: int
    is_selected: bool
    total_width: float
    homo: float | None
    lumo: float | None
    is_open_shell: bool
    pi_energy: float | None

    @property
    def gap(self) -> float | None:
        """HOMO–LUMO distance, eV; 0 for an open shell, ``None`` when one of the two is missing."""
        return None if self.homo is None or self.lumo is None else self.lumo - self.homo

    @property
    def group(self) -> NDArray[np.intp]:
        """Number of the degenerate group of each level, from 0, ``(state,)``."""
        return np.repeat(np.arange(len(self.groups)), [part.stop - part.start for part in self.groups])

    @property
    def degeneracy(self) -> NDArray[np.intp]:
        """Size of the degenerate group of each level, ``(state,)``."""
        sizes = np.array([part.stop - part.start for part in self.groups], dtype=np.intp)
        return np.repeat(sizes, sizes)


@dataclass(frozen=True)
class Filling:
    """How electrons fill ascending levels; ``homo`` and ``lumo`` as in :class:`Levels`."""

    occupation: NDArray[np.float64]
    homo: float | None
    lumo: float | None
    is_open_shell: bool


def solve_levels(piece: Piece, *, each_side: int = 20) -> Levels:
    """Return the levels of a piece, H c = E S c.

    Up to 2,000 sites all of them, above that ``each_side`` levels on each side of the Fermi energy.

    Args:
        piece: The piece; energies come out in the eV that went in.
        each_side: Levels on each side of the Fermi energy of a large piece.

    Raises:
        PhysicsError: The overlap matrix is not positive definite, or the levels around the Fermi energy could not be
            told with certainty.

    >>> from bandbook.model import Coupling, Model, Site
    >>> from bandbook.solver.piece import cut_piece
    >>> ethylene = Model((Site("A"), Site("B")), (Coupling(0, 1, -2.5),))
    >>> levels = solve_levels(cut_piece(ethylene))
    >>> levels.energy.tolist(), levels.gap, levels.pi_energy
    ([-2.5, 2.5], 5.0, -5.0)
    """
    if piece.n_sites > MOST_IN_FULL:
        return _selected(piece, each_side)
    energy, vectors = _in_full(piece)
    width = float(energy[-1] - energy[0])
    groups = group_levels(energy, width)
    energy, vectors = _settled(energy, vectors, groups)
    filling = fill(energy, groups, electrons=piece.electrons)
    return _levels(
        piece, energy, vectors, groups=groups, filling=filling, window=(0, width, float(filling.occupation @ energy))
    )


def _levels(
    piece: Piece,
    energy: NDArray[np.float64],
    vectors: NDArray[np.float64],
    *,
    groups: tuple[slice, ...],
    filling: Filling,
    window: tuple[int, float, float | None],
) -> Levels:
    first, width, pi_energy = window
    return Levels(
        energy=energy,
        vectors=vectors,
        occupation=filling.occupation,
        groups=groups,
        participation=_participation(piece, vectors, groups),
        first=first,
        n_levels=piece.n_sites,
        is_selected=len(energy) < piece.n_sites,
        total_width=width,
        homo=filling.homo,
        lumo=filling.lumo,
        is_open_shell=filling.is_open_shell,
        pi_energy=pi_energy,
    )


def _in_full(piece: Piece) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    if has_tridiagonal(piece):
        return chain_levels(piece)
    H, S = piece.matrices()
    if S is None:
        energy, vectors = np.linalg.eigh(H)
        return energy, vectors
    least = float(np.linalg.eigvalsh(S)[0])
    if least < LEAST_OVERLAP:
        raise PhysicsError(
            f"the smallest eigenvalue of the overlap matrix of the piece is {least:.3g}; it must be positive, at least "
            f"{LEAST_OVERLAP:g}; make the overlaps smaller"
        )
    from scipy.linalg import eigh

    energy, vectors = eigh(H, S)
    return energy, vectors


def _settled(
    energy: NDArray[np.float64], vectors: NDArray[np.float64], groups: tuple[slice, ...]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return energies and orbitals with the mean energy and the canonical basis of each group."""
    energy, vectors = energy.copy(), vectors.copy()
    single = np.array([part.start for part in groups if part.stop - part.start == 1], dtype=np.intp)
    vectors[:, single] = fix_signs(vectors[:, single])
    for part in groups:
        if part.stop - part.start > 1:
            energy[part] = energy[part].mean()
            vectors[:, part] = canonical_basis(vectors[:, part])
    return energy + 0.0, vectors


def fill(energy: NDArray[np.float64], groups: tuple[slice, ...], *, electrons: float, below: int = 0) -> Filling:
    """Return how electrons fill levels from below, two a level; a partly filled group is filled evenly.

    Args:
        energy: Ascending, eV, ``(state,)``.
        groups: The degenerate groups.
        electrons: Electrons of the piece.
        below: Levels below the first one here, all full.

    >>> levels = np.array([-2.0, 0.0, 0.0])
    >>> filling = fill(levels, (slice(0, 1), slice(1, 3)), electrons=4)
    >>> filling.occupation.tolist(), filling.homo, filling.lumo, filling.is_open_shell
    ([2.0, 1.0, 1.0], 0.0, 0.0, True)
    """
    occupation = np.zeros(len(energy))
    left = electrons - 2.0 * below
    homo = lumo = None
    is_open = False
    for part in groups:
        size = part.stop - part.start
        taken = min(left, 2.0 * size)
        occupation[part] = taken / size
        left -= taken
        if taken > 0:
            homo = float(energy[part.start])
        if taken < 2 * size and lumo is None:
            lumo = float(energy[part.start])
        is_open = is_open or 0 < taken < 2 * size
    return Filling(occupation, homo, lumo, is_open)


def _participation(piece: Piece, vectors: NDArray[np.float64], groups: tuple[slice, ...]) -> NDArray[np.float64]:
    populations = piece.populations(vectors)
    ratios = np.empty(vectors.shape[1])
    for part in groups:
        mean = populations[:, part].mean(axis=1)
        ratios[part] = 1.0 / float(mean @ mean)
    return ratios


def _window(piece: Piece, each_side: int) -> tuple[int, int]:
    """Return the first level around the Fermi energy and the one after the last."""
    filled = piece.electrons / 2
    return max(0, math.floor(filled) - each_side), min(piece.n_sites, math.ceil(filled) + each_side)


def _selected(piece: Piece, each_side: int) -> Levels:
    low, high = _window(piece, each_side)
    energy, vectors, first = window_levels(piece, first=max(0, low - MARGIN), last=min(piece.n_sites, high + MARGIN))
    bottom, top = spectrum_bounds(piece)
    groups = group_levels(energy, top - bottom)
    energy, vectors = _settled(energy, vectors, groups)
    filling = fill(energy, groups, electrons=piece.electrons, below=first)
    kept = slice(low - first, high - first)
    filling = replace(filling, occupation=filling.occupation[kept])
    return _levels(
        piece,
        energy[kept],
        vectors[:, kept],
        groups=_trimmed(groups, kept),
        filling=filling,
        window=(low, top - bottom, None),
    )


def _trimmed(groups: tuple[slice, ...], kept: slice) -> tuple[slice, ...]:
    inside = ((max(part.start, kept.start) - kept.start, min(part.stop, kept.stop) - kept.start) for part in groups)
    return tuple(slice(start, stop) for start, stop in inside if start < stop)


def frontier_energies(piece: Piece, *, each_side: int) -> tuple[NDArray[np.float64], int]:
    """Return the levels around the Fermi energy, without orbitals.

    Args:
        piece: The piece.
        each_side: How many levels on each side; a level that holds a single electron comes on top.

    Returns:
        Energies, ascending, eV, ``(state,)``, and how many levels lie below the first of them.

    >>> from bandbook.model import Coupling, Model, Site
    >>> from bandbook.solver.piece import cut_piece
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> energy, first = frontier_energies(cut_piece(chain, cells=4), each_side=1)
    >>> energy.round(6).tolist(), first
    ([-0.618034, 0.618034], 1)
    """
    low, high = _window(piece, each_side)
    if piece.n_sites <= MOST_IN_FULL and not has_tridiagonal(piece):
        return _in_full(piece)[0][low:high], low
    return window_energies(piece, first=low, last=high), low
