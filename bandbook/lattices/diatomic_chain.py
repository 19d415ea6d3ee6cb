"""The diatomic chain: E(k) = ᾱ ± √(h² + β₁² + β₂² + 2β₁β₂ cos k), h = (α_A − α_B)/2."""

from bandbook.lattices.lattice import (
    ALPHA_A,
    ALPHA_B,
    ALPHA_REST,
    BETA_BETWEEN,
    BETA_INSIDE,
    PERIOD,
    SQRT3,
    Lattice,
    along_x,
)
from bandbook.model import Coupling, Model, Site


def diatomic_chain(
    *,
    beta_inside: float,
    beta_between: float,
    alpha_a: float | None = None,
    alpha_b: float | None = None,
    alpha: float = 0.0,
    period: float | None = None,
) -> Model:
    """Return the chain of two kinds of site and two kinds of bond.

    E(k) = ᾱ ± √(h² + β₁² + β₂² + 2β₁β₂ cos k), h = (α_A − α_B)/2; gap 2√(h² + (|β₁| − |β₂|)²).

    Args:
        beta_inside: Resonance integral A–B, eV.
        beta_between: Resonance integral B–A of the next cell, eV.
        alpha_a: Coulomb integral of A, eV.
        alpha_b: Coulomb integral of B, eV.
        alpha: Coulomb integral of a site without its own, and the origin of x, eV.
        period: Repeat of the cell, Å, or ``None``.

    Source: ricemele1982.

    >>> [s.alpha for s in diatomic_chain(beta_inside=-2.0, beta_between=-2.0, alpha_a=0.5, alpha_b=-0.5).sites]
    [0.5, -0.5]
    """
    here = None if period is None else (0.0, 0.0, 0.0)
    there = None if period is None else (period / 2, period / (2 * SQRT3), 0.0)
    sites = (
        Site("A", alpha if alpha_a is None else alpha_a, here),
        Site("B", alpha if alpha_b is None else alpha_b, there),
    )
    bonds = (Coupling(0, 1, beta_inside, (0,)), Coupling(1, 0, beta_between, (1,)))
    return Model(sites, bonds, dimension=1, vectors=along_x(period), alpha_unit=alpha)


DIATOMIC_CHAIN = Lattice(
    "diatomic-chain",
    "chain of two kinds of site and of bond",
    1,
    "A, B along the chain",
    (BETA_INSIDE, BETA_BETWEEN, ALPHA_A, ALPHA_B, ALPHA_REST, PERIOD),
    diatomic_chain,
    note="An open piece starts and ends with the bond inside.",
)
