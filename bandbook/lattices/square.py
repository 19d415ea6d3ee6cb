"""The square lattice: E(k) = α + 2β(cos k₁ + cos k₂)."""

from bandbook.lattices.lattice import ALPHA, BETA, PERIOD, Lattice
from bandbook.model import Coupling, Model, Site


def square(*, beta: float, alpha: float = 0.0, period: float | None = None) -> Model:
    """Return the square lattice, one site a cell.

    E(k) = α + 2β(cos k₁ + cos k₂), width 8|β|.

    Args:
        beta: Resonance integral, eV.
        alpha: Coulomb integral, eV.
        period: Distance of neighbours, Å, or ``None``.

    Source: any textbook of solid-state physics.

    >>> square(beta=-1.0).dimension
    2
    """
    vectors = None if period is None else ((period, 0.0, 0.0), (0.0, period, 0.0))
    site = Site("A", alpha, None if period is None else (0.0, 0.0, 0.0))
    bonds = (Coupling(0, 0, beta, (1, 0)), Coupling(0, 0, beta, (0, 1)))
    return Model((site,), bonds, dimension=2, vectors=vectors, beta_unit=beta, alpha_unit=alpha)


SQUARE = Lattice("square", "square lattice, one site a cell", 2, "A", (BETA, ALPHA, PERIOD), square)
