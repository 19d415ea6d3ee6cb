"""The armchair ribbon of the honeycomb sheet: gap 2|β| min_p |1 + 2 cos(pπ/(N+1))|, N dimer lines."""

from collections.abc import Iterator

from bandbook.lattices.lattice import ALPHA, BETA, BOND_LENGTH, SQRT3, Lattice
from bandbook.model import Coupling, Model, Site, Vector
from bandbook.parameters import Field

LINES = Field("lines", "integer", "number of dimer lines", least=2, most=2000)


def armchair_ribbon(*, beta: float, lines: int, bond_length: float = 1.42, alpha: float = 0.0) -> Model:
    """Return the ribbon with armchair edges, two sites a dimer line and cell.

    Gap 2|β| min_p |1 + 2 cos(pπ/(N+1))| at k = 0; zero when N = 3p + 2. The cell boundary crosses the dimers of the
    even lines only, so that an odd ribbon cut at whole cells has no one-coordinated site; an even one has one at each
    end, on its last line.

    Args:
        beta: Resonance integral, eV.
        lines: Number N of dimer lines.
        bond_length: Distance of neighbours, Å; the repeat is 3 times as long.
        alpha: Coulomb integral, eV.

    Source: son2006.

    >>> armchair_ribbon(beta=-2.7, lines=7).n_sites
    14
    """
    sites = tuple(Site(name, alpha, at) for name, at in _sites(lines, bond_length))
    return Model(
        sites,
        tuple(_bonds(lines, beta)),
        dimension=1,
        vectors=((3 * bond_length, 0.0, 0.0),),
        beta_unit=beta,
        alpha_unit=alpha,
    )


def _sites(lines: int, bond: float) -> Iterator[tuple[str, Vector]]:
    """Yield A and B of each line: the A of an even line stands at the far end of the cell, its B at the near end."""
    for line in range(1, lines + 1):
        spots = (0.5, 1.5) if line % 2 else (2.0, 0.0)
        for letter, spot in zip("AB", spots, strict=True):
            yield f"{letter}{line}", (spot * bond, (line - 1) * SQRT3 / 2 * bond, 0.0)


def _bonds(lines: int, beta: float) -> Iterator[Coupling]:
    for line in range(lines):
        a, b = 2 * line, 2 * line + 1
        yield Coupling(a, b, beta, (line % 2,))
        if line + 1 < lines:
            yield Coupling(a, b + 2, beta, (0,))
            yield Coupling(b, a + 2, beta, (0,))


ARMCHAIR_RIBBON = Lattice(
    "armchair-ribbon",
    "ribbon of the honeycomb sheet with armchair edges",
    1,
    "A1, B1, A2, B2, … line by line across the ribbon",
    (BETA, LINES, BOND_LENGTH, ALPHA),
    armchair_ribbon,
    note="Cut at whole cells, a ribbon of an odd number of lines has no one-coordinated site; an even one has BN of the"
    ' first and AN of the last cell. With N = 4 lines and 6 cells, drop = ["B4"] and'
    ' changes = [{ cell = 5, site = "A4", remove = true }] leave none.',
)
