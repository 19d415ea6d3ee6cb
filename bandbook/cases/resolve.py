"""Replace every ``"@set.name"`` by the value of a parameter set, and remember where it came from."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Final

from bandbook.cases.sets import ParameterSet
from bandbook.errors import Problem, key_text
from bandbook.parameters import FromSet, listed, near, one_of, shortened

Key = tuple[str | int, ...]
#: Keys whose text is never a number, except among the arguments of an author's function.
_WORDS: Final = frozenset(
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
    value: Any, sets: Mapping[str, ParameterSet], *, key: Key = (), block: int = 0
) -> tuple[Any, list[ParameterUse], list[Problem]]:
    """Return a value with every reference replaced, the uses, and the references that lead nowhere.

    A reference that leads nowhere is replaced by 1.0, so that the rest of its block can be checked.
    """
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
    value: Any, sets: Mapping[str, ParameterSet], *, key: Key, block: int
) -> tuple[Any, list[ParameterUse], list[Problem]]:
    if not isinstance(value, str) or not value.startswith("@") or _is_word(key):
        return value, [], []
    name, _, entry = value[1:].strip().rpartition(".")
    if not name or not entry:
        return 1.0, [], [_malformed(value, sets).below(*key)]
    if name not in sets:
        return 1.0, [], [one_of(name, sorted(sets), "parameter set").below(*key)]
    if entry not in sets[name].values:
        return 1.0, [], [_unknown(entry, sets[name]).below(*key)]
    found = sets[name].values[entry]
    number = FromSet(found.value, found.unit, f"@{name}.{entry}")
    return number, [ParameterUse(name, entry, key_text(key), block, found.value)], []


def _is_word(key: Key) -> bool:
    return bool(key) and key[-1] in _WORDS and key[0] != "with"


def _malformed(value: str, sets: Mapping[str, ParameterSet]) -> Problem:
    holding = sorted(name for name, parameters in sets.items() if value[1:].strip() in parameters.values)
    remedy = f'write "@{holding[0]}.{value[1:].strip()}"' if holding else "write the set, a point and the value's name"
    return Problem(f'"{shortened(value)}" is no reference to a parameter set', '"@set.name"', remedy)


def _unknown(name: str, parameters: ParameterSet) -> Problem:
    if parameters.problems:
        found = f'the set "{parameters.name}" gives no value "{shortened(name)}" and has mistakes of its own'
        return Problem(found, "a value of a set without mistakes", f"correct {parameters.file} first")
    allowed = f'"{parameters.name}" holds ' + (listed([f'"{one}"' for one in parameters.values]) or "no value")
    remedy = near(name, parameters.values) or "add it to the set"
    return Problem(f'the set "{parameters.name}" has no value "{shortened(name)}"', allowed, remedy)
