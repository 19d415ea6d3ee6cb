"""The ring, a molecule: x_j = 2 cos(2πj/N)."""

import math

from bandbook.lattices.lattice import ALPHA, BETA, Lattice
from bandbook.model import Coupling, Model, Site
from bandbook.parameters import Field

SITES = Field("sites", "integer", "number of sites of the ring", least=3, most=100_000)


def ring(*, beta: float, sites: int, alpha: float = 0.0) -> Model:
    """Return a ring as a molecule, sites on a regular polygon of side 1.40 Å.

    x_j = 2 cos(2πj/N), j = 0, ±1, …

    Args:
        beta: Resonance integral, eV.
        sites: Number of sites, 3 or more.
        alpha: Coulomb integral, eV.

    Source: hueckel1931.

    >>> ring(beta=-2.5, sites=6).n_sites
    6
    """
    radius = 1.40 / (2 * math.sin(math.pi / sites))
    turn = 2 * math.pi / sites
    atoms = tuple(
        Site(f"A{number + 1}", alpha, (radius * math.cos(turn * number), radius * math.sin(turn * number), 0.0))
        for number in range(sites)
    )
    bonds = tuple(Coupling(number, (number + 1) % sites, beta) for number in range(sites))
    return Model(atoms, bonds, beta_unit=beta, alpha_unit=alpha)


RING = Lattice(
    "ring",
    "ring of sites, a molecule",
    0,
    "A1, A2, … around the ring",
    (BETA, SITES, ALPHA),
    ring,
    note='A molecule has no k; for k labels take the chain with ends = "ring".',
)
