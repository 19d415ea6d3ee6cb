"""Molecules as edge lists, atoms numbered from 0, and what the solver says of them in units of β: β = −1 eV, α = 0.

x = (E − α)/β is positive when bonding and given in falling order, as tables have it.
"""

from collections.abc import Mapping
from typing import Final

import networkx as nx
import numpy as np
from numpy.typing import NDArray

from bandbook.model import Coupling, Model, Site
from bandbook.solver import Levels, Piece, cut_piece, solve_levels

Edges = list[tuple[int, int]]
Reals = NDArray[np.float64]


def chain(n: int) -> Edges:
    return [(i, i + 1) for i in range(n - 1)]


def ring(n: int, first: int = 0) -> Edges:
    return [(first + i, first + (i + 1) % n) for i in range(n)]


def acene(n_rings: int) -> Edges:
    """Return [n]acene: the perimeter and the bonds across it."""
    size = 4 * n_rings + 2
    return [*ring(size), *[(2 * i + 1, size - 2 * i) for i in range(1, n_rings)]]


def truncated_icosahedron() -> Edges:
    """Return C60: an atom for each directed edge of the icosahedron, numbered; first its 30 bonds between hexagons."""
    solid = nx.icosahedral_graph()
    atoms = [(u, v) for u in sorted(solid) for v in sorted(solid[u])]
    number = {atom: index for index, atom in enumerate(atoms)}
    between = [(number[u, v], number[v, u]) for u, v in atoms if u < v]
    around = [
        (number[u, v], number[u, w]) for u, v in atoms for w in sorted(solid[u]) if w > v and solid.has_edge(v, w)
    ]
    return between + around


#: Benzenoids: their numbers of Kekulé structures.
KEKULE: Final[Mapping[str, int]] = {"benzene": 2, "naphthalene": 3, "anthracene": 4, "phenanthrene": 5, "pyrene": 6}
#: Molecules with an even number of rings of odd size or none: alternant.
ALTERNANT: Final = (
    "benzene", "naphthalene", "anthracene", "tetracene", "phenanthrene", "pyrene", "styrene", "biphenyl", "biphenylene",
    "stilbene", "trimethylenemethane", "benzyl", "o-xylylene", "p-xylylene",
)  # fmt: skip
MOLECULES: Final[Mapping[str, Edges]] = {
    "ethylene": chain(2),
    "allyl": chain(3),
    "butadiene": chain(4),
    "pentadienyl": chain(5),
    "hexatriene": chain(6),
    "heptatrienyl": chain(7),
    "octatetraene": chain(8),
    "decapentaene": chain(10),
    "cyclopropenyl": ring(3),
    "cyclobutadiene": ring(4),
    "cyclopentadienyl": ring(5),
    "benzene": ring(6),
    "tropylium": ring(7),
    "cyclooctatetraene": ring(8),
    "[10]annulene": ring(10),
    "naphthalene": acene(2),
    "anthracene": acene(3),
    "tetracene": acene(4),
    "phenanthrene": [*ring(14), (3, 12), (6, 11)],
    "pyrene": [*ring(14), (2, 14), (5, 15), (9, 15), (12, 14), (14, 15)],
    "styrene": [*ring(6), (0, 6), (6, 7)],
    "biphenyl": [*ring(6), *ring(6, 6), (0, 6)],
    "biphenylene": [*ring(6), *ring(6, 6), (0, 6), (1, 7)],
    "stilbene": [*ring(6), (0, 6), (6, 7), (7, 8), *ring(6, 8)],
    "azulene": [*ring(10), (3, 9)],
    "fulvene": [*ring(5), (0, 5)],
    "trimethylenemethane": [(0, 1), (0, 2), (0, 3)],
    "benzyl": [*ring(6), (0, 6)],
    "methylenecyclopropene": [*ring(3), (0, 3)],
    "o-xylylene": [*ring(6), (0, 6), (1, 7)],
    "p-xylylene": [*ring(6), (0, 6), (3, 7)],
    "C60": truncated_icosahedron(),
}


def model(
    edges: Edges,
    *,
    h: Mapping[int, float] | None = None,
    k: Mapping[tuple[int, int], float] | None = None,
    electrons: int | None = None,
    overlap: float = 0.0,
) -> Model:
    """Return a molecule.

    Args:
        edges: Its bonds.
        h: Atom → h, where it is not 0: α_X = α + hβ.
        k: Bond → k, where it is not 1: β_XY = kβ.
        electrons: Its electrons; one an atom where none are given.
        overlap: Of every bond.
    """
    n_sites = max(max(edge) for edge in edges) + 1
    sites = tuple(Site(f"C{number + 1}", -(h or {}).get(number, 0.0)) for number in range(n_sites))
    bonds = tuple(Coupling(a, b, -(k or {}).get((a, b), 1.0), overlap=overlap) for a, b in edges)
    return Model(sites, bonds, electrons=electrons, beta_unit=-1.0)


def piece(molecule: str | Edges | Model, charge: int = 0) -> Piece:
    if isinstance(molecule, Model):
        return cut_piece(molecule)
    edges = MOLECULES[molecule] if isinstance(molecule, str) else molecule
    n_sites = max(max(edge) for edge in edges) + 1
    return cut_piece(model(edges, electrons=n_sites - charge))


def levels(molecule: str | Edges | Model, charge: int = 0) -> Levels:
    return solve_levels(piece(molecule, charge))


def x_of(molecule: str | Edges | Model) -> Reals:
    """Return x, falling."""
    return np.asarray(-levels(molecule).energy)


def energy_of(molecule: str | Edges | Model, charge: int = 0) -> float:
    """Return Eπ in β."""
    found = levels(molecule, charge).pi_energy
    assert found is not None
    return -found


def homo_of(molecule: str | Edges | Model, charge: int = 0) -> float:
    """Return x of the highest occupied level."""
    found = levels(molecule, charge).homo
    assert found is not None
    return -found


def electrons_of(molecule: str | Edges | Model, charge: int = 0) -> Reals:
    """Return the electrons of each atom."""
    cut = piece(molecule, charge)
    solved = solve_levels(cut)
    return np.asarray(cut.populations(solved.vectors) @ solved.occupation)


def without(name: str, atom: int) -> Edges:
    """Return a molecule without one of its atoms, renumbered."""
    kept = [edge for edge in MOLECULES[name] if atom not in edge]
    return [(a - (a > atom), b - (b > atom)) for a, b in kept]


def localisation(name: str, atom: int) -> float:
    """Return the cation localisation energy in β: what two electrons fewer and an atom fewer cost."""
    n_sites = max(max(edge) for edge in MOLECULES[name]) + 1
    rest = model(without(name, atom), electrons=n_sites - 2)
    return energy_of(name) - energy_of(rest)
