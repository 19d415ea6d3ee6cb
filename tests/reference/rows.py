"""Rows of published values: what is found, what is expected, within what, from where, and how it is known.

Status: ``PRINT`` seen in print; ``CLOSED`` a closed form, or the digits it gives; ``MEMORY`` a published value cited from
memory and reproduced by an independent computation.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any, Final

import numpy as np
import pytest
from numpy.typing import ArrayLike

PRINT: Final = "seen in print"
CLOSED: Final = "closed form"
MEMORY: Final = "memory"
#: Half of the last digit of what is printed with so many decimals; closed forms hold to 1e-10.
DIGITS: Final = {decimals: 0.500001 * 10.0**-decimals for decimals in range(1, 13)}
EXACT: Final = 1e-10


@dataclass(frozen=True)
class Row:
    """One published number, or several.

    Attributes:
        id: Its number in the list of reference values, and what it is.
        found: Computes it.
        expected: As published.
        within: Tolerance.
        source: Who says so.
        status: ``PRINT``, ``CLOSED`` or ``MEMORY``.
    """

    id: str
    found: Callable[[], Any]
    expected: ArrayLike
    within: float
    source: str
    status: str

    def check(self) -> None:
        """Compare what is found with what is expected."""
        found = np.asarray(self.found(), dtype=np.float64)
        assert found == pytest.approx(np.asarray(self.expected, dtype=np.float64), rel=0, abs=self.within)


def each(rows: Sequence[Row]) -> pytest.MarkDecorator:
    """Return what runs a test over rows."""
    assert len({row.id for row in rows}) == len(rows), "every row stands once"
    return pytest.mark.parametrize("row", rows, ids=[row.id for row in rows])
