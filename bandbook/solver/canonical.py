"""Degenerate groups, and one basis and sign for each: numbers that do not depend on the processor.

LAPACK builds differ in the sign of a vector, in the basis of a degenerate group and in the last bits. Everything here
depends on the energies and the *space* of a group only.
"""

from typing import Final

import numpy as np
from numpy.typing import NDArray

#: Levels closer than this part of the total width are degenerate.
DEGENERATE: Final = 1e-10
#: Least distance of two levels that are told apart, eV.
LEAST_DISTANCE: Final = 1e-10
#: Diagonals of a projector count to this many decimals.
PIVOT: Final = 1e-9
#: Components within this part of the largest share its rank when the sign is chosen.
SIGN: Final = 1e-6


def tolerance(total_width: float) -> float:
    """Return the distance within which two levels are degenerate, eV.

    >>> tolerance(10.0), tolerance(0.0)
    (1e-09, 1e-10)
    """
    return max(DEGENERATE * total_width, LEAST_DISTANCE)


def group_levels(energies: NDArray[np.float64], total_width: float) -> tuple[slice, ...]:
    """Return the degenerate groups of ascending levels.

    Args:
        energies: Ascending, eV, ``(state,)``.
        total_width: Lowest to highest level of the whole spectrum, eV.

    Returns:
        Slices that cover all levels; a group holds what lies within the tolerance of its lowest level.

    >>> group_levels(np.array([-1.0, 0.0, 1e-13, 2.0]), 3.0)
    (slice(0, 1, None), slice(1, 3, None), slice(3, 4, None))
    """
    near = tolerance(total_width)
    ends = np.searchsorted(energies, energies + near, side="right")
    groups = []
    first = 0
    while first < len(energies):
        groups.append(slice(first, int(ends[first])))
        first = int(ends[first])
    return tuple(groups)


def canonical_basis(vectors: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return the basis of a degenerate group that depends on its space only.

    Pivoted orthogonalisation of the projector ``P = V Vᵀ``: the site with the largest diagonal element of P (counted to
    nine decimals, the lowest index first) gives the first vector ``P e/√(eᵀPe)``; it is taken out of P, and so on; last
    the sign rule. With overlap ``V`` is S-orthonormal, and so is the result.

    A site within 1e-9 of the largest diagonal counts as equal to it. Rounding each diagonal instead would still break
    a tie by noise where the exact value ends in a 5 (1/1024 = 0.0009765625).

    Args:
        vectors: Orthonormal columns that span the group, ``(site, g)``.

    Returns:
        Orthonormal columns, ``(site, g)``, in the order of their pivots.

    >>> turned = np.array([[0.6, -0.8], [0.8, 0.6], [0.0, 0.0]])
    >>> (canonical_basis(turned).round(12) + 0.0).tolist()
    [[1.0, 0.0], [0.0, 1.0], [0.0, 0.0]]
    """
    size = vectors.shape[1]
    if size < 2:
        return fix_signs(vectors)
    left = vectors.copy()
    turn = np.zeros((size, 0))
    for _ in range(size):
        weights = np.einsum("sg,sg->s", left, left)
        pivot = int(np.argmax(weights >= weights.max() - PIVOT))
        row = left[pivot] - turn @ (turn.T @ left[pivot])
        row /= np.linalg.norm(row)
        turn = np.column_stack([turn, row])
        left = left - np.outer(left @ row, row)
    return fix_signs(vectors @ turn)


def fix_signs(vectors: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return the vectors with the first component within tolerance of the largest made positive; −0.0 becomes 0.

    >>> fix_signs(np.array([[-0.5, 0.1], [0.5, -0.9]])).tolist()
    [[0.5, -0.1], [-0.5, 0.9]]
    """
    sizes = np.abs(vectors)
    first = np.argmax(sizes >= sizes.max(axis=0) * (1 - SIGN), axis=0)
    signs = np.sign(vectors[first, np.arange(vectors.shape[1])])
    return vectors * np.where(signs == 0, 1.0, signs) + 0.0
