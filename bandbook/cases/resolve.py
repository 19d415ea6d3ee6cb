"""Replace every ``"@set.name"`` by the value of a parameter set, and remember where it came from."""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from bandbook.cases.sets import ParameterSet
from bandbook.errors import Problem, key_text
from bandbook.parameters import near, one_of

_REFERENCE = re.compile(r"@([a-z0-9][a-z0-9.-]*)\.([A-Za-z][A-Za-z0-9_]*)\Z")
#: Keys whose text is never a number.
_WORDS = frozenset(
    {"name", "lattice", "question", "system", "built_by", "source", "note", "unit", "from", "to", "site"}
)


@dataclass(frozen=True)
class ParameterUse:
    """A place in a case that rests on a value of a parameter set.

    Attributes:
        set: Name of the set.
        name: Name of the value.
        key: Where it stands in its block.
        block: Line of the block's fence.
        value: The number.
    """

    set: str
    name: str
    key: str
    block: int
    value: float


def resolve(
    value: Any, sets: Mapping[str, ParameterSet], *, key: tuple[str | int, ...] = (), block: int = 0
) -> tuple[Any, list[ParameterUse], list[Problem]]:
    """Return a value with every reference replaced, the uses, and the references that lead nowhere."""
    if isinstance(value, Mapping):
        pairs: list[tuple[str | int, Any]] = list(value.items())
    elif isinstance(value, list):
        pairs = list(enumerate(value))
    else:
        return _one(value, sets, key=key, block=block)
    uses: list[ParameterUse] = []
    problems: list[Problem] = []
    resolved = []
    for name, entry in pairs:
        found, used, wrong = resolve(entry, sets, key=(*key, name), block=block)
        resolved.append((name, found))
        uses += used
        problems += wrong
    whole = dict(resolved) if isinstance(value, Mapping) else [entry for _, entry in resolved]
    return whole, uses, problems


def _one(
    value: Any, sets: Mapping[str, ParameterSet], *, key: tuple[str | int, ...], block: int
) -> tuple[Any, list[ParameterUse], list[Problem]]:
    if not isinstance(value, str) or not value.startswith("@") or (key and key[-1] in _WORDS):
        return value, [], []
    match = _REFERENCE.match(value)
    if match is None:
        found = f'"{value}" is no reference to a parameter set'
        return 1.0, [], [Problem(found, '"@set.name"', "write the set, a point and the name of a value", key)]
    if match[1] not in sets:
        return 1.0, [], [one_of(match[1], list(sets), "parameter set").below(*key)]
    values = sets[match[1]].values
    if match[2] not in values:
        allowed = f'"{match[1]}" holds ' + (", ".join(f'"{name}"' for name in values) or "no usable value")
        remedy = near(match[2], values) or "add it to the set"
        return 1.0, [], [Problem(f'the set "{match[1]}" has no value "{match[2]}"', allowed, remedy, key)]
    number = values[match[2]].value
    return number, [ParameterUse(match[1], match[2], key_text(key), block, number)], []
