"""A piece of a crystal, or a molecule: its sites and bonds as arrays, cut, finished and changed as asked."""

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any, Final

import numpy as np
from numpy.typing import NDArray

from bandbook.errors import PhysicsError
from bandbook.model import Model
from bandbook.solver.edits import Draft, apply_changes, draft_of, site_index

if TYPE_CHECKING:
    from scipy.sparse import csr_array

#: Sites above which no dense matrix is made.
MOST_DENSE: Final = 6_000
#: Cells of the largest piece.
MOST_CELLS: Final = 10**7


@dataclass(frozen=True, eq=False)
class Piece:
    """A finite system: every site and every bond once.

    Attributes:
        alpha: Coulomb integrals, eV, ``(site,)``; cells in order, the sites of a cell in the model's order.
        start: First site of each bond, ``(bond,)``.
        end: Second site of each bond, ``(bond,)``.
        beta: Resonance integrals, eV, ``(bond,)``.
        overlap: Overlap integrals, ``(bond,)``.
        norm: Overlap of each site with itself, ``(site,)``: 1, except where a site of a small ring meets its own image.
        cell: The cell of each site, counting from 0, ``(site, dimension)``.
        site: The site's row in the model's cell, ``(site,)``.
        electrons: Electrons of the piece.
        n_cells: Cells along each lattice vector; ``()`` for a molecule.
        is_ring: Whether the ends are joined.
        is_finished: Whether sites were added or dropped at the ends.
        is_edited: Whether sites or bonds were changed.
    """

    alpha: NDArray[np.float64]
    start: NDArray[np.intp]
    end: NDArray[np.intp]
    beta: NDArray[np.float64]
    overlap: NDArray[np.float64]
    norm: NDArray[np.float64]
    cell: NDArray[np.intp]
    site: NDArray[np.intp]
    electrons: int
    n_cells: tuple[int, ...] = ()
    is_ring: bool = False
    is_finished: bool = False
    is_edited: bool = False

    @property
    def n_sites(self) -> int:
        """Number of sites."""
        return len(self.alpha)

    @property
    def dimension(self) -> int:
        """Number of lattice vectors of its crystal; 0 for a molecule."""
        return len(self.n_cells)

    @cached_property
    def has_overlap(self) -> bool:
        """Whether any bond carries an overlap."""
        return bool(np.any(self.overlap) or np.any(self.norm != 1))

    @cached_property
    def coordination(self) -> NDArray[np.intp]:
        """Number of bonds with β ≠ 0 of each site, ``(site,)``."""
        bonded = self.beta != 0
        return np.bincount(np.concatenate([self.start[bonded], self.end[bonded]]), minlength=self.n_sites)

    @cached_property
    def path(self) -> NDArray[np.intp] | None:
        """Order of the sites along an unbranched open chain, from the end with the lower number; otherwise ``None``."""
        bonded = self.beta != 0
        ends = np.flatnonzero(self.coordination == 1)
        if self.n_sites == 1:
            return np.zeros(1, dtype=np.intp)
        if np.count_nonzero(bonded) != self.n_sites - 1 or len(ends) != 2 or self.coordination.max() > 2:
            return None
        from scipy.sparse import coo_array
        from scipy.sparse.csgraph import breadth_first_order

        links = coo_array(
            (np.ones(self.n_sites - 1), (self.start[bonded], self.end[bonded])), shape=(self.n_sites,) * 2
        )
        order = breadth_first_order(links.tocsr(), int(ends[0]), directed=False, return_predecessors=False)
        return order.astype(np.intp) if len(order) == self.n_sites else None

    def matrices(self) -> tuple[NDArray[np.float64], NDArray[np.float64] | None]:
        """Return the dense H, eV, and S (``None`` without overlap), both ``(site, site)`` and symmetric.

        Raises:
            PhysicsError: The piece is too large for a dense matrix.
        """
        if self.n_sites > MOST_DENSE:
            gigabytes = 8 * self.n_sites**2 / 1e9
            raise PhysicsError(
                f"{self.n_sites} sites need {gigabytes:.1f} GB for a dense matrix; at most {MOST_DENSE} sites are "
                "solved in full; take fewer cells"
            )
        return _dense(self, self.alpha, self.beta), _dense(self, self.norm, self.overlap) if self.has_overlap else None

    @cached_property
    def sparse(self) -> tuple["csr_array", "csr_array | None"]:
        """The sparse H, eV, and S (``None`` without overlap), both ``(site, site)`` and symmetric."""
        return _sparse(self, self.alpha, self.beta), _sparse(
            self, self.norm, self.overlap
        ) if self.has_overlap else None

    @property
    def chain(self) -> tuple[NDArray[np.float64], NDArray[np.float64]] | None:
        """Coulomb and resonance integrals along :attr:`path`, eV, ``(site,)`` and ``(site − 1,)``, if there is one."""
        order = self.path
        if order is None:
            return None
        rank = np.empty(self.n_sites, dtype=np.intp)
        rank[order] = np.arange(self.n_sites)
        bonded = self.beta != 0
        bonds = np.empty(self.n_sites - 1)
        bonds[np.minimum(rank[self.start[bonded]], rank[self.end[bonded]])] = self.beta[bonded]
        return self.alpha[order], bonds

    def times_overlap(self, vectors: NDArray[np.float64]) -> NDArray[np.float64]:
        """Return S times the vectors, ``(site, state)``; the vectors themselves without overlap."""
        S = self.sparse[1] if self.has_overlap else None
        return vectors if S is None else np.asarray(S @ vectors, dtype=np.float64)

    def populations(self, vectors: NDArray[np.float64]) -> NDArray[np.float64]:
        """Return the population c (S c) of each site by one electron in each orbital, ``(site, state)``; 1 in sum."""
        return vectors * self.times_overlap(vectors)


def _dense(piece: Piece, diagonal: NDArray[np.float64], bonds: NDArray[np.float64]) -> NDArray[np.float64]:
    matrix = np.diag(diagonal)
    np.add.at(matrix, (piece.start, piece.end), bonds)
    np.add.at(matrix, (piece.end, piece.start), bonds)
    return matrix


def _sparse(piece: Piece, diagonal: NDArray[np.float64], bonds: NDArray[np.float64]) -> "csr_array":
    from scipy.sparse import coo_array

    own = np.arange(piece.n_sites)
    rows = np.concatenate([own, piece.start, piece.end])
    columns = np.concatenate([own, piece.end, piece.start])
    values = np.concatenate([diagonal, bonds, bonds])
    return coo_array((values, (rows, columns)), shape=(piece.n_sites,) * 2).tocsr()


def cut_piece(
    model: Model,
    *,
    cells: int | Sequence[int] | None = None,
    ends: str = "open",
    add: Sequence[str] = (),
    drop: Sequence[str] = (),
    changes: Sequence[Mapping[str, Any]] = (),
) -> Piece:
    """Return a piece of a crystal, or the molecule itself.

    Args:
        model: The crystal or molecule.
        cells: Cells along each lattice vector; ``None`` for a molecule.
        ends: ``"open"``: what reaches out is cut off; ``"ring"``: bonds leave at one side and enter at the other, so
            that a ring of N cells has the energies of the crystal at N values of k. Bonds that wrap onto the same pair
            add up; a bond of a site to its own image adds 2β to its α.
        add: Sites of the next cell that close the far end, bonded as the crystal bonds them.
        drop: Sites left out of the first cell.
        changes: Rows with ``cell``, and ``site`` with ``alpha`` or ``remove``, or ``from``, ``to`` (``to_cell``) with
            ``beta`` (``overlap``) or ``remove``. A bond is the one inside the cell if there is one, else the one that
            the crystal has from ``from`` to ``to`` of a neighbour cell, else new. Cells count from 0.

    Raises:
        PhysicsError: The piece does not fit the model, nothing is left, or its electrons are no whole number.

    >>> from bandbook.model import Coupling, Model, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> cut_piece(chain, cells=3).matrices()[0].tolist()
    [[0.0, -1.0, 0.0], [-1.0, 0.0, -1.0], [0.0, -1.0, 0.0]]
    >>> cut_piece(chain, cells=1, ends="ring").alpha.tolist()
    [-2.0]
    """
    shape = _shape(model, cells)
    is_ring = _is_ring(model, ends)
    _check_finish(model, add=add, drop=drop, is_ring=is_ring)
    grid = (shape[0] + 1,) if add else shape or (1,)
    draft = draft_of(model, grid, is_ring=is_ring)
    n = model.n_sites
    if add:
        draft.present[shape[0] * n :] = False
        draft.present[[shape[0] * n + site_index(model, name) for name in add]] = True
    draft.present[[site_index(model, name) for name in drop]] = False
    apply_changes(draft, changes)
    return _finished(draft, shape, is_finished=bool(add or drop), is_edited=bool(changes))


def _finished(draft: Draft, shape: tuple[int, ...], *, is_finished: bool, is_edited: bool) -> Piece:
    """Number the sites that are present and gather their bonds."""
    sites = np.flatnonzero(draft.present)
    if not len(sites):
        raise PhysicsError("no site is left in the piece; at least one is needed; drop or remove fewer")
    number = np.cumsum(draft.present) - 1
    kept = draft.present[draft.start] & draft.present[draft.end]
    start, end = number[draft.start[kept]], number[draft.end[kept]]
    beta, overlap = draft.beta[kept], draft.overlap[kept]
    alpha, norm = draft.alpha[sites], np.ones(len(sites))
    own = start == end
    if own.any():
        np.add.at(alpha, start[own], 2 * beta[own])
        np.add.at(norm, start[own], 2 * overlap[own])
        start, end, beta, overlap = start[~own], end[~own], beta[~own], overlap[~own]
    if draft.is_ring:
        start, end, beta, overlap = _summed(start, end, beta, overlap)
    n = draft.model.n_sites
    where = np.stack(np.unravel_index(sites // n, draft.shape), axis=1) if shape else np.zeros((len(sites), 0), np.intp)
    return Piece(
        alpha=alpha,
        start=start,
        end=end,
        beta=beta,
        overlap=overlap,
        norm=norm,
        cell=where.astype(np.intp),
        site=(sites % n).astype(np.intp),
        electrons=_electrons(draft.model, sites % n),
        n_cells=shape,
        is_ring=draft.is_ring,
        is_finished=is_finished,
        is_edited=is_edited,
    )


def _summed(
    start: NDArray[np.intp], end: NDArray[np.intp], beta: NDArray[np.float64], overlap: NDArray[np.float64]
) -> tuple[NDArray[np.intp], NDArray[np.intp], NDArray[np.float64], NDArray[np.float64]]:
    """Add up bonds of a small ring that join the same pair."""
    low, high = np.minimum(start, end), np.maximum(start, end)
    pairs, row = np.unique(np.stack([low, high], axis=1), axis=0, return_inverse=True)
    if len(pairs) == len(start):
        return start, end, beta, overlap
    row = row.reshape(-1)
    sums = np.zeros((len(pairs), 2))
    np.add.at(sums, row, np.stack([beta, overlap], axis=1))
    return pairs[:, 0], pairs[:, 1], sums[:, 0], sums[:, 1]


def _electrons(model: Model, sites: NDArray[np.intp]) -> int:
    """Return the electrons that the sites bring, those of a cell adding up to the model's."""
    each = np.array([site.electrons for site in model.sites], dtype=np.float64)
    total = float(each.sum())
    each = each * (model.n_electrons / total) if total else np.full(model.n_sites, model.n_electrons / model.n_sites)
    count = float(np.bincount(sites, minlength=model.n_sites) @ each)
    if not math.isclose(count, round(count), rel_tol=1e-12, abs_tol=1e-6):
        raise PhysicsError(
            f"the piece has {count:g} electrons; a whole number is needed; choose the cells, ends or electrons so"
        )
    return round(count)


def _shape(model: Model, cells: int | Sequence[int] | None) -> tuple[int, ...]:
    if cells is None:
        if model.dimension:
            raise PhysicsError("a periodic system needs the size of the piece; one number a lattice vector; give cells")
        return ()
    shape = (cells,) if isinstance(cells, int) else tuple(cells)
    if not model.dimension:
        raise PhysicsError("a molecule has no cells; cells are for a periodic system; remove cells")
    if len(shape) != model.dimension:
        raise PhysicsError(
            f"cells has {len(shape)} numbers; one for each of the {model.dimension} lattice vectors; correct cells"
        )
    if min(shape) < 1 or math.prod(shape) > MOST_CELLS:
        raise PhysicsError(f"cells is {list(shape)}; 1 to {MOST_CELLS} cells in all are allowed; correct cells")
    return shape


def _is_ring(model: Model, ends: str) -> bool:
    if ends not in {"open", "ring"}:
        raise PhysicsError(f'ends is "{ends}"; "open" or "ring" is allowed; correct ends')
    return ends == "ring" and model.dimension > 0


def _check_finish(model: Model, *, add: Sequence[str], drop: Sequence[str], is_ring: bool) -> None:
    if not (add or drop):
        return
    if model.dimension != 1 or is_ring:
        what = "a ring" if is_ring else "a molecule" if not model.dimension else f"a piece in {model.dimension}D"
        raise PhysicsError(
            f"add or drop is given for {what}; they finish the two ends of an open piece of a 1D crystal; "
            "use changes with remove = true"
        )
