"""Effective-mass tensors at isolated extremes: (1/m)_ij = (1/ħ²) ∂²E/∂k_i∂k_j."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model
from bandbook.solver.hamiltonian import band_energies

Real = NDArray[np.float64]

#: Step of the differences, radians per cell.
STEP: Final = 0.02
#: Weights of the fourth-order second difference at −2…2 steps, and of the first.
SECOND: Final = np.array([-1, 16, -30, 16, -1]) / 12
FIRST: Final = np.array([1, -8, 0, 8, -1]) / 12


@dataclass(frozen=True)
class Mass:
    """An effective mass.

    Attributes:
        mean: Geometric mean of the principal masses, m_e, positive; ``None`` where there is none.
        principal: The principal masses, m_e, positive, ascending.
        reason: Why there is none; empty otherwise.
    """

    mean: float | None
    principal: tuple[float, ...]
    reason: str = ""


def mass_at(model: Model, k: Real, *, band: int, width: float) -> Mass:
    """Return the effective mass of a band at an extreme.

    m = ħ²/(d²E/dk²), the absolute value; principal masses are the eigenvalues of the tensor in Å.

    Args:
        model: The crystal.
        k: The extreme, π/a along each lattice vector, ``(dimension,)``.
        band: The band, from 0.
        width: Total width, eV: sets what counts as flat or degenerate.

    >>> from bandbook.model import Coupling, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -2.5, (1,)),), dimension=1, vectors=((1.40, 0.0, 0.0),))
    >>> round(mass_at(chain, np.array([0.0]), band=0, width=10.0).mean, 5)
    0.77755
    """
    if model.vectors is None:
        return Mass(None, (), "the repeat is unknown")
    energies = band_energies(model, k[None])[0]
    others = np.delete(energies, band)
    if others.size and np.abs(others - energies[band]).min() < 1e-6 * width:
        return Mass(None, (), "bands touch there")
    curvature = _curvature(model, k, band)
    vectors = np.array(model.vectors)
    eigenvalues = np.sort(np.linalg.eigvals(curvature @ (vectors @ vectors.T)).real)
    if np.abs(eigenvalues).min() < 1e-6 * width:
        return Mass(None, (), "the band is flat there")
    if np.ptp(np.sign(eigenvalues)):
        return Mass(None, (), "it is no extreme in every direction")
    principal = np.sort(_hbar_squared() / np.abs(eigenvalues))
    return Mass(float(np.exp(np.log(principal).mean())), tuple(float(mass) for mass in principal))


def _hbar_squared() -> float:
    """Return ħ²/m_e, eV Å²."""
    from scipy import constants

    return float(constants.hbar**2 / constants.m_e / constants.e * 1e20)


def _curvature(model: Model, k: Real, band: int) -> Real:
    """Return ∂²E/∂θ_i∂θ_j, θ in radians per cell, by fourth-order differences, eV."""
    dimension = model.dimension
    steps = np.arange(-2, 3)
    result = np.zeros((dimension, dimension))
    for one in range(dimension):
        for two in range(one, dimension):
            grid = np.zeros((5, 5, dimension))
            grid[..., one] += steps[:, None]
            grid[..., two] += steps[None, :] if two != one else 0
            points = (k + grid.reshape(-1, dimension) * STEP / np.pi).reshape(-1, dimension)
            energies = band_energies(model, points)[:, band].reshape(5, 5)
            value = SECOND @ energies[:, 0] if one == two else FIRST @ energies @ FIRST
            result[one, two] = result[two, one] = value / STEP**2
    return result
