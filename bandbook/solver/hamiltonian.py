"""H(k) and S(k) of a crystal, their derivatives, and the band energies; cell gauge, k in π/a along each vector."""

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray

from bandbook.errors import PhysicsError
from bandbook.model import Model

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]

#: S(k) whose smallest eigenvalue is below this is not positive definite.
LEAST_OVERLAP = 1e-9
#: Numbers in one batch of matrices: bounds the memory of a mesh.
BATCH_NUMBERS = 4_000_000


def bloch(model: Model, k: Real) -> tuple[Complex, Complex | None]:
    """Return H(k) = Σ_R H(R) e^{ik·R} and S(k), or ``None`` where no bond has overlap.

    Args:
        model: The crystal (or a molecule, with k of shape ``(n_k, 0)``).
        k: Wave vectors, π/a along each lattice vector, ``(n_k, dimension)``.

    Returns:
        ``(n_k, site, site)`` each, eV and a plain number.

    >>> from bandbook.model import Coupling, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> bloch(chain, np.array([[0.0], [1.0]]))[0].real.ravel().tolist()
    [-2.0, 2.0]
    """
    k = np.asarray(k, dtype=np.float64).reshape(len(k), model.dimension)
    h = np.zeros((len(k), model.n_sites, model.n_sites), dtype=np.complex128)
    h[:, range(model.n_sites), range(model.n_sites)] = [site.alpha for site in model.sites]
    s = np.zeros_like(h) if model.has_overlap else None
    if s is not None:
        s[:, range(model.n_sites), range(model.n_sites)] = 1.0
    for coupling in model.couplings:
        phase = (
            np.exp(1j * np.pi * (k @ np.array(coupling.cell, dtype=np.float64))) if model.dimension else np.ones(len(k))
        )
        _add(h, coupling.start, coupling.end, coupling.beta * phase)
        if s is not None:
            _add(s, coupling.start, coupling.end, coupling.overlap * phase)
    return h, s


def _add(matrices: Complex, start: int, end: int, values: NDArray[np.inexact[Any]]) -> None:
    matrices[:, start, end] += values
    matrices[:, end, start] += values.conj()


def bloch_derivative(model: Model, k: Real, *axes: int) -> tuple[Complex, Complex | None]:
    """Return the derivatives of H(k) and S(k) along one lattice vector, or the second ones along two; k in radians.

    ∂H/∂θ_a = Σ_R i R_a H(R) e^{ik·R}, ∂²H/∂θ_a∂θ_b = −Σ_R R_a R_b H(R) e^{ik·R}, θ_a = k·a_a.

    Args:
        model: The crystal.
        k: Wave vectors, π/a, ``(n_k, dimension)``.
        axes: The lattice vectors, from 0: one for the first derivative, two for a second.

    Returns:
        ``(n_k, site, site)`` each, eV and a plain number; ``None`` where no bond has overlap.

    >>> from bandbook.model import Coupling, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> k = np.array([[0.0], [0.5]])
    >>> [bloch_derivative(chain, k, *axes)[0].real.round(12).ravel().tolist() for axes in ((0,), (0, 0))]
    [[0.0, 2.0], [2.0, 0.0]]
    """
    k = np.asarray(k, dtype=np.float64).reshape(len(k), model.dimension)
    h = np.zeros((len(k), model.n_sites, model.n_sites), dtype=np.complex128)
    s = np.zeros_like(h) if model.has_overlap else None
    for coupling in model.couplings:
        step = math.prod(coupling.cell[axis] for axis in axes)
        if step:
            factor = 1j ** len(axes) * step * np.exp(1j * np.pi * (k @ np.array(coupling.cell, dtype=np.float64)))
            _add(h, coupling.start, coupling.end, coupling.beta * factor)
            if s is not None:
                _add(s, coupling.start, coupling.end, coupling.overlap * factor)
    return h, s


def band_energies(model: Model, k: Real) -> Real:
    """Return E_b(k), ascending, ``(n_k, band)``, eV.

    Raises:
        PhysicsError: S(k) is not positive definite.

    >>> from bandbook.model import Coupling, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> band_energies(chain, np.array([[1.0]])).tolist()
    [[2.0]]
    """
    k = np.asarray(k, dtype=np.float64).reshape(len(k), model.dimension)
    size = max(1, BATCH_NUMBERS // model.n_sites**2)
    parts = [_energies(model, k[first : first + size]) for first in range(0, len(k), size)]
    return np.concatenate(parts) if parts else np.zeros((0, model.n_sites))


def _energies(model: Model, k: Real) -> Real:
    h, s = bloch(model, k)
    if model.n_sites == 1 and s is None:
        return np.asarray(h[:, 0].real)
    energies: Real = np.linalg.eigvalsh(h if s is None else orthogonalised(h, s, k)[0]).astype(np.float64)
    return energies


def orthogonalised(h: Complex, s: Complex, k: Real) -> tuple[Complex, Complex]:
    """Return L⁻¹ H L⁻† and L⁻† of S = L L†.

    Raises:
        PhysicsError: S(k) is not positive definite; names the k and the smallest eigenvalue.
    """
    lowest = np.linalg.eigvalsh(s)[:, 0]
    worst = int(np.argmin(lowest))
    if lowest[worst] < LEAST_OVERLAP:
        place = ", ".join(f"{part:.4f}" for part in k[worst])
        found = f"the overlap matrix at k = ({place}) π/a has the eigenvalue {lowest[worst]:.3g}"
        raise PhysicsError(f"{found}; it must be positive definite; make the overlap integrals smaller")
    inverse = np.linalg.inv(np.linalg.cholesky(s)).astype(np.complex128)
    back = inverse.conj().swapaxes(-1, -2)
    return inverse @ h @ back, back


def band_states(model: Model, k: Real) -> tuple[Real, Complex]:
    """Return E_b(k) ``(n_k, band)`` and the states c with c†Sc = 1, ``(n_k, site, band)``."""
    k = np.asarray(k, dtype=np.float64).reshape(len(k), model.dimension)
    h, s = bloch(model, k)
    if s is None:
        energies, vectors = np.linalg.eigh(h)
        return energies.astype(np.float64), vectors.astype(np.complex128)
    reduced, back = orthogonalised(h, s, k)
    energies, vectors = np.linalg.eigh(reduced)
    return energies.astype(np.float64), (back @ vectors).astype(np.complex128)


def band_slopes(model: Model, k: Real) -> Real:
    """Return ∂E_b/∂k along each lattice vector, k in radians per cell, ``(n_k, band, dimension)``, eV.

    Hellmann–Feynman with overlap: dE = c†(dH − E dS)c; at a degeneracy the slopes belong to one choice of states.
    """
    energies, states = band_states(model, k)
    slopes = np.zeros((*energies.shape, model.dimension))
    for axis in range(model.dimension):
        dh, ds = bloch_derivative(model, k, axis)
        slopes[..., axis] = np.einsum("kib,kij,kjb->kb", states.conj(), dh, states, optimize=True).real
        if ds is not None:
            shift = np.einsum("kib,kij,kjb->kb", states.conj(), ds, states, optimize=True).real
            slopes[..., axis] -= energies * shift
    return slopes
