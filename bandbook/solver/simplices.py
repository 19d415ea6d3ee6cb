"""States below an energy in two and three dimensions: E(k) taken as linear in triangles or tetrahedra of a mesh."""

import itertools

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model
from bandbook.solver.hamiltonian import band_energies

Real = NDArray[np.float64]


def zone_simplices(model: Model, n_each: int) -> Real:
    """Return the energies at the corners of all triangles or tetrahedra of a mesh of half the zone, sorted, eV.

    E(−k) = E(k), so that the other half holds the same.

    Args:
        model: A crystal of dimension 2 or 3.
        n_each: Steps along each lattice vector, even.

    Returns:
        ``(simplex, corner)``, the simplices of every band.
    """
    dimension = model.dimension
    axes = [np.linspace(0.0, 1.0, n_each // 2 + 1), *[np.linspace(-1.0, 1.0, n_each + 1)] * (dimension - 1)]
    mesh = np.stack(np.meshgrid(*axes, indexing="ij"), axis=-1).reshape(-1, dimension)
    energies = band_energies(model, mesh).reshape(*(len(axis) for axis in axes), model.n_sites)
    found = []
    for order in itertools.permutations(range(dimension)):
        shift = [0] * dimension
        corners = [_shifted(energies, shift)]
        for axis in order:
            shift[axis] = 1
            corners.append(_shifted(energies, shift))
        found.append(np.stack(corners, axis=-1).reshape(-1, dimension + 1))
    return np.sort(np.concatenate(found), axis=1)


def _shifted(energies: Real, shift: list[int]) -> Real:
    parts = tuple(slice(step, energies.shape[axis] - 1 + step) for axis, step in enumerate(shift))
    return energies[parts]


def filled_part(corners: Real, energy: float) -> Real:
    """Return the part of each simplex in which a linear function lies below an energy, ``(simplex,)``.

    Args:
        corners: The function at the corners, ascending, ``(simplex, corner)``; 3 or 4 corners.
        energy: The energy.

    >>> filled_part(np.array([[0.0, 1.0, 2.0], [0.0, 0.0, 1.0], [2.0, 3.0, 4.0]]), 1.0).tolist()
    [0.5, 1.0, 0.0]
    """
    part = (corners[:, -1] <= energy).astype(np.float64)
    cut = np.flatnonzero((corners[:, 0] < energy) & (corners[:, -1] > energy))
    inside = corners[cut]
    if corners.shape[1] == 3:
        part[cut] = _triangle(inside, energy)
    else:
        part[cut] = _tetrahedron(inside, energy)
    return part


def _over(above: Real, below: Real) -> Real:
    return np.divide(above, below, out=np.zeros_like(above), where=below > 0)


def _triangle(e: Real, energy: float) -> Real:
    one, two, three = e.T
    low = _over((energy - one) ** 2, (two - one) * (three - one))
    high = 1 - _over((three - energy) ** 2, (three - one) * (three - two))
    return np.where(energy < two, low, high)


def _tetrahedron(e: Real, energy: float) -> Real:
    one, two, three, four = e.T
    low = _over((energy - one) ** 3, (two - one) * (three - one) * (four - one))
    high = 1 - _over((four - energy) ** 3, (four - one) * (four - two) * (four - three))
    x, first = energy - two, two - one
    bent = _over((three - one + four - two) * x**3, (three - two) * (four - two))
    middle = _over(first**2 + 3 * first * x + 3 * x**2 - bent, (three - one) * (four - one))
    return np.where(energy < two, low, np.where(energy < three, middle, high))
