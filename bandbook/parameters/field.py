"""One key of a block: its name, kind, unit and range."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Final

#: The default of a field that must be given.
REQUIRED: Final = "«required»"
#: Cells of the largest piece.
MOST_CELLS: Final = 10**7

_NOUNS: Final[Mapping[str, str]] = {
    "number": "a finite number",
    "integer": "a whole number",
    "text": "a text in quotes",
    "name": "a name in quotes (letters, digits and _, a letter first)",
    "flag": "true or false",
    "choice": "one of",
    "choices": "a list of words, each one of",
    "names": "a list of names in quotes",
    "texts": "a list of texts",
    "integers": "a list of whole numbers",
    "numbers": "a list of finite numbers",
    "vector": "three numbers",
    "vectors": "a list of vectors of three numbers",
    "row": "a table",
    "rows": "a list of tables",
    "cells": "a whole number (a list of them in two and three dimensions)",
    "lengths": "a range of whole numbers in quotes, or a list of them",
    "table": "a table",
}


@dataclass(frozen=True)
class Field:
    """One key of a block.

    Attributes:
        name: The key.
        kind: A name of :data:`KINDS`.
        meaning: What it is, one line without a full stop.
        unit: ``"eV"``, ``"Å"``, ``"°"`` or empty.
        default: The value when the key is missing; :data:`REQUIRED` when it must be given; ``None`` for "absent".
        least: Smallest allowed number.
        most: Largest allowed number.
        above: The number must be larger than this.
        nonzero: Whether 0 is refused.
        choices: The allowed words, for ``choice`` and ``choices``.
        fields: The keys of one row, for ``rows`` and ``row``.
        length: The allowed lengths of a list, ``(least, most)``.
    """

    name: str
    kind: str
    meaning: str
    unit: str = ""
    default: Any = REQUIRED
    least: float | None = None
    most: float | None = None
    above: float | None = None
    nonzero: bool = False
    choices: tuple[str, ...] = ()
    fields: tuple["Field", ...] = ()
    length: tuple[int, int] = (0, MOST_CELLS)

    @property
    def is_required(self) -> bool:
        """Whether the key must be given."""
        return isinstance(self.default, str) and self.default == REQUIRED

    @property
    def is_bounded_by_size(self) -> bool:
        """Whether the range only keeps out numbers of absurd size; a message names it where it was left."""
        return self.most is not None and self.least == -self.most


def describe(field: Field) -> str:
    """Return what a field allows, in words.

    >>> describe(Field("sites", "integer", "number of sites", least=3))
    'a whole number, 3 or more'
    """
    text = _NOUNS[field.kind]
    if field.unit:
        text += f" in {field.unit}"
    if field.above is not None:
        text += f", above {bound(field.above)}"
    if not field.is_bounded_by_size:
        text += _range(field.least, field.most)
    if field.nonzero:
        text += ", not 0"
    if field.choices:
        text += ": " + ", ".join(f'"{choice}"' for choice in field.choices)
    return text


def bound(value: float) -> str:
    """Return a bound as messages write it.

    >>> bound(10**7), bound(-0.5)
    ('10,000,000', '-0.5')
    """
    return f"{value:,.10g}"


def _range(least: float | None, most: float | None) -> str:
    if least is None:
        return "" if most is None else f", {bound(most)} or less"
    return f", {bound(least)} or more" if most is None else f", {bound(least)} to {bound(most)}"
