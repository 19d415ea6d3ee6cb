"""Bloch states of a 1D crystal at many k: energies, one-sided slopes of the sorted bands, cell-periodic vectors."""

from dataclasses import dataclass
from itertools import pairwise
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model
from bandbook.solver.hamiltonian import band_states, bloch_derivative

#: Complex matrix elements that one batch holds at most.
BATCH: Final = 2**21
#: Energies closer than this part of the total width are degenerate when slopes are taken.
TOUCHING: Final = 1e-10


@dataclass(frozen=True, eq=False)
class BlochStates:
    """States at some k.

    Attributes:
        k: π/a, ``(k,)``.
        energy: Sorted bands, eV, ``(k, state)``.
        slope_before: dE/dk of the sorted bands on the side of smaller k, eV per π/a, ``(k, state)``.
        slope_after: The same on the side of larger k; different only where bands touch.
        vectors: Cell-periodic vectors u, ``(k, site, state)``, orthonormal (with overlap: u† S(k) u = 1).
    """

    k: NDArray[np.float64]
    energy: NDArray[np.float64]
    slope_before: NDArray[np.float64]
    slope_after: NDArray[np.float64]
    vectors: NDArray[np.complex128]

    def joined(self, other: "BlochStates") -> tuple["BlochStates", NDArray[np.intp]]:
        """Return the states of both in the order of k, and the order (this one's rows first, then the other's)."""
        order = np.argsort(np.concatenate([self.k, other.k]), kind="stable")
        names = ("k", "energy", "slope_before", "slope_after", "vectors")
        parts = [np.concatenate([getattr(self, name), getattr(other, name)])[order] for name in names]
        return BlochStates(*parts), order


def bloch_states(model: Model, k: NDArray[np.float64]) -> BlochStates:
    """Return the states of a 1D crystal at each k, H(k) u = E S(k) u.

    Slopes by Hellmann and Feynman, dE = u†(dH − E dS)u; where bands touch, by the eigenvalues of that form within the
    touching group, which gives a slope to each side.

    Args:
        model: A crystal of dimension 1.
        k: π/a, ``(k,)``.

    Raises:
        PhysicsError: S(k) is not positive definite; the message names k and the smallest eigenvalue.

    >>> from bandbook.model import Coupling, Model, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> bloch_states(chain, np.array([0.0, 0.25, 1.0])).energy.round(6)[:, 0].tolist()
    [-2.0, -1.414214, 2.0]
    """
    parts = [_states(model, k[part]) for part in batches(model, len(k))]
    if len(parts) == 1:
        return parts[0]
    names = ("k", "energy", "slope_before", "slope_after", "vectors")
    return BlochStates(*(np.concatenate([getattr(part, name) for part in parts]) for name in names))


def batches(model: Model, n_k: int) -> list[slice]:
    """Return slices of so many k that their matrices fit in memory together.

    >>> from bandbook.model import Model, Site
    >>> len(batches(Model((Site("A"),), ()), 3_000_000))
    2
    """
    size = max(1, BATCH // model.n_sites**2)
    return [slice(start, min(start + size, n_k)) for start in range(0, max(1, n_k), size)]


def _states(model: Model, k: NDArray[np.float64]) -> BlochStates:
    energy, vectors = band_states(model, k[:, None])
    dH, dS = bloch_derivative(model, k[:, None], 0)
    forms = np.pi * (dH if dS is None else dH[:, None] - energy[:, :, None, None] * dS[:, None])
    before, after = _slopes(energy, vectors, forms)
    return BlochStates(k, energy, before, after, vectors)


def _slopes(
    energy: NDArray[np.float64], vectors: NDArray[np.complex128], forms: NDArray[np.complex128]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return the slopes of the sorted bands on both sides of each k; ``forms`` is dH, or dH − E dS for each state."""
    single = "ksb,kst,ktb->kb" if forms.ndim == 3 else "ksb,kbst,ktb->kb"
    after = np.einsum(single, vectors.conj(), forms, vectors, optimize=True).real
    before = after.copy()
    width = float(energy.max() - energy.min()) if energy.size else 0.0
    touching = np.diff(energy, axis=1) <= TOUCHING * width + 1e-14
    for row in np.flatnonzero(touching.any(axis=1)):
        bounds = np.flatnonzero(np.concatenate([[True], ~touching[row], [True]]))
        for start, stop in pairwise(bounds):
            if stop - start > 1:
                u = vectors[row, :, start:stop]
                form = forms[row] if forms.ndim == 3 else forms[row, start]
                after[row, start:stop] = np.linalg.eigvalsh(u.conj().T @ form @ u)
                before[row, start:stop] = after[row, start:stop][::-1]
    return before, after
