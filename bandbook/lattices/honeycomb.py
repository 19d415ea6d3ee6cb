"""The honeycomb sheet: E(k) = α ± |β| |1 + e^{ik₁} + e^{ik₂}|."""

from bandbook.lattices.lattice import ALPHA_A, ALPHA_B, ALPHA_REST, BETA, BOND_LENGTH, SQRT3, Lattice
from bandbook.model import Coupling, Model, Site


def honeycomb(
    *,
    beta: float,
    bond_length: float = 1.42,
    alpha: float = 0.0,
    alpha_a: float | None = None,
    alpha_b: float | None = None,
) -> Model:
    """Return the honeycomb sheet, two sites a cell, lattice vectors at 60°.

    E(k) = ᾱ ± √(h² + β²|1 + e^{ik₁} + e^{ik₂}|²), h = (α_A − α_B)/2: ±3β at Γ, ±β at M, ±h at K.

    Args:
        beta: Resonance integral, eV.
        bond_length: Distance of neighbours, Å; the repeat is √3 times as long.
        alpha: Coulomb integral of a site without its own, and the origin of x, eV.
        alpha_a: Coulomb integral of A, eV.
        alpha_b: Coulomb integral of B, eV.

    Source: wallace1947.

    >>> round(honeycomb(beta=-2.7).vectors[0][0], 4)
    2.4595
    """
    repeat = SQRT3 * bond_length
    vectors = ((repeat, 0.0, 0.0), (repeat / 2, repeat * SQRT3 / 2, 0.0))
    sites = (
        Site("A", alpha if alpha_a is None else alpha_a, (0.0, 0.0, 0.0)),
        Site("B", alpha if alpha_b is None else alpha_b, (repeat / 2, bond_length / 2, 0.0)),
    )
    bonds = tuple(Coupling(0, 1, beta, cell) for cell in ((0, 0), (-1, 0), (0, -1)))
    return Model(sites, bonds, dimension=2, vectors=vectors, beta_unit=beta, alpha_unit=alpha)


HONEYCOMB = Lattice(
    "honeycomb",
    "honeycomb sheet, two sites a cell",
    2,
    "A, B the two sublattices",
    (BETA, BOND_LENGTH, ALPHA_REST, ALPHA_A, ALPHA_B),
    honeycomb,
)
