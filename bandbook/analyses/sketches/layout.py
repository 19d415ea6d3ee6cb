"""Where the sites of a model stand in the plane: by their positions where they have any, otherwise by their bonds."""

import math
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model

Real = NDArray[np.float64]
#: How far the third direction leans to the right, and how much it is shortened.
_OBLIQUE: Final = (0.35, 0.25)
#: Decimals of a place, in bond lengths: below the width of a line.
_DECIMALS: Final = 4


@dataclass(frozen=True, eq=False)
class Layout:
    """Sites in the plane, in units of the shortest bond.

    Attributes:
        home: The sites of the home cell, ``(site, 2)``.
        vectors: The lattice vectors in the plane, ``(dimension, 2)``.
        is_measured: Whether positions gave it; otherwise only who is bonded to whom.
    """

    home: Real
    vectors: Real
    is_measured: bool

    def at(self, site: NDArray[np.intp], cell: NDArray[np.intp]) -> Real:
        """Return where sites of cells stand, ``(site, 2)``; cells are ``(site, dimension)``."""
        return self.home[site] + np.asarray(cell, dtype=np.float64).reshape(len(site), -1) @ self.vectors


def layout_of(model: Model) -> Layout:
    """Return where the sites of a model stand."""
    is_measured = all(site.at is not None for site in model.sites) and (
        model.dimension == 0 or model.vectors is not None
    )
    if is_measured and (model.n_sites > 1 or model.dimension):
        points = np.array([site.at for site in model.sites], dtype=np.float64)
        vectors = np.array(model.vectors or np.zeros((0, 3)), dtype=np.float64).reshape(-1, 3)
        home, flat = _projected(points, vectors)
    else:
        home, flat = _by_bonds(model)
    unit = _shortest(model, home, flat)
    return Layout(np.round(home / unit, _DECIMALS) + 0.0, np.round(flat / unit, _DECIMALS) + 0.0, is_measured)


def _projected(points: Real, vectors: Real) -> tuple[Real, Real]:
    """Return points and vectors in a plane: the first vector to the right, a third direction obliquely."""
    middle = points.mean(axis=0)
    first = vectors[0] if len(vectors) else _longest(points - middle)
    across = vectors[1] if len(vectors) > 1 else _widest(points - middle, first)
    frame = _frame(first, across)
    flat_points, flat_vectors = (points - points[0]) @ frame.T, vectors @ frame.T
    lean = np.array([[1.0, 0.0], [0.0, 1.0], [_OBLIQUE[0], _OBLIQUE[1]]])
    return flat_points @ lean, flat_vectors @ lean


def _frame(first: Real, across: Real) -> Real:
    one = first / np.linalg.norm(first)
    rest = across - (across @ one) * one
    if np.linalg.norm(rest) < 1e-9:
        rest = next(axis - (axis @ one) * one for axis in np.eye(3) if abs(axis @ one) < 0.9)
    two = rest / np.linalg.norm(rest)
    return np.array([one, two, np.cross(one, two)])


def _longest(points: Real) -> Real:
    """Return the direction from the first site to the one farthest from it; along x where they coincide."""
    distances = np.round(np.linalg.norm(points - points[0], axis=1), 6)
    found = points[int(np.argmax(distances))] - points[0]
    return found if np.linalg.norm(found) > 1e-9 else np.array([1.0, 0.0, 0.0])


def _widest(points: Real, first: Real) -> Real:
    """Return the offset across a direction that is largest, upward where two are alike."""
    one = first / np.linalg.norm(first)
    across = points - np.outer(points @ one, one)
    found = across[int(np.argmax(np.round(np.linalg.norm(across, axis=1), 6)))]
    if np.linalg.norm(found) < 1e-9:
        return np.array([0.0, 1.0, 0.0])
    return np.asarray(found if found[1] >= 0 else -found, dtype=np.float64)


def _by_bonds(model: Model) -> tuple[Real, Real]:
    """Return places from bonds alone: a ring on a circle, anything else by distances counted in bonds."""
    n_sites, dimension = model.n_sites, model.dimension
    inside = [(bond.start, bond.end) for bond in model.couplings if not any(bond.cell) and bond.beta]
    if dimension == 0:
        return _molecule(n_sites, inside), np.zeros((0, 2))
    if dimension == 1:
        return _chain(model, inside)
    side = max(1.0, float(n_sites) * 0.8)
    vectors = np.array([[side, 0.0], [0.0, side], [_OBLIQUE[0] * side, _OBLIQUE[1] * side]])[:dimension]
    home = np.outer(np.arange(n_sites), [0.8, 0.35 if n_sites > 1 else 0.0])
    return home, vectors


def _molecule(n_sites: int, bonds: list[tuple[int, int]]) -> Real:
    order = ring_order(n_sites, bonds)
    if order is not None:
        return on_circle(order)
    order = path_order(n_sites, bonds)
    if order is not None:
        return zigzag(order)
    return _by_distance(n_sites, bonds)


def _chain(model: Model, inside: list[tuple[int, int]]) -> tuple[Real, Real]:
    """Return the cell of a 1D crystal: a row where it is unbranched, otherwise laid out by distance."""
    n_sites = model.n_sites
    order = path_order(n_sites, inside)
    ends = {(bond.start, bond.end) for bond in model.couplings if bond.cell == (1,) and bond.beta}
    ends |= {(bond.end, bond.start) for bond in model.couplings if bond.cell == (-1,) and bond.beta}
    if order is not None and ends == {(order[0], order[-1])}:
        order = order[::-1]
    if order is not None and ends == {(order[-1], order[0])}:
        home = np.zeros((n_sites, 2))
        home[order, 0] = np.arange(n_sites)
        return home, np.array([[float(n_sites), 0.0]])
    if len(ends) == 1:
        return _turned(_by_distance(n_sites, inside), ends.pop())
    return _from_five(model)


def _turned(home: Real, link: tuple[int, int]) -> tuple[Real, Real]:
    """Return a cell turned so that its one bond to the next cell leads to the right."""
    start, end = link
    along = home[start] - home[end]
    length = float(np.linalg.norm(along))
    if length > 1e-6:
        home = home @ (np.array([[along[0], along[1]], [-along[1], along[0]]]) / length).T
    return home, np.array([[float(np.ptp(home[:, 0])) + 1.2, 0.0]])


def _from_five(model: Model) -> tuple[Real, Real]:
    """Return the middle cell of five that are laid out together, and the step to the next."""
    n_sites = model.n_sites
    bonds = [
        (cell * n_sites + bond.start, (cell + bond.cell[0]) * n_sites + bond.end)
        for cell in range(5)
        for bond in model.couplings
        if bond.beta and 0 <= cell + bond.cell[0] < 5
    ]
    places = _by_distance(5 * n_sites, bonds).reshape(5, n_sites, 2)
    step = places[3].mean(axis=0) - places[2].mean(axis=0)
    length = float(np.linalg.norm(step))
    if length < 1e-6:
        return _by_distance(n_sites, []), np.array([[float(n_sites), 0.0]])
    turn = np.array([[step[0], step[1]], [-step[1], step[0]]]) / length
    return (places[2] - places[2].mean(axis=0)) @ turn.T, np.array([[length, 0.0]])


def ring_order(n_sites: int, bonds: list[tuple[int, int]]) -> list[int] | None:
    """Return the sites once around a single ring, otherwise ``None``.

    >>> ring_order(3, [(0, 2), (2, 1), (1, 0)])
    [0, 1, 2]
    """
    near = _neighbours(n_sites, bonds)
    if n_sites < 3 or any(len(found) != 2 for found in near):
        return None
    order = [0, min(near[0])]
    while len(order) <= n_sites:
        step = [site for site in near[order[-1]] if site != order[-2]]
        if step[0] == 0:
            break
        order.append(step[0])
    return order if len(order) == n_sites else None


def path_order(n_sites: int, bonds: list[tuple[int, int]]) -> list[int] | None:
    """Return the sites along a single unbranched chain, otherwise ``None``.

    >>> path_order(3, [(2, 0), (0, 1)])
    [1, 0, 2]
    """
    near = _neighbours(n_sites, bonds)
    ends = [site for site, found in enumerate(near) if len(found) <= 1]
    if n_sites == 1:
        return [0]
    if len(ends) != 2 or any(len(found) > 2 for found in near) or len(bonds) != n_sites - 1:
        return None
    order, seen = [ends[0]], {ends[0]}
    while step := [site for site in near[order[-1]] if site not in seen]:
        order.append(step[0])
        seen.add(step[0])
    return order if len(order) == n_sites else None


def _neighbours(n_sites: int, bonds: list[tuple[int, int]]) -> list[set[int]]:
    near: list[set[int]] = [set() for _ in range(n_sites)]
    for start, end in bonds:
        near[start].add(end)
        near[end].add(start)
    return near


def on_circle(order: list[int]) -> Real:
    """Return places on a circle, the first on top, neighbours at distance 1."""
    n_sites = len(order)
    angles = math.pi / 2 - 2 * math.pi * np.arange(n_sites) / n_sites
    places = np.zeros((n_sites, 2))
    places[order] = np.stack([np.cos(angles), np.sin(angles)], axis=1) / (2 * math.sin(math.pi / n_sites))
    return places


def zigzag(order: list[int]) -> Real:
    """Return places on a zigzag line of 120°, neighbours at distance 1."""
    places = np.zeros((len(order), 2))
    steps = np.arange(len(order))
    places[order] = np.stack([steps * math.sqrt(3) / 2, (steps % 2) * 0.5], axis=1)
    return places


def _by_distance(n_sites: int, bonds: list[tuple[int, int]]) -> Real:
    """Return places whose distances are about the number of bonds between sites (classical scaling).

    A little is added to each distance by number, so that symmetric molecules have one layout on every machine.
    """
    if n_sites == 1:
        return np.zeros((1, 2))
    distances = np.where(np.eye(n_sites, dtype=bool), 0.0, np.inf)
    for start, end in bonds:
        distances[start, end] = distances[end, start] = 1.0
    for middle in range(n_sites):
        distances = np.minimum(distances, distances[:, middle, None] + distances[None, middle, :])
    distances[~np.isfinite(distances)] = max(2.0, float(distances[np.isfinite(distances)].max()) + 1)
    number = np.arange(n_sites)
    distances = distances * (1 + 0.02 * np.add.outer(number, number) / n_sites)
    np.fill_diagonal(distances, 0.0)
    centre = np.eye(n_sites) - 1 / n_sites
    energy, vectors = np.linalg.eigh(-0.5 * centre @ distances**2 @ centre)
    places = vectors[:, [-1, -2]] * np.sqrt(np.maximum(energy[[-1, -2]], 0.0))
    signs = np.sign(np.round(places[np.argmax(np.abs(np.round(places, 6)), axis=0), [0, 1]], 6))
    return np.asarray(places * np.where(signs == 0, 1.0, signs), dtype=np.float64)


def _shortest(model: Model, home: Real, vectors: Real) -> float:
    """Return the length of the shortest drawn bond; 1 where there is none."""
    lengths = [
        float(np.linalg.norm(home[bond.end] + np.array(bond.cell, dtype=float) @ vectors - home[bond.start]))
        if model.dimension
        else float(np.linalg.norm(home[bond.end] - home[bond.start]))
        for bond in model.couplings
        if bond.beta
    ]
    found = [length for length in lengths if length > 1e-6]
    return min(found) if found else 1.0
