"""The uniform chain: E(k) = α + 2β cos k."""

from bandbook.lattices.lattice import ALPHA, BETA, PERIOD, Lattice, along_x
from bandbook.model import Coupling, Model, Site


def chain(*, beta: float, alpha: float = 0.0, period: float | None = None) -> Model:
    """Return the uniform chain, one site a cell.

    E(k) = α + 2β cos k, width 4|β|.

    Args:
        beta: Resonance integral, eV.
        alpha: Coulomb integral, eV.
        period: Distance of neighbours, Å, or ``None``.

    Source: coulson1938.

    >>> chain(beta=-2.5).n_sites
    1
    """
    at = None if period is None else (0.0, 0.0, 0.0)
    return Model(
        (Site("A", alpha, at),),
        (Coupling(0, 0, beta, (1,)),),
        dimension=1,
        vectors=along_x(period),
        beta_unit=beta,
        alpha_unit=alpha,
    )


CHAIN = Lattice("chain", "uniform chain, one site a cell", 1, "A", (BETA, ALPHA, PERIOD), chain)
