"""What a named lattice is, and the fields that several lattices share."""

import math
from collections.abc import Callable
from dataclasses import dataclass

from bandbook.model import Model, Vector
from bandbook.parameters import Field

SQRT3 = math.sqrt(3.0)

ALPHA = Field("alpha", "number", "Coulomb integral of every site", unit="eV", default=0.0)
BETA = Field("beta", "number", "resonance integral between neighbours", unit="eV", nonzero=True)
PERIOD = Field("period", "number", "repeat of the cell", unit="Å", default=None, above=0.0)
BOND_LENGTH = Field("bond_length", "number", "distance of neighbours", unit="Å", default=1.42, above=0.0)


@dataclass(frozen=True)
class Lattice:
    """A named lattice.

    Attributes:
        name: The word after ``lattice =``.
        meaning: One line without a full stop.
        dimension: Number of lattice vectors; 0 for a molecule.
        sites: How its sites are named, for the manual.
        fields: What an author may give; the names are the builder's arguments.
        build: The builder; takes every field by keyword and returns a Model.
        note: What else a reader must know, for the manual.
    """

    name: str
    meaning: str
    dimension: int
    sites: str
    fields: tuple[Field, ...]
    build: Callable[..., Model]
    note: str = ""


def along_x(period: float | None) -> tuple[Vector, ...] | None:
    """Return one lattice vector along x, or ``None`` where the repeat is unknown."""
    return None if period is None else ((period, 0.0, 0.0),)
