"""A piece while it is being cut: sites on a grid of cells, bonds one by one, and the changes an author asks for."""

import itertools
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from bandbook.errors import PhysicsError
from bandbook.model import Model

Cell = tuple[int, ...]


@dataclass
class Draft:
    """All sites of a grid of cells, those present marked, and every bond between them.

    Attributes:
        model: The crystal, or the molecule as a crystal of one cell.
        shape: Cells along each lattice vector; ``(1,)`` for a molecule.
        is_ring: Whether bonds leave at one side and enter at the other.
        alpha: Coulomb integral of every site, eV, ``(grid sites,)``; site s of cell c is number c n + s.
        present: Whether the site is part of the piece, ``(grid sites,)``.
        start: First site of each bond, ``(bonds,)``.
        end: Second site of each bond, ``(bonds,)``.
        beta: Resonance integral of each bond, eV, ``(bonds,)``.
        overlap: Overlap of each bond, ``(bonds,)``.
        coupling: Which coupling of the model each bond copies; −1 for one that a change added, ``(bonds,)``.
        home: Cell in which that coupling starts, flat, ``(bonds,)``.
    """

    model: Model
    shape: Cell
    is_ring: bool
    alpha: NDArray[np.float64]
    present: NDArray[np.bool_]
    start: NDArray[np.intp]
    end: NDArray[np.intp]
    beta: NDArray[np.float64]
    overlap: NDArray[np.float64]
    coupling: NDArray[np.intp]
    home: NDArray[np.intp]


def draft_of(model: Model, shape: Cell, *, is_ring: bool) -> Draft:
    """Return whole cells on a grid, bonded as the crystal bonds them."""
    n_cells = int(np.prod(shape))
    alpha = np.tile(np.array([site.alpha for site in model.sites], dtype=np.float64), n_cells)
    ends = [_bonds(model, shape, index=index, is_ring=is_ring) for index in range(len(model.couplings))]
    lengths = [len(start) for start, _ in ends]
    betas = np.array([coupling.beta for coupling in model.couplings], dtype=np.float64)
    overlaps = np.array([coupling.overlap for coupling in model.couplings], dtype=np.float64)
    start = np.concatenate([np.zeros(0, np.intp), *(start for start, _ in ends)])
    return Draft(
        model=model,
        shape=shape,
        is_ring=is_ring,
        alpha=alpha,
        present=np.ones(len(alpha), dtype=np.bool_),
        start=start,
        end=np.concatenate([np.zeros(0, np.intp), *(end for _, end in ends)]),
        beta=np.repeat(betas, lengths),
        overlap=np.repeat(overlaps, lengths),
        coupling=np.repeat(np.arange(len(lengths), dtype=np.intp), lengths),
        home=start // model.n_sites,
    )


def _bonds(model: Model, shape: Cell, *, index: int, is_ring: bool) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Return start and end of every copy of one coupling inside the grid, in the order of the cells."""
    coupling = model.couplings[index]
    step = coupling.cell or (0,)
    homes = np.arange(int(np.prod(shape)), dtype=np.intp)
    reached = [axis + move for axis, move in zip(np.unravel_index(homes, shape), step, strict=True)]
    if is_ring:
        reached = [axis % length for axis, length in zip(reached, shape, strict=True)]
    inside = np.logical_and.reduce([(axis >= 0) & (axis < length) for axis, length in zip(reached, shape, strict=True)])
    targets = np.ravel_multi_index([axis[inside] for axis in reached], shape)
    n = model.n_sites
    return homes[inside] * n + coupling.start, targets.astype(np.intp) * n + coupling.end


def site_index(model: Model, name: str) -> int:
    """Return the row of a site by its name.

    Raises:
        PhysicsError: The model has no such site.
    """
    for index, site in enumerate(model.sites):
        if site.name == name:
            return index
    known = ", ".join(site.name for site in model.sites)
    raise PhysicsError(f"there is no site {name!r}; the sites of a cell are {known}; correct the name")


def apply_changes(draft: Draft, changes: Sequence[Mapping[str, Any]]) -> None:
    """Change sites and bonds of a draft in the order given; a removed site takes its bonds with it.

    Raises:
        PhysicsError: A change names a cell or site that the piece does not have, or changes nothing.
    """
    for change in changes:
        if change.get("site") is not None:
            _change_site(draft, change)
        elif change.get("from") is not None and change.get("to") is not None:
            _change_bond(draft, change)
        else:
            raise PhysicsError(
                'a change names neither a site nor a bond; give "site", or "from" and "to"; correct the change'
            )


def _change_site(draft: Draft, change: Mapping[str, Any]) -> None:
    place = _place(draft, change.get("cell"), str(change["site"]))
    if change.get("remove"):
        draft.present[place] = False
    elif change.get("alpha") is not None:
        draft.alpha[place] = float(change["alpha"])
    else:
        raise PhysicsError(
            f'the change of site {change["site"]!r} changes nothing; give "alpha", or remove = true; correct the change'
        )


def _change_bond(draft: Draft, change: Mapping[str, Any]) -> None:
    one = _place(draft, change.get("cell"), str(change["from"]))
    row, two = _bond(draft, change, one=one)
    if change.get("remove"):
        if row is None:
            raise PhysicsError(f"there is no bond {_words(change)} to remove; name a bond; correct the change")
        _keep(draft, np.arange(len(draft.start)) != row)
        return
    if change.get("beta") is None:
        raise PhysicsError(
            f'the change of the bond {_words(change)} changes nothing; give "beta", or remove = true; correct it'
        )
    overlap = float(change.get("overlap") or 0.0)
    if row is None:
        _append(draft, one, two, beta=float(change["beta"]), overlap=overlap)
        return
    draft.beta[row] = float(change["beta"])
    if change.get("overlap") is not None:
        draft.overlap[row] = overlap


def _bond(draft: Draft, change: Mapping[str, Any], *, one: int) -> tuple[int | None, int]:
    """Return the row of the bond that a change means, and its second site; ``None`` where there is no bond yet."""
    name = str(change["to"])
    if change.get("to_cell") is not None:
        two = _place(draft, change["to_cell"], name)
        return _row(draft, one, two), two
    two = _place(draft, change.get("cell"), name)
    row = _row(draft, one, two) if one != two else None
    if row is not None:
        return row, two
    n = draft.model.n_sites
    for index, is_start in itertools.product(range(len(draft.model.couplings)), (True, False)):
        row = _crystal_row(draft, index, one=one, name=name, is_start=is_start)
        if row is not None:
            return row, int(draft.end[row] if is_start else draft.start[row])
    if one == two:
        raise PhysicsError(
            f"no bond {_words(change)} leaves this cell; name two sites, or the cell of the second "
            f'("to_cell", {len(draft.alpha) // n} cells from 0); correct the change'
        )
    return None, two


def _crystal_row(draft: Draft, index: int, *, one: int, name: str, is_start: bool) -> int | None:
    """Return the row of the copy of one coupling that starts (or ends) at site ``one`` with ``name`` at the other."""
    coupling = draft.model.couplings[index]
    near, far = (coupling.start, coupling.end) if is_start else (coupling.end, coupling.start)
    if near != one % draft.model.n_sites or far != site_index(draft.model, name):
        return None
    rows = np.flatnonzero((draft.coupling == index) & ((draft.start if is_start else draft.end) == one))
    return int(rows[0]) if len(rows) else None


def _row(draft: Draft, one: int, two: int) -> int | None:
    forward = (draft.start == one) & (draft.end == two)
    rows = np.flatnonzero(forward | ((draft.start == two) & (draft.end == one)))
    return int(rows[0]) if len(rows) else None


def _place(draft: Draft, cell: int | Sequence[int] | None, name: str) -> int:
    """Return the number of a site on the grid."""
    given: Cell = (0,) if cell is None and not draft.model.dimension else _cell(cell)
    site = site_index(draft.model, name)
    if len(given) != len(draft.shape) or any(not 0 <= c < n for c, n in zip(given, draft.shape, strict=False)):
        most = ", ".join(f"0 to {length - 1}" for length in draft.shape)
        raise PhysicsError(f"there is no cell {cell} in this piece; cells count {most}; correct the change of {name!r}")
    place = int(np.ravel_multi_index(given, draft.shape)) * draft.model.n_sites + site
    if not draft.present[place]:
        raise PhysicsError(f"cell {cell} has no site {name!r} in this piece; change a site that is there; correct it")
    return place


def _cell(cell: int | Sequence[int] | None) -> Cell:
    if cell is None:
        return ()
    return (cell,) if isinstance(cell, int) else tuple(cell)


def _append(draft: Draft, one: int, two: int, *, beta: float, overlap: float) -> None:
    draft.start, draft.end = np.append(draft.start, one), np.append(draft.end, two)
    draft.beta, draft.overlap = np.append(draft.beta, beta), np.append(draft.overlap, overlap)
    draft.coupling = np.append(draft.coupling, -1)
    draft.home = np.append(draft.home, one // draft.model.n_sites)


def _keep(draft: Draft, kept: NDArray[np.bool_]) -> None:
    for name in ("start", "end", "beta", "overlap", "coupling", "home"):
        setattr(draft, name, getattr(draft, name)[kept])


def _words(change: Mapping[str, Any]) -> str:
    return f"{change['from']}–{change['to']}" + (f" in cell {change['cell']}" if change.get("cell") is not None else "")
