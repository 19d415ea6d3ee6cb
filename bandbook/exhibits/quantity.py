"""A quantity: a named number with unit, kind and meaning; the kind fixes its decimals and how it converts to β."""

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any, Final


@dataclass(frozen=True)
class Kind:
    """What sort of number a quantity is.

    Attributes:
        name: Its word.
        decimals: Decimals that are stored, fixed, never scaled by a computed number.
        shown: Most decimals that a page shows.
        beta: How it converts to β: ``"level"`` (E − α)/β, ``"difference"`` E/|β|, ``"total"`` (E − n α)/β, or ``""``.
        unit: Its usual unit.
        tolerance: What counts as equal when two editions are compared.
    """

    name: str
    decimals: int
    shown: int
    beta: str = ""
    unit: str = ""
    tolerance: float = 2e-9


#: Every kind by name.
KINDS: Final[Mapping[str, Kind]] = {
    kind.name: kind
    for kind in (
        Kind("level", 9, 4, beta="level", unit="eV"),
        Kind("difference", 9, 4, beta="difference", unit="eV"),
        Kind("total", 9, 4, beta="total", unit="eV"),
        Kind("number", 9, 4),
        Kind("count", 0, 0, tolerance=0.0),
        Kind("wavenumber", 12, 4, unit="π/a", tolerance=2e-11),
        Kind("length", 9, 4, unit="Å"),
        Kind("mass", 6, 4, unit="m_e", tolerance=2e-5),
        Kind("fit", 5, 4, beta="difference", unit="eV", tolerance=2e-4),
        Kind("fit level", 5, 4, beta="level", unit="eV", tolerance=2e-4),
        Kind("coefficient", 5, 4, tolerance=2e-4),
        Kind("weight", 6, 3, tolerance=2e-5),
        Kind("density", 9, 4, unit="1/eV"),
    )
}


#: What may stand for a placeholder in the name of a quantity; anything for the others.
_PLACEHOLDERS: Final = {"<n>": r"[1-9][0-9]*", "<N>": r"[1-9][0-9]*", "<fit>": r"[a-z-]+(?:_(?:4m|4m\+2|odd))?"}


@dataclass(frozen=True)
class QuantityName:
    """A quantity that a question promises; ``<n>``, ``<N>`` stand for a whole number from 1, other ``<…>`` for a name.

    Attributes:
        pattern: Such as ``"gap"`` or ``"energy_<n>"``.
        kind: A name of :data:`KINDS`.
        meaning: One line without a full stop.
    """

    pattern: str
    kind: str
    meaning: str

    def fits(self, name: str) -> bool:
        """Return whether ``name`` is of this pattern.

        >>> QuantityName("energy_<n>", "level", "energy of a level").fits("energy_12")
        True
        """
        parts = re.split(r"(<\w+>)", self.pattern)
        text = "".join(_PLACEHOLDERS.get(part, r".+") if part.startswith("<") else re.escape(part) for part in parts)
        return re.fullmatch(text, name) is not None


@dataclass(frozen=True)
class Quantity:
    """One number that a study gave.

    Attributes:
        name: ``<study>.<quantity>``.
        kind: A name of :data:`KINDS`.
        value: The number, rounded to the kind's decimals; ``None`` where the question has no answer.
        unit: Its unit; empty for a plain number.
        meaning: One line.
        in_beta: The same in units of β; ``None`` where it has no such form or no β is known.
        uncertainty: Standard uncertainty in ``unit``, with the same decimals, or ``None``.
    """

    name: str
    kind: str
    value: float | None
    unit: str = ""
    meaning: str = ""
    in_beta: float | None = None
    uncertainty: float | None = None

    def __post_init__(self) -> None:
        decimals = KINDS[self.kind].decimals
        for name in ("value", "in_beta", "uncertainty"):
            number = getattr(self, name)
            object.__setattr__(self, name, None if number is None else fixed(number, decimals))

    def named(self, name: str) -> "Quantity":
        """Return the same quantity under another name."""
        return replace(self, name=name)

    def as_dict(self) -> dict[str, Any]:
        """Return the quantity as it stands in a result: plain JSON."""
        return {
            "name": self.name,
            "kind": self.kind,
            "value": self.value,
            "unit": self.unit,
            "in_beta": self.in_beta,
            "uncertainty": self.uncertainty,
            "meaning": self.meaning,
        }


def fixed(value: float, decimals: int) -> float | None:
    """Return a number rounded to fixed decimals: −0.0 is 0.0, what is not finite is ``None``.

    >>> fixed(-1e-12, 9), fixed(float("nan"), 9), fixed(10**400, 9)
    (0.0, None, None)
    """
    try:
        number = float(value)
    except OverflowError:
        return None
    return round(number, decimals) + 0.0 if math.isfinite(number) else None


def in_beta(
    value: float | None, kind: str, *, beta: float | None, alpha: float = 0.0, electrons: float = 0.0
) -> float | None:
    """Return a value in units of β, by its kind.

    Args:
        value: Energy, eV.
        kind: ``"level"``: (E − α)/β, positive when bonding; ``"difference"``: E/|β|; ``"total"``: (E − n α)/β.
        beta: The resonance integral that is the unit, eV.
        alpha: The origin, eV.
        electrons: Electrons that a total counts.

    >>> in_beta(-2.5, "level", beta=-2.5)
    1.0
    """
    form = KINDS[kind].beta
    if value is None or not beta or not form:
        return None
    if form == "difference":
        return value / abs(beta)
    return (value - (alpha if form == "level" else electrons * alpha)) / beta


def typeset(value: float | None, decimals: int, uncertainty: float | None = None) -> str:
    """Return a number as a page shows it: a true minus sign, no ``-0.0``, 1.62(8) for an uncertainty.

    >>> typeset(-2.1499999, 3), typeset(None, 3), typeset(1.6183, 4, 0.081)
    ('−2.150', '—', '1.62(8)')
    """
    if value is None or not math.isfinite(value):
        return "—"
    digits = ""
    if uncertainty is not None and math.isfinite(uncertainty) and uncertainty > 0:
        decimals = max(0, -int(f"{uncertainty:.0e}".partition("e")[2]))
        digits = "(" + f"{uncertainty:.{decimals}f}".replace(".", "").lstrip("0") + ")"
    return f"{round(value, decimals) + 0.0:.{decimals}f}{digits}".replace("-", "−")
