"""Fermi energy and energy per cell of a crystal, from its exact electron count."""

import itertools
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model
from bandbook.solver.hamiltonian import band_energies

Real = NDArray[np.float64]

#: Mesh points along each vector for a partly filled band in 2D and 3D.
FILLING_MESH: Final = {2: 240, 3: 36}
#: A mean over the zone has settled when doubling the mesh changes it by less, eV.
SETTLED: Final = 2e-10
#: Matrix elements that a mesh may ask for in all.
MOST_NUMBERS: Final = 40_000_000


def fermi_energy(model: Model, kind: str, valence: float | None, conduction: float | None) -> float | None:
    """Return the Fermi energy, eV: mid-gap in an insulator, where bands touch their energy, otherwise from the filling.

    Args:
        model: The crystal.
        kind: What the bands do at the Fermi energy.
        valence: Highest energy of the highest filled band, eV.
        conduction: Lowest energy of the next one, eV.
    """
    if kind in {"insulator", "bands touch"}:
        return None if valence is None or conduction is None else (valence + conduction) / 2
    if model.dimension == 1:
        return _fermi_line(model)
    energies = np.sort(band_energies(model, _mesh(model, FILLING_MESH[model.dimension])).ravel())
    position = model.n_electrons / 2 * len(energies) / model.n_sites
    low = min(max(int(np.floor(position - 0.5)), 0), len(energies) - 2)
    return float((energies[low] + energies[low + 1]) / 2)


def _mesh(model: Model, n_each: int) -> Real:
    """Return an even mesh, half a step off Γ, π/a."""
    axis = -1.0 + (2.0 * np.arange(n_each) + 1.0) / n_each
    return np.stack(np.meshgrid(*[axis] * model.dimension, indexing="ij"), axis=-1).reshape(-1, model.dimension)


def _fermi_line(model: Model) -> float:
    """Return the energy below which the bands of a line hold half the electrons: bisection on the filled length."""
    k = np.linspace(0.0, 1.0, 2401)
    energies = band_energies(model, k[:, None])
    low, high = float(energies.min()), float(energies.max())
    for _ in range(200):
        middle = (low + high) / 2
        if _filled(energies, middle) < model.n_electrons / 2:
            low = middle
        else:
            high = middle
    return (low + high) / 2


def _filled(energies: Real, energy: float) -> float:
    """Return the states per cell and spin below an energy, E(k) taken as straight between mesh points."""
    start, end = energies[:-1], energies[1:]
    low, high = np.minimum(start, end), np.maximum(start, end)
    part = np.clip((energy - low) / np.maximum(high - low, 1e-300), 0.0, 1.0)
    return float(np.where(high - low < 1e-15, (energy > low).astype(float), part).sum() / len(start))


def energy_per_cell(model: Model, kind: str, fermi: float | None) -> float | None:
    """Return the energy of the occupied states, both spins, eV per cell; ``None`` where the mesh does not settle.

    In 1D by adaptive quadrature between the Fermi points; in 2D and 3D by meshes that are doubled until they settle.
    For the alternating chain it is (4/π)(β₁ + β₂)E(m), m = 4β₁β₂/(β₁ + β₂)².
    """
    n_filled = model.n_electrons / 2
    if model.dimension == 1:
        return _line_energy(model, fermi if kind in {"bands cross or overlap", "band partly filled"} else None)
    if kind not in {"insulator", "bands touch"}:
        return None
    return _plane_energy(model, round(n_filled))


def _line_energy(model: Model, fermi: float | None) -> float | None:
    from scipy import integrate

    n_filled = round(model.n_electrons / 2)

    def occupied(k: float) -> float:
        energies = band_energies(model, np.array([[k]]))[0]
        if fermi is None:
            return float(energies[:n_filled].sum())
        return float(np.minimum(energies - fermi, 0.0).sum())

    points = [0.0, 1.0] if fermi is None else _fermi_points(model, fermi)
    total = 0.0
    for low, high in itertools.pairwise(points):
        total += integrate.quad(occupied, low, high, epsabs=1e-12, epsrel=1e-12, limit=200)[0]
    return 2 * total + (0.0 if fermi is None else model.n_electrons * fermi)


def _fermi_points(model: Model, fermi: float) -> list[float]:
    """Return 0, the k at which a band passes the Fermi energy, and 1."""
    from scipy import optimize

    k = np.linspace(0.0, 1.0, 601)
    above = band_energies(model, k[:, None]) > fermi
    points = {0.0, 1.0}
    for step, band in zip(*np.nonzero(above[1:] != above[:-1]), strict=True):

        def distance(place: float, band: int = int(band)) -> float:
            return float(band_energies(model, np.array([[place]]))[0, band] - fermi)

        if distance(k[step]) * distance(k[step + 1]) < 0:
            points.add(float(optimize.brentq(distance, k[step], k[step + 1], xtol=1e-14)))
    return sorted(points)


def _plane_energy(model: Model, n_filled: int) -> float | None:
    """Return twice the zone's mean of the filled bands; meshes n, 2n, … with the error n⁻³ of a cone point removed."""
    n_each, previous, better = 12 if model.dimension == 3 else 48, None, None
    while n_each**model.dimension * model.n_sites**2 <= MOST_NUMBERS:
        mean = float(band_energies(model, _mesh(model, n_each))[:, :n_filled].sum(axis=1).mean())
        if previous is not None:
            if abs(mean - previous) < SETTLED:
                return 2 * mean
            last, better = better, mean + (mean - previous) / 7
            if last is not None and abs(better - last) < SETTLED:
                return 2 * better
        previous, n_each = mean, 2 * n_each
    return None
