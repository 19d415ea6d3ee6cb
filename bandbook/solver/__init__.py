"""Hamiltonians, levels, bands: arrays in, small result objects out.

The folder's rule: a function takes a model or a piece and keyword arguments, prints nothing, keeps nothing between
calls that could change a result, and returns energies in eV, ascending, as ``(k, state)`` or ``(state,)``, orbitals as
``(site, state)``, k in π/a. What depends on the processor (signs, degenerate bases) is settled in ``canonical`` before
anything leaves. scipy is imported where it is used.
"""

from bandbook.solver.canonical import canonical_basis, group_levels
from bandbook.solver.labels import extended_k, is_backbone, node_labels
from bandbook.solver.levels import Levels, frontier_energies, solve_levels
from bandbook.solver.parent import Places, place_on_bands
from bandbook.solver.piece import Piece, cut_piece

__all__ = [
    "Levels",
    "Piece",
    "Places",
    "canonical_basis",
    "cut_piece",
    "extended_k",
    "frontier_energies",
    "group_levels",
    "is_backbone",
    "node_labels",
    "place_on_bands",
    "solve_levels",
]
