"""The zigzag ribbon of the honeycomb sheet: gapless, with edge states for 2π/3 < |k| ≤ π."""

from collections.abc import Iterator

from bandbook.lattices.lattice import ALPHA, BETA, BOND_LENGTH, SQRT3, Lattice
from bandbook.model import Coupling, Model, Site, Vector
from bandbook.parameters import Field

LINES = Field("lines", "integer", "number of zigzag lines", least=1, most=2000)


def zigzag_ribbon(*, beta: float, lines: int, bond_length: float = 1.42, alpha: float = 0.0) -> Model:
    """Return the ribbon with zigzag edges, two sites a zigzag line and cell.

    At k = π/a: 0 (twice) and ±β (N − 1 times each); at k = 2π/(3a) the smallest |E| is 2|β| sin(π/(2(2N+1))).

    Args:
        beta: Resonance integral, eV.
        lines: Number N of zigzag lines.
        bond_length: Distance of neighbours, Å; the repeat is √3 times as long.
        alpha: Coulomb integral, eV.

    Source: nakada1996.

    >>> zigzag_ribbon(beta=-2.7, lines=4).n_sites
    8
    """
    sites = tuple(Site(name, alpha, at) for name, at in _sites(lines, bond_length))
    return Model(
        sites,
        tuple(_bonds(lines, beta)),
        dimension=1,
        vectors=((SQRT3 * bond_length, 0.0, 0.0),),
        beta_unit=beta,
        alpha_unit=alpha,
    )


def _sites(lines: int, bond: float) -> Iterator[tuple[str, Vector]]:
    half = SQRT3 / 2 * bond
    for line in range(1, lines + 1):
        height = 1.5 * (line - 1) * bond
        here, there = (0.0, half) if line % 2 else (half, 0.0)
        yield f"A{line}", (here, height, 0.0)
        yield f"B{line}", (there, height + bond / 2, 0.0)


def _bonds(lines: int, beta: float) -> Iterator[Coupling]:
    for line in range(lines):
        a, b = 2 * line, 2 * line + 1
        yield Coupling(a, b, beta, (0,))
        yield Coupling(b, a, beta, (1,)) if line % 2 == 0 else Coupling(a, b, beta, (1,))
        if line + 1 < lines:
            yield Coupling(b, a + 2, beta, (0,))


ZIGZAG_RIBBON = Lattice(
    "zigzag-ribbon",
    "ribbon of the honeycomb sheet with zigzag edges",
    1,
    "A1, B1, A2, B2, … line by line across the ribbon",
    (BETA, LINES, BOND_LENGTH, ALPHA),
    zigzag_ribbon,
    note="Cut at whole cells, a ribbon of N lines has two one-coordinated corner sites. N even: A1 and BN of the first"
    ' cell; with N = 4, drop = ["A1", "B4"] leaves none. N odd: A1 of the first cell and BN of the last; with N = 3 and'
    ' 6 cells, drop = ["A1"] and changes = [{ cell = 5, site = "B3", remove = true }] leave none.',
)
