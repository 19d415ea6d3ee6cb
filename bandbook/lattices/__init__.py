"""Named lattices, from fields to a Model.

The folder's rule: one file a builder, its function named like the lattice, its fields the function's arguments, one
line in :data:`LATTICES`. A lattice knows nothing of the solver.
"""

from bandbook.lattices.alternating_chain import ALTERNATING_CHAIN, alternating_chain
from bandbook.lattices.armchair_ribbon import ARMCHAIR_RIBBON, armchair_ribbon
from bandbook.lattices.chain import CHAIN, chain
from bandbook.lattices.diatomic_chain import DIATOMIC_CHAIN, diatomic_chain
from bandbook.lattices.honeycomb import HONEYCOMB, honeycomb
from bandbook.lattices.lattice import Lattice
from bandbook.lattices.polyacene import POLYACENE, polyacene
from bandbook.lattices.ring import RING, ring
from bandbook.lattices.square import SQUARE, square
from bandbook.lattices.zigzag_ribbon import ZIGZAG_RIBBON, zigzag_ribbon

#: Every named lattice, in the order of the manual.
LATTICES: tuple[Lattice, ...] = (
    CHAIN,
    RING,
    ALTERNATING_CHAIN,
    DIATOMIC_CHAIN,
    POLYACENE,
    ARMCHAIR_RIBBON,
    ZIGZAG_RIBBON,
    HONEYCOMB,
    SQUARE,
)

__all__ = [
    "LATTICES",
    "Lattice",
    "alternating_chain",
    "armchair_ribbon",
    "chain",
    "diatomic_chain",
    "honeycomb",
    "polyacene",
    "ring",
    "square",
    "zigzag_ribbon",
]
