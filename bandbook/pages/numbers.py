"""How pages write numbers that an author wrote, and what was found beside them."""

import math
from decimal import Decimal

from bandbook.exhibits import typeset

#: Most decimals of a number on a page; all stored decimals stand in the record.
MOST_DECIMALS = 9
#: Decimals that are enough where two numbers agree anyway.
ENOUGH_DECIMALS = 6

_SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_UNITS = {"m_e": "mₑ", "beta": "β"}


def as_written(value: float | None) -> str:
    """Return a number with the digits that its author gave it, a true minus sign and powers of ten in print.

    >>> as_written(-2.85), as_written(1e-9), as_written(2.5e-07), as_written(3)
    ('−2.85', '10⁻⁹', '2.5 × 10⁻⁷', '3')
    """
    if value is None:
        return "—"
    text = repr(value + 0.0) if isinstance(value, float) else str(value)
    digits, mark, power = text.partition("e")
    if mark:
        exponent = "10" + str(int(power)).translate(_SUPERSCRIPTS)
        text = exponent if digits == "1" else f"{digits} × {exponent}"
    elif isinstance(value, float) and value.is_integer():
        text = digits.removesuffix(".0")
    return text.replace("-", "−")


def decimals_of(value: float) -> int:
    """Return how many decimals a number has as its author wrote it.

    >>> decimals_of(0.618), decimals_of(1e-9), decimals_of(2.0)
    (3, 9, 0)
    """
    exponent = Decimal(repr(value)).normalize().as_tuple().exponent
    return max(0, -exponent) if isinstance(exponent, int) else 0


def compared(value: float, found: float | None, *, within: float, agrees: bool) -> tuple[str, str]:
    """Return a reference value and what was found, with as many decimals as the tolerance calls for.

    >>> compared(0.618, 0.618033989, within=0.001, agrees=True)
    ('0.618', '0.618')
    >>> compared(1.4, 1.400000002, within=1e-9, agrees=False)
    ('1.400000000', '1.400000002')
    """
    most = ENOUGH_DECIMALS if agrees else MOST_DECIMALS
    wanted = math.ceil(-math.log10(within) - 1e-9) if within > 0 else 0 if agrees else MOST_DECIMALS
    decimals = min(MOST_DECIMALS, max(decimals_of(value), min(wanted, most)))
    return typeset(value, decimals), typeset(found, decimals)


def unit(name: str) -> str:
    """Return a unit as pages print it.

    >>> unit("m_e"), unit("eV")
    ('mₑ', 'eV')
    """
    return _UNITS.get(name, name)
