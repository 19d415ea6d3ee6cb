"""Named points and paths of the zone, and extremes of a function of k searched in the whole of it."""

import itertools
from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model

Real = NDArray[np.float64]
Function = Callable[[Real], Real]

#: Points of the whole-zone mesh along each lattice vector, by dimension; multiples of 6, so that K is among them.
MESH: Final = {1: 600, 2: 60, 3: 18}
#: Valleys of the mesh from which a refinement starts at most.
STARTS: Final = 12
#: Rounds of refinement, each with 7 points along each vector, and by how much each shrinks the neighbourhood.
ROUNDS: Final = 30
SHRINK: Final = 0.45
#: Values closer than this part of the range are equal when a place is chosen.
TIE: Final = 1e-11


@dataclass(frozen=True)
class Path:
    """A path through the zone.

    Attributes:
        names: Names of its corners, such as ``"Gamma"``.
        corners: Their k, π/a, ``(corner, dimension)``.
        k: Points along it, π/a, ``(point, dimension)``.
        distance: Length along it, ``(point,)``; Å⁻¹ where the lattice vectors are known, otherwise π/a.
        at: Index of each corner among the points.
    """

    names: tuple[str, ...]
    corners: Real
    k: Real
    distance: Real
    at: tuple[int, ...]


def named_points(model: Model) -> dict[str, tuple[float, ...]]:
    """Return the named points of the zone, π/a along each lattice vector."""
    if model.points:
        return dict(model.points)
    if model.dimension == 1:
        return {"Gamma": (0.0,), "X": (1.0,)}
    if model.dimension == 2:
        return _plane_points(model)
    return {"Gamma": (0.0, 0.0, 0.0), "X": (1.0, 0.0, 0.0), "M": (1.0, 1.0, 0.0), "R": (1.0, 1.0, 1.0)}


def favoured_places(model: Model) -> Real:
    """Return the named points and those with k = −k, π/a, ``(place, dimension)``: extremes are told there first.

    >>> from bandbook.model import Site
    >>> favoured_places(Model((Site("A"),), (), dimension=1)).tolist()
    [[0.0], [1.0]]
    """
    still = itertools.product((0.0, 1.0), repeat=model.dimension)
    return np.array(list(dict.fromkeys([*named_points(model).values(), *still])))


def _plane_points(model: Model) -> dict[str, tuple[float, ...]]:
    """Return Γ, K, M of a hexagonal plane (vectors at 60° or 120°), otherwise Γ, X, M, and Y where it differs."""
    if model.vectors is None:
        return {"Gamma": (0.0, 0.0), "X": (1.0, 0.0), "M": (1.0, 1.0)}
    one, two = (np.array(vector) for vector in model.vectors)
    lengths = float(np.linalg.norm(one)), float(np.linalg.norm(two))
    cosine = float(one @ two) / (lengths[0] * lengths[1])
    is_even = abs(lengths[0] - lengths[1]) < 1e-6 * lengths[0]
    if is_even and abs(abs(cosine) - 0.5) < 1e-6:
        return {"Gamma": (0.0, 0.0), "K": (2 / 3, -2 / 3 if cosine > 0 else 2 / 3), "M": (1.0, 0.0)}
    points: dict[str, tuple[float, ...]] = {"Gamma": (0.0, 0.0), "X": (1.0, 0.0), "M": (1.0, 1.0)}
    return points if is_even and abs(cosine) < 1e-6 else {**points, "Y": (0.0, 1.0)}


def path_of(model: Model, n_points: int = 240) -> Path:
    """Return the usual path: Γ–X in 1D; through the named points and back to Γ in 2D and 3D."""
    points = named_points(model)
    names = tuple(points) if model.dimension == 1 else (*points, "Gamma")
    corners = np.array([points[name] for name in names], dtype=np.float64)
    lengths = np.array([_length(model, step) for step in np.diff(corners, axis=0)])
    counts = np.maximum(8, np.round(n_points * lengths / lengths.sum()).astype(int))
    pieces, distances, at, reached = [corners[:1]], [np.zeros(1)], [0], 0.0
    for start, end, length, count in zip(corners[:-1], corners[1:], lengths, counts, strict=True):
        part = np.arange(1, count + 1)[:, None] / count
        pieces.append(start + part * (end - start))
        distances.append(reached + part[:, 0] * length)
        reached += float(length)
        at.append(at[-1] + int(count))
    return Path(names, corners, np.concatenate(pieces), np.concatenate(distances), tuple(at))


def _length(model: Model, step: Real) -> float:
    """Return the length of a step in k, Å⁻¹ where the lattice vectors are known, otherwise in π/a."""
    if model.vectors is None:
        return float(np.linalg.norm(step))
    vectors = np.array(model.vectors)
    return float(np.linalg.norm(np.linalg.pinv(vectors) @ (np.pi * step)))


def zone_mesh(model: Model, n_each: int | None = None) -> Real:
    """Return an even mesh of the whole zone, Γ and its edges among the points, π/a, ``(point, dimension)``."""
    n_each = n_each or MESH[model.dimension]
    axis = -1.0 + 2.0 * np.arange(1, n_each + 1) / n_each
    if model.dimension == 1:
        return np.linspace(0.0, 1.0, n_each + 1)[:, None]  # E(−k) = E(k)
    return np.stack(np.meshgrid(*[axis] * model.dimension, indexing="ij"), axis=-1).reshape(-1, model.dimension)


def lowest(function: Function, mesh: Real, values: Real, *, favoured: Real | None = None) -> tuple[float, Real]:
    """Return the least value of a function of k and where it is, searched in the whole zone.

    Every valley of the mesh that could hold the least value is refined by ever smaller neighbourhoods, which finds
    smooth minima and cone points alike. Among equal places a favoured one is taken, the first; otherwise the one with
    the largest first coordinate, then the largest second, so that k does not hang on the last bits.

    Args:
        function: k ``(n, dimension)`` → values ``(n,)``.
        mesh: An even mesh of the whole zone as :func:`zone_mesh` makes it, π/a.
        values: The function there.
        favoured: Places that are taken when the function is as low there, π/a, ``(place, dimension)``.
    """
    spacing = float(mesh[-1, -1] - mesh[-2, -1])
    grid = values.reshape([round(len(mesh) ** (1 / mesh.shape[1]))] * mesh.shape[1])
    found = [_refined(function, mesh[start], spacing) for start in _valleys(grid, is_periodic=mesh.shape[1] > 1)]
    least = min(value for value, _ in found)
    near = least + TIE * max(float(np.ptp(values)), 1e-3)
    if favoured is not None and len(favoured):
        there = function(favoured)
        equal = np.flatnonzero(there <= near)
        if len(equal):
            return float(there[equal[0]]), favoured[equal[0]]
    return least, max((k for value, k in found if value <= near), key=_place)


def _place(k: Real) -> tuple[float, ...]:
    return tuple(float(part) for part in np.round(k, 6) + 0.0)


def _valleys(grid: Real, *, is_periodic: bool) -> list[int]:
    """Return the flat indices of mesh points no higher than any neighbour, lowest first, that could be the least.

    Between mesh points a function can fall by no more than half its largest step from one mesh point to the next.
    """
    lowest_near, largest = grid, 0.0
    for axis in range(grid.ndim):
        width = ((1, 1) if axis == at else (0, 0) for at in range(grid.ndim))
        padded = np.pad(lowest_near, tuple(width), mode="wrap" if is_periodic else "edge")
        parts = [np.take(padded, np.arange(shift, shift + grid.shape[axis]), axis=axis) for shift in range(3)]
        lowest_near = np.minimum(np.minimum(parts[0], parts[1]), parts[2])
        largest += float(np.abs(np.diff(grid, axis=axis)).max(initial=0.0))
    flat = grid.ravel()
    candidates = np.flatnonzero((flat <= lowest_near.ravel()) & (flat <= flat.min() + largest))
    order = candidates[np.argsort(np.round(flat[candidates], 9), kind="stable")]
    return [int(number) for number in order[:STARTS]]


def _refined(function: Function, k: Real, width: float) -> tuple[float, Real]:
    steps = np.linspace(-1.0, 1.0, 7)
    cube = np.stack(np.meshgrid(*[steps] * len(k), indexing="ij"), axis=-1).reshape(-1, len(k))
    value = float(function(k[None])[0])
    for _ in range(ROUNDS):
        points = k + width * cube
        found = function(points)
        number = int(np.argmin(found))
        if found[number] < value:
            value, k = float(found[number]), points[number]
        width *= SHRINK
    return value, k
