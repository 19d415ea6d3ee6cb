"""Two labels of unbranched chains: the node label of an open piece, and k in the extended zone of a crystal."""

from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model
from bandbook.solver.levels import Levels
from bandbook.solver.piece import Piece

#: Components below this part of the largest count as zero.
ZERO: Final = 1e-9


def node_labels(piece: Piece, levels: Levels) -> tuple[float, ...] | None:
    """Return the node label n/(N − 1) of each level of an unbranched open chain of N sites, in π/spacing.

    n counts the sign changes along the chain, zeros dropped. Where all β have one sign, Sturm's theorem gives n without
    looking at the orbital: the number of levels below (above for β > 0). The label is no k; its point on E(k) of the
    infinite chain does not lie at the level.

    Returns:
        One label a level, 0 to 1; ``None`` when the piece branches, is closed or broken, or has one site.

    >>> from bandbook.model import Coupling, Site
    >>> from bandbook.solver import cut_piece, solve_levels
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> piece = cut_piece(chain, cells=4)
    >>> [round(label, 6) for label in node_labels(piece, solve_levels(piece))]
    [0.0, 0.333333, 0.666667, 1.0]
    """
    order = piece.path
    if order is None or piece.n_sites < 2:
        return None
    last = piece.n_sites - 1
    bonds = piece.beta[piece.beta != 0]
    number = levels.first + np.arange(len(levels.energy))
    if not piece.has_overlap and bool(np.all(bonds < 0)):
        nodes = number
    elif not piece.has_overlap and bool(np.all(bonds > 0)):
        nodes = last - number
    else:
        nodes = sign_changes(levels.vectors[order])
    return tuple(float(n) / last for n in nodes)


def sign_changes(vectors: NDArray[np.float64]) -> NDArray[np.intp]:
    """Return the sign changes down each column, zeros dropped, ``(state,)``.

    >>> sign_changes(np.array([[1.0, 1.0], [0.0, 1.0], [-1.0, 0.5]])).tolist()
    [1, 0]
    """
    counts = []
    for column in vectors.T:
        signs = np.sign(column[np.abs(column) > ZERO * np.abs(column).max()])
        counts.append(np.count_nonzero(np.diff(signs)))
    return np.array(counts, dtype=np.intp)


def extended_k(model: Model, k: float | None, band: int | None) -> float | None:
    """Return k in the extended zone of a crystal that is one unbranched chain, π/a.

    Band b (from 1) unfolds into [(b − 1)π/a, bπ/a]. Bands count from the lowest when the β are negative, from the
    highest when they are positive: the end at which neighbours have equal signs is k = 0.

    Args:
        model: The crystal.
        k: Reduced, π/a, 0 to 1.
        band: Number of the sorted band, from 0, ascending.

    Returns:
        0 to the number of bands; ``None`` without k, for another crystal, or when β of both signs occur.

    >>> from bandbook.model import Coupling, Site
    >>> pair = Model((Site("A"), Site("B")), (Coupling(0, 1, -1.0, (0,)), Coupling(1, 0, -1.0, (1,))), dimension=1)
    >>> extended_k(pair, 0.25, 0), extended_k(pair, 0.25, 1)
    (0.25, 1.75)
    """
    if k is None or band is None or not is_backbone(model):
        return None
    betas = [coupling.beta for coupling in model.couplings if coupling.beta]
    if min(betas) < 0 < max(betas):
        return None
    count = band if betas[0] < 0 else model.n_sites - 1 - band
    return count + 1 - k if count % 2 else count + k


def is_backbone(model: Model) -> bool:
    """Return whether a 1D crystal is one unbranched chain that goes on by one cell every cell.

    >>> from bandbook.model import Coupling, Site
    >>> is_backbone(Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)), Coupling(0, 0, -0.1, (2,))), dimension=1))
    False
    """
    bonds = [coupling for coupling in model.couplings if coupling.beta]
    if model.dimension != 1 or len(bonds) != model.n_sites:
        return False
    here, come_from, moved, visited = 0, -1, 0, set()
    while here not in visited:
        visited.add(here)
        onward = [number for number, bond in enumerate(bonds) if here in {bond.start, bond.end} and number != come_from]
        degree = sum((bond.start == here) + (bond.end == here) for bond in bonds)
        if degree != 2 or not onward:
            return False
        come_from = onward[0]
        bond = bonds[come_from]
        forward = bond.start == here
        moved += bond.cell[0] if forward else -bond.cell[0]
        here = bond.end if forward else bond.start
    return len(visited) == model.n_sites and abs(moved) == 1
