"""Where the levels of a piece lie on the bands of its crystal: k, its quality W, gap levels and their place.

For a level of energy E the candidates are all k in [0, π/a] with E_b(k) = E. Q_k projects on the Bloch states
``e^{ikm} u_bs(k)`` of energy E at ±k, restricted to the piece; for a degenerate group with projector P, W is the mean
of the d largest eigenvalues of P Q_k P, d the number of those above ½ (at least 1). Candidates in falling W, then
rising k, fill the group.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import groupby
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model
from bandbook.solver.bloch_states import batches
from bandbook.solver.branches import Branches, Solution, branches_of, solve_for_k
from bandbook.solver.hamiltonian import band_states
from bandbook.solver.labels import extended_k
from bandbook.solver.levels import Levels
from bandbook.solver.piece import Piece
from bandbook.solver.ranges import outside_bands

#: Singular values below this part of the largest are no direction of their own.
RANK: Final = 1e-6
#: Candidates closer than this are one, π/a.
SAME_K: Final = 1e-9
#: Distance from an edge's k within which a root of a band that takes the edge's k is the same candidate, π/a.
SAME_EDGE: Final = 1e-3
#: Decimals of W that count when candidates are ordered.
COUNTED: Final = 9
#: Weight on an end above which a gap level belongs there.
AT_END: Final = 0.7

BAND_EDGE: Final = "at a band edge"
FLAT_BAND: Final = "in a flat band"
GAP_LEVEL: Final = "outside every band"
NO_PARENT: Final = "no infinite parent"
NOT_1D: Final = "given for one-dimensional crystals only"
NO_STATE: Final = "no Bloch state is left for it"


@dataclass(frozen=True, eq=False)
class Places:
    """Where each level lies; one entry a level, in the order of the levels.

    Attributes:
        k: k on the parent band, π/a, 0 to 1; ``None`` where there is none.
        W: Part of the level in the Bloch states of that k, 0 to 1; ``None`` without k and at a band edge.
        band: Number of the sorted band, from 0; ``None`` without k.
        extended_k: k in the extended zone, π/a, 0 to the number of bands; ``None`` without k or unbranched backbone.
        is_gap_level: Whether the level lies outside every band, ``(state,)``.
        place: Of a gap level: ``"left end"``, ``"right end"``, ``"both ends"`` or ``"inside"``; ``None`` for others
            and in 2D and 3D.
        reason: Why k or W is missing; empty when both are there.
    """

    k: tuple[float | None, ...]
    W: tuple[float | None, ...]
    band: tuple[int | None, ...]
    extended_k: tuple[float | None, ...]
    is_gap_level: NDArray[np.bool_]
    place: tuple[str | None, ...]
    reason: tuple[str, ...]

    @property
    def n_gap_levels(self) -> int:
        """How many of the levels are gap levels."""
        return int(self.is_gap_level.sum())

    @property
    def has_extended_zone(self) -> bool:
        """Whether any level has a k in the extended zone."""
        return any(k is not None for k in self.extended_k)


@dataclass(frozen=True)
class Candidate:
    """A k at which bands have the energy of a group, with what the group has in common with their states."""

    k: float
    bands: tuple[int, ...]
    is_edge: bool
    W: float = 0.0
    d: int = 1


States = tuple[Candidate, NDArray[np.complex128]]


@dataclass(frozen=True)
class Mark:
    """k, W and band of one level, and why something is missing."""

    k: float | None = None
    W: float | None = None
    band: int | None = None
    reason: str = ""


def place_on_bands(model: Model, piece: Piece, levels: Levels) -> Places:
    """Return where the levels of a piece lie on the bands of its crystal.

    Args:
        model: The crystal that the piece was cut from; a molecule has no bands.
        piece: The piece.
        levels: Its levels.

    Raises:
        PhysicsError: The overlap matrix of the crystal is not positive definite at some k.

    >>> from bandbook.model import Coupling, Site
    >>> from bandbook.solver import cut_piece, solve_levels
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> piece = cut_piece(chain, cells=4)
    >>> places = place_on_bands(chain, piece, solve_levels(piece))
    >>> [round(k, 12) for k in places.k], [round(W, 12) for W in places.W]
    ([0.2, 0.4, 0.6, 0.8], [1.0, 1.0, 1.0, 1.0])
    """
    energies = np.array([levels.energy[part.start] for part in levels.groups])
    if model.dimension == 0:
        return _without_k(levels, is_gap=np.zeros(len(levels.energy), dtype=np.bool_), reason=NO_PARENT)
    is_gap = outside_bands(model, energies)
    if model.dimension > 1:
        return _without_k(levels, is_gap=is_gap[levels.group], reason=NOT_1D)
    crystal = branches_of(model)
    chosen = _chosen(crystal, energies)
    marks: list[Mark] = []
    places: list[str | None] = []
    for row, part in enumerate(levels.groups):
        size = part.stop - part.start
        if is_gap[row]:
            marks += [Mark(reason=GAP_LEVEL)] * size
        elif np.any(np.abs(crystal.flat - energies[row]) <= crystal.near_edge):
            marks += [Mark(reason=FLAT_BAND)] * size
        else:
            marks += _marks(piece, levels.vectors[:, part], chosen.get(row, ()))
        places += [_place(piece, levels.vectors[:, part]) if is_gap[row] else None] * size
    return _places(model, marks, places=places, is_gap=is_gap[levels.group])


def _places(model: Model, marks: Sequence[Mark], *, places: Sequence[str | None], is_gap: NDArray[np.bool_]) -> Places:
    return Places(
        k=tuple(mark.k for mark in marks),
        W=tuple(mark.W for mark in marks),
        band=tuple(mark.band for mark in marks),
        extended_k=tuple(extended_k(model, mark.k, mark.band) for mark in marks),
        is_gap_level=is_gap,
        place=tuple(places),
        reason=tuple(mark.reason for mark in marks),
    )


def _without_k(levels: Levels, *, is_gap: NDArray[np.bool_], reason: str) -> Places:
    n = len(levels.energy)
    nothing = (None,) * n
    reasons = tuple(GAP_LEVEL if flag else reason for flag in is_gap)
    return Places(nothing, nothing, nothing, nothing, is_gap, nothing, reasons)


def _chosen(crystal: Branches, energies: NDArray[np.float64]) -> dict[int, tuple[States, ...]]:
    """Return, for each energy, its candidates with the vectors u of their bands, ``(site of the cell, band)``."""
    found: list[tuple[int, list[Solution]]] = []
    for row, solutions in groupby(solve_for_k(crystal, energies), key=lambda solution: solution.row):
        found += [(row, cluster) for cluster in _clusters(list(solutions))]
    if not found:
        return {}
    k = np.array([next((s.k for s in cluster if s.is_edge), cluster[0].k) for _, cluster in found])
    chosen: dict[int, list[States]] = {}
    for part in batches(crystal.model, len(k)):
        energy, vectors = band_states(crystal.model, k[part, None])
        for index, (row, cluster) in enumerate(found[part]):
            bands = _bands(crystal, energy[index], cluster, energy=float(energies[row]))
            candidate = Candidate(float(k[part][index]), bands, any(solution.is_edge for solution in cluster))
            chosen.setdefault(row, []).append((candidate, vectors[index][:, list(bands)]))
    return {row: _without_doubles(pairs) for row, pairs in chosen.items()}


def _clusters(solutions: list[Solution]) -> list[list[Solution]]:
    clusters: list[list[Solution]] = []
    for solution in solutions:
        if clusters and solution.k - clusters[-1][-1].k <= SAME_K:
            clusters[-1].append(solution)
        else:
            clusters.append([solution])
    return clusters


def _bands(crystal: Branches, at_k: NDArray[np.float64], cluster: list[Solution], *, energy: float) -> tuple[int, ...]:
    """Return the bands that have the energy at the k of a cluster of solutions."""
    near = crystal.near_edge * (1.001 if any(solution.is_edge for solution in cluster) else 0.1)
    bands = {int(band) for band in np.flatnonzero(np.abs(at_k - energy) <= near)}
    return tuple(sorted(bands | {solution.band for solution in cluster}))


def _without_doubles(pairs: list[States]) -> tuple[States, ...]:
    """Leave out roots close to an edge whose states the edge already counts."""
    edges = [candidate for candidate, _ in pairs if candidate.is_edge]

    def is_double(one: Candidate) -> bool:
        return not one.is_edge and any(
            abs(one.k - edge.k) < SAME_EDGE and set(one.bands) <= set(edge.bands) for edge in edges
        )

    return tuple(pair for pair in pairs if not is_double(pair[0]))


def _marks(piece: Piece, vectors: NDArray[np.float64], pairs: Sequence[States]) -> list[Mark]:
    """Return the marks of one group: candidates in falling W, then rising k, until the group is full."""
    size = vectors.shape[1]
    weighed = [_weighed(piece, vectors, candidate, u=u) for candidate, u in pairs]
    marks: list[Mark] = []
    for one in sorted(weighed, key=lambda each: (-round(each.W, COUNTED), each.k)):
        W, reason = (None, BAND_EDGE) if one.is_edge else (min(one.W, 1.0), "")
        marks += [Mark(one.k, W, one.bands[0], reason)] * min(one.d, size - len(marks))
    marks.sort(key=lambda mark: mark.k or 0.0)
    return marks + [Mark(reason=NO_STATE)] * (size - len(marks))


def _weighed(
    piece: Piece, vectors: NDArray[np.float64], candidate: Candidate, *, u: NDArray[np.complex128]
) -> Candidate:
    """Return the candidate with W and d for a group."""
    space = restricted_space(piece, candidate.k, u)
    values = np.linalg.svd(space.T @ piece.times_overlap(vectors), compute_uv=False) ** 2
    d = max(1, int(np.count_nonzero(values > 0.5)))
    return Candidate(candidate.k, candidate.bands, candidate.is_edge, float(values[:d].mean()), d)


def restricted_space(piece: Piece, k: float, u: NDArray[np.complex128]) -> NDArray[np.float64]:
    """Return an orthonormal (S-orthonormal) basis of the Bloch states at ±k restricted to a piece.

    Args:
        piece: The piece of a 1D crystal.
        k: π/a.
        u: Cell-periodic vectors, ``(site of the cell, band)``.

    Returns:
        Real columns, ``(site, rank)``: the states at k and −k are complex conjugates, so that their real and imaginary
        parts span the same space.
    """
    waves = np.exp(1j * np.pi * k * piece.cell[:, 0])[:, None] * u[piece.site]
    space, sizes, _ = np.linalg.svd(np.concatenate([waves.real, waves.imag], axis=1), full_matrices=False)
    space = space[:, sizes > RANK * sizes[0]]
    if not piece.has_overlap:
        return space
    gram = space.T @ piece.times_overlap(space)
    basis: NDArray[np.float64] = np.linalg.solve(np.linalg.cholesky(gram), space.T).T
    return basis


def _place(piece: Piece, vectors: NDArray[np.float64]) -> str:
    """Return where in the piece a group of gap levels sits, by its weights on the first and last third of the cells."""
    if piece.is_ring:
        return "inside"
    weights = piece.populations(vectors).mean(axis=1)
    cell = piece.cell[:, 0]
    middle = (cell + 0.5) / (int(cell.max()) + 1)
    left, right = float(weights[middle < 1 / 3].sum()), float(weights[middle > 2 / 3].sum())
    if left > AT_END:
        return "left end"
    if right > AT_END:
        return "right end"
    return "both ends" if left + right > AT_END else "inside"
