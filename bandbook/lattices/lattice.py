"""What a named lattice is, and the fields that several lattices share."""

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from bandbook.model import Model, Vector
from bandbook.parameters import Field

SQRT3 = math.sqrt(3.0)

#: The largest energy and length that are taken for meant, eV and Å.
MOST = 1e6


def energy(name: str, meaning: str, **more: Any) -> Field:
    """Return the field of an energy in eV."""
    return Field(name, "number", meaning, "eV", least=-MOST, most=MOST, **more)


def length(name: str, meaning: str, default: float | None) -> Field:
    """Return the field of a length in Å."""
    return Field(name, "number", meaning, "Å", default, least=0.01, most=MOST)


ALPHA = energy("alpha", "Coulomb integral of every site", default=0.0)
ALPHA_A = energy("alpha_a", "Coulomb integral of A (default: alpha)", default=None)
ALPHA_B = energy("alpha_b", "Coulomb integral of B (default: alpha)", default=None)
#: Where the sublattices may have their own.
ALPHA_REST = energy("alpha", "Coulomb integral of a site without its own, and the origin of x", default=0.0)
BETA = energy("beta", "resonance integral between neighbours", nonzero=True)
BETA_INSIDE = energy("beta_inside", "resonance integral of the bond inside the cell, A–B")
BETA_BETWEEN = energy("beta_between", "resonance integral of the bond to the next cell, B–A")
PERIOD = length("period", "repeat of the cell", None)
BOND_LENGTH = length("bond_length", "distance of neighbours", 1.42)


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
