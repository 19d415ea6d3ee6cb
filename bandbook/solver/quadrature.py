"""Integrals over a line to the last digits: Gauss and Legendre's rule on panels that are halved where needed."""

from collections.abc import Callable, Sequence
from typing import Final

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]

#: Points of a panel.
POINTS: Final = 20
#: How often a panel is halved at most.
DEEPEST: Final = 44


def integral(function: Callable[[Real], Real], points: Sequence[float], *, within: float) -> float | None:
    """Return the integral of a function from the first point to the last, or ``None`` where it does not settle.

    Args:
        function: ``(n,)`` → ``(n,)``.
        points: Ascending; the function may have kinks at them.
        within: A panel has settled when its halves change it by less.

    >>> round(integral(lambda x: np.sqrt(np.abs(x - 0.3)), [0.0, 0.3, 1.0], within=1e-13), 10)  # ⅔(0.3√0.3 + 0.7√0.7)
    0.4999858572
    """
    nodes, weights = np.polynomial.legendre.leggauss(POINTS)
    low, high = np.array(points[:-1], dtype=np.float64), np.array(points[1:], dtype=np.float64)

    def panels(low: Real, high: Real) -> Real:
        places = (low + high)[:, None] / 2 + (high - low)[:, None] / 2 * nodes
        sums: Real = function(places.ravel()).reshape(places.shape) @ weights * (high - low) / 2
        return sums

    coarse, total = panels(low, high), 0.0
    for _ in range(DEEPEST):
        middle = (low + high) / 2
        halves = panels(np.concatenate([low, middle]), np.concatenate([middle, high])).reshape(2, -1)
        is_open = np.abs(halves.sum(axis=0) - coarse) > within
        total += float(halves.sum(axis=0)[~is_open].sum())
        if not is_open.any():
            return total
        coarse = halves[:, is_open].ravel()
        low, high = (
            np.concatenate([low[is_open], middle[is_open]]),
            np.concatenate([middle[is_open], high[is_open]]),
        )
    return None
