"""Reads a table against its fields: one reader a kind of field, every mistake collected."""

import math
import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from typing import Any, Final

from bandbook.errors import Problem
from bandbook.parameters.field import MOST_CELLS, Field, bound, describe
from bandbook.parameters.from_set import FromSet
from bandbook.parameters.words import NAME, listed, near, nearest, plain_name, shortened, shown

#: Whole numbers up to here are exact as floats and in JSON.
MOST_WHOLE: Final = 2**53
#: Tables and lists in one another, in a free table.
MOST_NESTED: Final = 20

Checked = tuple[Any, list[Problem]]
Reader = Callable[[Field, Any], Checked]


def check(fields: Sequence[Field], given: Mapping[str, Any]) -> tuple[dict[str, Any], list[Problem]]:
    """Read a table against its fields.

    Args:
        fields: What may stand in the table.
        given: The table as TOML gave it, references to parameter sets resolved.

    Returns:
        The checked parameters, every field present (a default where the key was missing, ``None`` where it was wrong),
        numbers as float, −0.0 as 0.0, lists as lists; and every problem, in the order of the table, missing keys last.
        A misspelt key is one problem, and is read as the key it means.

    >>> check((Field("beta", "number", "resonance integral", unit="eV", nonzero=True),), {"beta": -2.5})
    ({'beta': -2.5}, [])
    """
    known = {field.name: field for field in fields}
    meant = _meant(known, given)
    checked: dict[str, Any] = {}
    problems: list[Problem] = []
    for key, value in given.items():
        if key not in known:
            problems.append(_unknown(key, known))
        field = known.get(meant.get(key, key))
        if field is not None:
            checked[field.name], found = KINDS[field.kind](field, value)
            problems += [problem.below(key) for problem in found]
    for field in fields:
        if field.name not in checked:
            default = list(field.default) if isinstance(field.default, tuple) else field.default
            checked[field.name] = None if field.is_required else default
            if field.is_required:
                problems.append(_missing(field))
    return {field.name: checked[field.name] for field in fields}, problems


def _meant(known: Mapping[str, Field], given: Mapping[str, Any]) -> dict[str, str]:
    """Return the field that each misspelt key means: the nearest one that stands nowhere else in the table.

    An optional field is meant only by a value that it allows.
    """
    meant: dict[str, str] = {}
    for key, value in given.items():
        name = next(iter(nearest(str(key), known)), None) if key not in known else None
        if name is None or name in given or name in meant.values():
            continue
        field = known[name]
        if field.is_required or not KINDS[field.kind](field, value)[1]:
            meant[key] = name
    return meant


def corrected(fields: Sequence[Field], given: Mapping[str, Any]) -> tuple[dict[str, Any], dict[str, str]]:
    """Return a table without its unknown keys, misspelt ones put right, and how those that were put right stood there.

    >>> corrected((Field("beta", "number", "resonance integral"),), {"bata": -2.5, "colour": "red"})
    ({'beta': -2.5}, {'beta': 'bata'})
    """
    known = {field.name: field for field in fields}
    meant = _meant(known, given)
    table = {meant.get(key, key): value for key, value in given.items() if meant.get(key, key) in known}
    return table, {name: key for key, name in meant.items()}


def _unknown(key: object, known: Mapping[str, Field]) -> Problem:
    word = key if isinstance(key, str) else str(key)
    found = f'unknown key "{shortened(word)}"'
    return Problem(found, "keys here are " + listed(known), near(word, known) or "remove it", (word,))


def _missing(field: Field) -> Problem:
    return Problem(
        f'the key "{field.name}" is missing', f"it is {field.meaning}: {describe(field)}", f"add {field.name} = …"
    )


def _wrong(field: Field, value: object, remedy: str = "") -> Checked:
    return None, [Problem(f"found {shown(value)}", f"allowed is {describe(field)}", remedy or _remedy(value))]


def _remedy(value: object) -> str:
    if isinstance(value, str) and re.fullmatch(r"\s*[-+]?[0-9]+,[0-9]+\s*", value):
        return f"write the decimal point as a point, without quotes: {value.strip().replace(',', '.')}"
    if isinstance(value, str) and _is_numeral(value):
        return "remove the quotes"
    return "correct it"


def _is_numeral(text: str) -> bool:
    try:
        return math.isfinite(float(text)) and text.isascii()
    except ValueError:
        return False


def _number(field: Field, value: object) -> Checked:
    if isinstance(value, FromSet) and field.unit and value.unit not in {"", field.unit}:
        found = f'"{value.origin}" is {float(value):g} {shortened(value.unit)}'
        return None, [Problem(found, f"allowed is {describe(field)}", f"name a value in {field.unit}")]
    if isinstance(value, bool) or not isinstance(value, int | float) or not _is_finite(value):
        return _wrong(field, value)
    if not _in_range(field, value):
        return _wrong(field, value, _size_remedy(field) if value else "")
    return float(value) + 0.0, []


def _size_remedy(field: Field) -> str:
    if field.most is None or not field.is_bounded_by_size:
        return ""
    return f"write a number from {bound(-field.most)} to {bound(field.most)}"


def _is_finite(value: float) -> bool:
    """Return whether a number is finite as a float; a whole number of TOML may be larger than any."""
    try:
        return math.isfinite(value)
    except OverflowError:
        return False


def _in_range(field: Field, value: float) -> bool:
    if field.least is not None and value < field.least:
        return False
    if field.most is not None and value > field.most:
        return False
    if field.above is not None and value <= field.above:
        return False
    return not (field.nonzero and value == 0)


def _integer(field: Field, value: object) -> Checked:
    if isinstance(value, float) and value.is_integer() and abs(value) <= MOST_WHOLE:
        value = int(value)
    if isinstance(value, int) and abs(value) > MOST_WHOLE:
        return _wrong(field, value, "write a smaller number")
    if isinstance(value, bool) or not isinstance(value, int) or not _in_range(field, value):
        return _wrong(field, value)
    return value, []


def _text(field: Field, value: object) -> Checked:
    if isinstance(value, str):
        return (value, []) if value.strip() else _wrong(field, value, "write something, or remove the key")
    return _wrong(field, value, "" if isinstance(value, list | Mapping) else "put it in quotes")


def _name(field: Field, value: object) -> Checked:
    if isinstance(value, str) and NAME.match(value):
        return value, []
    return _wrong(field, value, _name_remedy(value))


def _name_remedy(value: object) -> str:
    plain = plain_name(value) if isinstance(value, str) else ""
    if isinstance(value, str) and not value.isascii():
        return "keep to the letters a to z, digits and _" + (f', such as "{plain}"' if plain else "")
    return f'write "{plain}"' if plain else "begin with a letter and go on with letters, digits and _"


def _flag(field: Field, value: object) -> Checked:
    return (value, []) if isinstance(value, bool) else _wrong(field, value, "write true or false, without quotes")


def _choice(field: Field, value: object) -> Checked:
    if isinstance(value, str) and value in field.choices:
        return value, []
    return _wrong(field, value, near(value, field.choices) if isinstance(value, str) else "")


def _list_of(kind: str, read: Reader, *, is_distinct: bool = False) -> Reader:
    """Return what reads a list whose entries are of another kind."""

    def reader(field: Field, value: object) -> Checked:
        low, high = field.length
        if not isinstance(value, list) or not low <= len(value) <= high:
            return _wrong(field, value, _length_remedy(field, value))
        entries, problems = _entries(kind, read, field, value)
        return entries, [*problems, *_repeats(entries)] if is_distinct else problems

    return reader


def _entries(kind: str, read: Reader, field: Field, value: Sequence[Any]) -> tuple[list[Any], list[Problem]]:
    one = replace(field, kind=kind)
    pairs = [read(one, entry) for entry in value]
    problems = [problem.below(row) for row, (_, found) in enumerate(pairs) for problem in found]
    return [entry for entry, _ in pairs], problems


def _repeats(words: list[Any]) -> list[Problem]:
    return [
        Problem(f'"{word}" stands twice', "each word once", "remove one of the two", (row,))
        for row, word in enumerate(words)
        if word is not None and word in words[:row]
    ]


def _length_remedy(field: Field, value: object) -> str:
    low, high = field.length
    if not isinstance(value, list):
        return "write a list in brackets"
    upwards = f"{low} or more" if high == MOST_CELLS else f"{low} to {bound(high)}"
    return f"give {low if low == high else upwards} entries, not {len(value)}"


def _vector(field: Field, value: object) -> Checked:
    if not isinstance(value, list) or len(value) != 3:
        return _wrong(field, value, "write three numbers in brackets")
    return _entries("number", _number, field, value)


def _row(field: Field, value: object) -> Checked:
    if not isinstance(value, Mapping):
        return _wrong(field, value, "write a table: { key = value }")
    return check(field.fields, value)


def _cells(field: Field, value: object) -> Checked:
    if isinstance(value, list):
        return _whole_numbers(field, value)
    return _integer(field, value)


def _whole_numbers(field: Field, value: list[Any]) -> Checked:
    if not 1 <= len(value) <= 3:
        return _wrong(field, value, "give one number for each lattice vector")
    entries, problems = _entries("integer", _integer, field, value)
    return (entries, problems) if problems or len(value) > 1 else (entries[0], [])


def _lengths(field: Field, value: object) -> Checked:
    """Read ``"1..40"`` or a list of whole numbers as a rising list without repeats."""
    if isinstance(value, str):
        match = re.fullmatch(r"\s*([0-9]{1,9})\s*\.\.\s*([0-9]{1,9})\s*", value)
        if match is None or int(match[1]) > int(match[2]):
            return _wrong(field, value, 'write "1..40" or a list such as [2, 4, 8]')
        if int(match[2]) - int(match[1]) >= 10_000:
            return _wrong(field, value, "a range holds at most 10,000 lengths; give a list of the ones you need")
        outside = next((end for end in (int(match[1]), int(match[2])) if not _in_range(field, end)), None)
        if outside is not None:
            return _wrong(replace(field, kind="integer"), outside, "correct the range")
        value = list(range(int(match[1]), int(match[2]) + 1))
    if not isinstance(value, list) or not value:
        return _wrong(field, value, 'write "1..40" or a list such as [2, 4, 8]')
    entries, problems = _entries("integer", _integer, field, value)
    return (None, problems) if problems else (sorted(set(entries)), [])


def _table(field: Field, value: object) -> Checked:
    return _plain(field, value, 0) if isinstance(value, Mapping) else _wrong(field, value, "write a table: { key = … }")


def _plain(field: Field, value: Any, depth: int) -> Checked:
    """Read what JSON has a form for, numbers as they are given."""
    if isinstance(value, Mapping | list):
        if depth >= MOST_NESTED:
            return None, [Problem("found tables in one another too deep to read", f"{MOST_NESTED} deep", "flatten it")]
        keys = list(value) if isinstance(value, Mapping) else range(len(value))
        pairs = {key: _plain(field, value[key], depth + 1) for key in keys}
        problems = [problem.below(key) for key, (_, found) in pairs.items() for problem in found]
        entries = {str(key): entry for key, (entry, _) in pairs.items()}
        return (entries if isinstance(value, Mapping) else list(entries.values())), problems
    if isinstance(value, str | bool):
        return value, []
    if isinstance(value, int):
        return _integer(Field(field.name, "integer", field.meaning), value)
    if isinstance(value, float):
        return _number(Field(field.name, "number", field.meaning), value)
    return None, [Problem(f"found {shown(value)}", "numbers, texts, booleans, lists and tables", "put it in quotes")]


#: Every kind of field: the reader takes the field and the value and returns the checked value and problems.
KINDS: Final[Mapping[str, Reader]] = {
    "number": _number,
    "integer": _integer,
    "text": _text,
    "name": _name,
    "flag": _flag,
    "choice": _choice,
    "choices": _list_of("choice", _choice, is_distinct=True),
    "names": _list_of("name", _name, is_distinct=True),
    "texts": _list_of("text", _text),
    "integers": _list_of("integer", _integer),
    "numbers": _list_of("number", _number),
    "vector": _vector,
    "vectors": _list_of("vector", _vector),
    "row": _row,
    "rows": _list_of("row", _row),
    "cells": _cells,
    "lengths": _lengths,
    "table": _table,
}
