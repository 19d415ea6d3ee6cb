"""Decay of states in a gap: the complex-k solutions of E(k) = E, from a polynomial eigenproblem in λ = e^{ik}."""

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model

Real = NDArray[np.float64]


def slowest_decay(model: Model, energy: float) -> float | None:
    """Return min |Im k| at an energy, per cell; ``None`` where the energy lies in a band or nothing decays.

    Σ_R λ^R (H(R) − E S(R)) u = 0; a state in a gap falls off by e^{−|Im k|} a cell.

    Args:
        model: A crystal of dimension 1.
        energy: eV, outside every band.

    >>> from bandbook.model import Coupling, Site
    >>> sites = (Site("A"), Site("B"))
    >>> bonds = (Coupling(0, 1, -1.0, (0,)), Coupling(1, 0, -2.0, (1,)))
    >>> round(slowest_decay(Model(sites, bonds, dimension=1), 0.0), 9) == round(float(np.log(2)), 9)
    True
    """
    from scipy import linalg

    blocks = _blocks(model, energy)
    degree, size = len(blocks) - 1, model.n_sites
    left = np.zeros((degree * size, degree * size))
    right = np.eye(degree * size)
    for power in range(degree):
        left[-size:, power * size : (power + 1) * size] = -blocks[power]
    for power in range(degree - 1):
        left[power * size : (power + 1) * size, (power + 1) * size : (power + 2) * size] = np.eye(size)
    right[-size:, -size:] = blocks[degree]
    upper, lower = linalg.eig(left, right, right=False, homogeneous_eigvals=True)
    usable = (np.abs(upper) > 1e-12) & (np.abs(lower) > 1e-12)
    decay = np.abs(np.log(np.abs(upper[usable] / lower[usable])))
    return float(decay.min()) if decay.size and decay.min() > 1e-9 else None


def _blocks(model: Model, energy: float) -> list[Real]:
    """Return H(R) − E S(R) for R = −r … r."""
    reach = max((abs(coupling.cell[0]) for coupling in model.couplings), default=0) or 1
    blocks: list[Real] = [np.zeros((model.n_sites, model.n_sites)) for _ in range(2 * reach + 1)]
    blocks[reach][range(model.n_sites), range(model.n_sites)] = [site.alpha - energy for site in model.sites]
    for coupling in model.couplings:
        value = coupling.beta - energy * coupling.overlap
        blocks[reach + coupling.cell[0]][coupling.start, coupling.end] += value
        blocks[reach - coupling.cell[0]][coupling.end, coupling.start] += value
    return blocks
