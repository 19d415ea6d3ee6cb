"""The alternating chain: E(k) = α ± √(β₁² + β₂² + 2β₁β₂ cos k)."""

from bandbook.lattices.diatomic_chain import diatomic_chain
from bandbook.lattices.lattice import ALPHA, BETA_BETWEEN, BETA_INSIDE, PERIOD, Lattice
from bandbook.model import Model


def alternating_chain(
    *, beta_inside: float, beta_between: float, alpha: float = 0.0, period: float | None = None
) -> Model:
    """Return the chain of alternating bonds, two sites a cell, drawn as a zigzag of 120°.

    E(k) = α ± √(β₁² + β₂² + 2β₁β₂ cos k); gap 2||β₁| − |β₂|| at k = π/a. An open piece of whole cells starts and ends
    with the bond inside.

    Args:
        beta_inside: Resonance integral A–B, eV.
        beta_between: Resonance integral B–A of the next cell, eV.
        alpha: Coulomb integral, eV.
        period: Repeat of the cell (two bonds), Å, or ``None``.

    Source: lennardjones1937.

    >>> [coupling.cell for coupling in alternating_chain(beta_inside=-2.85, beta_between=-2.15).couplings]
    [(0,), (1,)]
    """
    return diatomic_chain(
        beta_inside=beta_inside, beta_between=beta_between, alpha_a=alpha, alpha_b=alpha, alpha=alpha, period=period
    )


ALTERNATING_CHAIN = Lattice(
    "alternating-chain",
    "chain of alternating bonds, two sites a cell",
    1,
    "A, B along the chain",
    (BETA_INSIDE, BETA_BETWEEN, ALPHA, PERIOD),
    alternating_chain,
    note="An open piece starts and ends with the bond inside; exchange the two integrals for the other termination.",
)
