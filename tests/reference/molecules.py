"""Molecules as edge lists, atoms numbered from 0, and the levels x = (E − α)/β that the solver gives them."""

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Coupling, Model, Site
from bandbook.solver import Levels, cut_piece, solve_levels

Edges = list[tuple[int, int]]


def chain(n: int) -> Edges:
    return [(i, i + 1) for i in range(n - 1)]


def ring(n: int) -> Edges:
    return [(i, (i + 1) % n) for i in range(n)]


MOLECULES: dict[str, Edges] = {
    "naphthalene": [*ring(10), (4, 9)],
    "anthracene": [*ring(14), (3, 12), (5, 10)],
    "azulene": [*ring(10), (3, 9)],
    "fulvene": [*ring(5), (0, 5)],
    "styrene": [*ring(6), (0, 6), (6, 7)],
    "biphenyl": [*ring(6), *[(a + 6, b + 6) for a, b in ring(6)], (0, 6)],
    "benzyl": [*ring(6), (0, 6)],
    "trimethylenemethane": [(0, 1), (0, 2), (0, 3)],
    "methylenecyclopropene": [*ring(3), (0, 3)],
    "p-xylylene": [*ring(6), (0, 6), (3, 7)],
    "o-xylylene": [*ring(6), (0, 6), (1, 7)],
    "phenanthrene": [*ring(6), (0, 6), (6, 7), (7, 8), (8, 9), (9, 1), (8, 10), (10, 11), (11, 12), (12, 13), (13, 9)],
}


def model(edges: Edges, *, charge: int = 0) -> Model:
    n_sites = max(max(edge) for edge in edges) + 1
    sites = tuple(Site(f"C{number + 1}") for number in range(n_sites))
    bonds = tuple(Coupling(a, b, -1.0) for a, b in edges)
    return Model(sites, bonds, electrons=n_sites - charge, beta_unit=-1.0)


def levels(edges: Edges, *, charge: int = 0) -> Levels:
    return solve_levels(cut_piece(model(edges, charge=charge), cells=None))


def x_of(edges: Edges) -> NDArray[np.float64]:
    """Return x, descending: with β = −1 eV it is −E."""
    return np.asarray(-levels(edges).energy)
