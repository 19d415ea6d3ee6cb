"""Which energies lie outside every band of a crystal."""

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model
from bandbook.solver.branches import EDGE, branches_of
from bandbook.solver.canonical import tolerance
from bandbook.solver.hamiltonian import band_energies
from bandbook.solver.zone import lowest, zone_mesh


def outside_bands(model: Model, energies: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Return which energies lie outside every band by more than 1e-8 of the total width, ``(row,)``.

    In one dimension the ranges of the bands are exact. In two and three they come from a mesh of the whole zone, and
    the edges next to an energy that lies outside are refined before the verdict.

    Args:
        model: A crystal, dimension 1 to 3.
        energies: eV, ``(row,)``.

    >>> from bandbook.model import Coupling, Site
    >>> square = Model((Site("A"),), (Coupling(0, 0, -1.0, (1, 0)), Coupling(0, 0, -1.0, (0, 1))), dimension=2)
    >>> outside_bands(square, np.array([-4.1, -4.0, 0.0])).tolist()
    [True, False, False]
    """
    if model.dimension == 1:
        crystal = branches_of(model)
        return _beyond(crystal.ranges, energies, crystal.near_edge)
    mesh = zone_mesh(model)
    values = band_energies(model, mesh)
    ranges = np.stack([values.min(axis=0), values.max(axis=0)], axis=1)
    width = float(ranges.max() - ranges.min())
    near = max(EDGE * width, tolerance(width))
    for band, side in sorted(_doubtful(ranges, energies[_beyond(ranges, energies, near)])):
        sign = -1 if side else 1

        def signed(k: NDArray[np.float64], band: int = band, sign: int = sign) -> NDArray[np.float64]:
            return sign * band_energies(model, k)[:, band]

        ranges[band, side] = sign * lowest(signed, mesh, sign * values[:, band])[0]
    return _beyond(ranges, energies, near)


def _beyond(ranges: NDArray[np.float64], energies: NDArray[np.float64], near: float) -> NDArray[np.bool_]:
    below = energies[:, None] < ranges[:, 0] - near
    above = energies[:, None] > ranges[:, 1] + near
    outside: NDArray[np.bool_] = np.all(below | above, axis=1)
    return outside


def _doubtful(ranges: NDArray[np.float64], energies: NDArray[np.float64]) -> set[tuple[int, int]]:
    """Return the edges (band, 0 for the lowest energy or 1 for the highest) next to each energy."""
    edges: set[tuple[int, int]] = set()
    for energy in energies:
        if np.any(ranges[:, 1] < energy):
            edges.add((int(np.argmax(np.where(ranges[:, 1] < energy, ranges[:, 1], -np.inf))), 1))
        if np.any(ranges[:, 0] > energy):
            edges.add((int(np.argmin(np.where(ranges[:, 0] > energy, ranges[:, 0], np.inf))), 0))
    return edges
