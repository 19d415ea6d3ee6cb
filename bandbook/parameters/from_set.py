"""A number that stands in a block for a value of a parameter set: it knows its unit and where it came from."""

from typing import Self


class FromSet(float):
    """A number with its origin; a reader that wants another unit refuses it, otherwise it is a number like any.

    Attributes:
        unit: Its unit as the set has it; empty when the set names none.
        origin: ``@set.name``.
    """

    unit: str
    origin: str

    def __new__(cls, value: float, unit: str, origin: str) -> Self:
        """Return the number."""
        number = super().__new__(cls, value)
        number.unit, number.origin = unit, origin
        return number
