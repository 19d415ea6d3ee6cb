"""Effective-mass tensors at isolated extremes, (1/m)_ij = (1/ħ²) ∂²E/∂k_i∂k_j, and group velocities."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model
from bandbook.solver.hamiltonian import Complex, band_slopes, band_states, bloch_derivative

Real = NDArray[np.float64]

#: Bands closer than this part of the total width touch; a curvature below this part of it, per radian², is none.
TOUCH: Final = 1e-8
FLAT: Final = 1e-6


@dataclass(frozen=True)
class Mass:
    """An effective mass.

    Attributes:
        mean: Geometric mean of the principal masses, m_e, positive; ``None`` where there is none.
        principal: The principal masses, m_e, positive, ascending.
        reason: Why there is none; empty otherwise.
        inverse: The tensor 1/m in x, y, z, 1/m_e, its sign that of the principal masses, ``(3, 3)``; ``()`` without.
    """

    mean: float | None
    principal: tuple[float, ...]
    reason: str = ""
    inverse: tuple[tuple[float, ...], ...] = ()


def mass_at(model: Model, k: Real, *, band: int, width: float) -> Mass:
    """Return the effective mass of a band at an extreme.

    m = ħ²/(∂²E/∂k²), the absolute value; principal masses are those of the tensor.

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
    energies = band_states(model, k[None])[0][0]
    others = np.delete(energies, band)
    if others.size and np.abs(others - energies[band]).min() <= TOUCH * width:
        return Mass(None, (), "bands touch there")
    curvature = band_curvature(model, k, band=band)
    bends = np.linalg.eigvalsh(curvature)
    if np.abs(bends).min() <= FLAT * width:
        return Mass(None, (), "the band is flat there")
    if np.ptp(np.sign(bends)):
        return Mass(None, (), "it is no extreme in every direction")
    vectors = np.array(model.vectors)
    inverse = np.sign(bends[0]) * (vectors.T @ curvature @ vectors) / _hbar_squared()
    principal = np.sort(1.0 / np.sort(np.linalg.eigvalsh(inverse))[-model.dimension :])
    tensor = tuple(tuple(float(part) + 0.0 for part in row) for row in inverse)
    return Mass(float(np.exp(np.log(principal).mean())), tuple(float(mass) for mass in principal), inverse=tensor)


def _hbar_squared() -> float:
    """Return ħ²/m_e, eV Å²."""
    from scipy import constants

    return float(constants.hbar**2 / constants.m_e / constants.e * 1e20)


def band_curvature(model: Model, k: Real, *, band: int) -> Real:
    """Return ∂²E/∂θ_i∂θ_j of a band that touches no other at k, θ in radians per cell, eV, ``(dimension, dimension)``.

    Second-order perturbation: with D_i = ∂_iH − E ∂_iS,
    ∂_ijE = ⟨n|∂_ijH − E ∂_ijS|n⟩ − ∂_iE⟨n|∂_jS|n⟩ − ∂_jE⟨n|∂_iS|n⟩ + 2 Re Σ_m ⟨n|D_i|m⟩⟨m|D_j|n⟩/(E_n − E_m),
    and D_i less ∂_iE S has the same elements between different states.

    >>> from bandbook.model import Coupling, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -2.5, (1,)),), dimension=1)
    >>> band_curvature(chain, np.array([0.0]), band=0).tolist()
    [[5.0]]
    """
    energies, states = band_states(model, k[None])
    here, own = energies[0, band], states[0][:, band]
    firsts = [_element_parts(model, k, (axis,)) for axis in range(model.dimension)]
    rows = [states[0].conj().T @ (dh - here * ds) @ own for dh, ds in firsts]
    norms = [float((own.conj() @ ds @ own).real) for _, ds in firsts]
    distance = here - energies[0]
    weights = np.divide(1.0, distance, out=np.zeros_like(distance), where=np.arange(len(distance)) != band)
    result = np.zeros((model.dimension, model.dimension))
    for i, j in np.ndindex(*result.shape):
        dh, ds = _element_parts(model, k, (i, j))
        direct = (own.conj() @ (dh - here * ds) @ own).real
        slopes = rows[i][band].real * norms[j] + rows[j][band].real * norms[i]
        result[i, j] = direct - slopes + 2 * float((weights * rows[i].conj() * rows[j]).sum().real)
    return result


def _element_parts(model: Model, k: Real, axes: tuple[int, ...]) -> tuple[Complex, Complex]:
    dh, ds = bloch_derivative(model, k[None], *axes)
    return dh[0], np.zeros_like(dh[0]) if ds is None else ds[0]


def group_velocities(model: Model, k: Real) -> Real | None:
    """Return v = (1/ħ) ∂E/∂k, m/s, ``(n_k, band, 3)``; ``None`` where the repeat is unknown.

    By Hellmann and Feynman; where bands touch, the velocities belong to one choice of states.

    Args:
        model: The crystal.
        k: π/a along each lattice vector, ``(n_k, dimension)``.

    >>> from bandbook.model import Coupling, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -2.5, (1,)),), dimension=1, vectors=((1.40, 0.0, 0.0),))
    >>> round(float(group_velocities(chain, np.array([[0.5]]))[0, 0, 0]))  # 2|β|a/ħ
    1063487
    """
    if model.vectors is None:
        return None
    from scipy import constants

    velocities: Real = band_slopes(model, k) @ np.array(model.vectors) * (constants.e * 1e-10 / constants.hbar)
    return velocities
