"""Polyacene: E(k) = α ± (β/2)(1 ± √(9 + 8 cos k))."""

from bandbook.lattices.lattice import ALPHA, BETA, PERIOD, SQRT3, Lattice, along_x
from bandbook.model import Coupling, Model, Site


def polyacene(*, beta: float, alpha: float = 0.0, period: float | None = None) -> Model:
    """Return linear fused hexagons, four sites a cell: A1–B1 the bonded fusion atoms, then A2, B2.

    E(k) = α ± (β/2)(1 ± √(9 + 8 cos k)); valence and conduction band touch at k = π/a.

    Args:
        beta: Resonance integral of every bond, eV.
        alpha: Coulomb integral, eV.
        period: Repeat of the cell, Å, or ``None``; the drawn bond is period/√3.

    Source: kivelson1983.

    >>> len(polyacene(beta=-2.5).couplings)
    5
    """
    bond = 0.0 if period is None else period / SQRT3
    half = 0.0 if period is None else period / 2
    spots = ((0.0, bond / 2, 0.0), (0.0, -bond / 2, 0.0), (half, bond, 0.0), (half, -bond, 0.0))
    names = ("A1", "B1", "A2", "B2")
    sites = tuple(Site(name, alpha, None if period is None else spot) for name, spot in zip(names, spots, strict=True))
    home = tuple(Coupling(start, end, beta, (0,)) for start, end in ((0, 1), (0, 2), (1, 3)))
    onward = tuple(Coupling(start, end, beta, (1,)) for start, end in ((2, 0), (3, 1)))
    return Model(sites, home + onward, dimension=1, vectors=along_x(period), beta_unit=beta, alpha_unit=alpha)


POLYACENE = Lattice(
    "polyacene",
    "linear fused hexagons, four sites a cell",
    1,
    "A1, B1 the bonded fusion atoms; A2, B2 the CH atoms after them",
    (BETA, ALPHA, PERIOD),
    polyacene,
    note='Whole cells are no acene: n cells with add = ["A1", "B1"] are [n]acene.',
)
