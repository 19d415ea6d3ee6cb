"""Names, units and ranges of everything an author may write in a block, and one check that collects every mistake.

A family member (a lattice, a system form, a question) declares a tuple of :class:`Field`; :func:`check` reads a table
against it and returns the checked parameters, plain JSON, together with every :class:`Problem`.
"""

import difflib
import math
import re
import unicodedata
from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Final

from bandbook.errors import Problem

__all__ = ["KINDS", "NAME", "REQUIRED", "Field", "Problem", "check", "near", "one_of"]

#: The default of a field that must be given.
REQUIRED: Final = "«required»"
#: Study, system and site names.
NAME: Final = re.compile(r"[A-Za-z][A-Za-z0-9_]*\Z")
#: Sites of a pieces and lengths of a series: the contract's largest model.
MOST_CELLS: Final = 10**7
#: Whole numbers up to here are exact as floats and in JSON.
MOST_WHOLE: Final = 2**53

Checked = tuple[Any, list[Problem]]


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


def check(fields: Sequence[Field], given: Mapping[str, Any]) -> tuple[dict[str, Any], list[Problem]]:
    """Read a table against its fields.

    Args:
        fields: What may stand in the table.
        given: The table as TOML gave it, references to parameter sets resolved.

    Returns:
        The checked parameters, every field present (a default where the key was missing, ``None`` where it was wrong),
        numbers as float, −0.0 as 0.0; and every problem, in the order of the table, missing keys last.

    >>> check((Field("beta", "number", "resonance integral", unit="eV", nonzero=True),), {"beta": -2.5})
    ({'beta': -2.5}, [])
    """
    known = {field.name: field for field in fields}
    checked: dict[str, Any] = {}
    problems: list[Problem] = []
    for key, value in given.items():
        if key not in known:
            problems.append(_unknown(key, known))
            continue
        checked[key], found = KINDS[known[key].kind](known[key], value)
        problems += [problem.below(key) for problem in found]
    for field in fields:
        if field.name not in given:
            checked[field.name] = None if field.is_required else field.default
            if field.is_required:
                problems.append(_missing(field))
    return {field.name: checked[field.name] for field in fields}, problems


def near(word: str, known: Collection[str]) -> str:
    """Return a question that names near words, or nothing.

    >>> near("bata", ["alpha", "beta"])
    'did you mean "beta"?'
    """
    lowered = {name.lower(): name for name in known}
    found = difflib.get_close_matches(word.lower(), list(lowered), n=3, cutoff=0.6)
    return "did you mean " + " or ".join(f'"{lowered[name]}"' for name in found) + "?" if found else ""


def one_of(word: str, known: Collection[str], what: str) -> Problem:
    """Return the problem of a word that is not one of the known ones."""
    allowed = f"{what}s are " + ", ".join(f'"{name}"' for name in known) if known else f"there is no {what} yet"
    return Problem(f'unknown {what} "{word}"', allowed, near(word, known) or f"use one of the {what}s that exist")


def _unknown(key: str, known: Mapping[str, Field]) -> Problem:
    return Problem(f'unknown key "{key}"', "keys here are " + ", ".join(known), near(key, known) or "remove it", (key,))


def _missing(field: Field) -> Problem:
    return Problem(
        f'the key "{field.name}" is missing', f"it is {field.meaning}: {describe(field)}", f"add {field.name} = …"
    )


def describe(field: Field) -> str:
    """Return what a field allows, in words.

    >>> describe(Field("sites", "integer", "number of sites", least=3))
    'a whole number, 3 or more'
    """
    text = _NOUNS[field.kind]
    if field.unit:
        text += f" in {field.unit}"
    if field.above is not None:
        text += f", above {field.above:g}"
    if field.least is not None and field.most is not None:
        text += f", {field.least:g} to {field.most:g}"
    elif field.least is not None:
        text += f", {field.least:g} or more"
    elif field.most is not None:
        text += f", {field.most:g} or less"
    if field.nonzero:
        text += ", not 0"
    if field.choices:
        text += ": " + ", ".join(f'"{choice}"' for choice in field.choices)
    return text


def _wrong(field: Field, value: object, remedy: str = "") -> Checked:
    return None, [Problem(f"found {shown(value)}", f"allowed is {describe(field)}", remedy or _remedy(value))]


def shown(value: object) -> str:
    """Return a value as TOML would show it, shortened."""
    if isinstance(value, bool):
        return f"the boolean {str(value).lower()}"
    if isinstance(value, str):
        return f'the text "{value if len(value) < 40 else value[:37] + "…"}"'
    if isinstance(value, float) and not math.isfinite(value):
        return f"the number {value}"
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, list):
        return f"a list of {len(value)}"
    return "a whole number of very many digits" if isinstance(value, int) and abs(value) > MOST_WHOLE else str(value)


def _remedy(value: object) -> str:
    if isinstance(value, str) and re.fullmatch(r"\s*[-+]?\d+,\d+\s*", value):
        return f"write the decimal point as a point, without quotes: {value.strip().replace(',', '.')}"
    if isinstance(value, str) and _is_numeral(value):
        return "remove the quotes"
    return "correct it"


def _is_numeral(text: str) -> bool:
    try:
        return math.isfinite(float(text))
    except ValueError:
        return False


def _number(field: Field, value: object) -> Checked:
    if isinstance(value, bool) or not isinstance(value, int | float) or not _is_finite(value):
        return _wrong(field, value)
    if not _in_range(field, value):
        return _wrong(field, value)
    return float(value) + 0.0, []


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
    if isinstance(value, float) and value.is_integer() and abs(value) < 2**53:
        value = int(value)
    if isinstance(value, bool) or not isinstance(value, int) or not _in_range(field, value):
        return _wrong(field, value)
    if abs(value) > MOST_WHOLE:
        return _wrong(field, value, "write a smaller number")
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
        return "names keep to the letters a to z, digits and _" + (f'; write "{plain}"' if plain else "")
    return f'write "{plain}"' if plain else "begin with a letter and go on with letters, digits and _"


def plain_name(text: str) -> str:
    """Return the allowed name that is nearest to a text, or nothing.

    >>> plain_name("β short"), plain_name("Größe"), plain_name("1")
    ('beta_short', 'Grosse', '')
    """
    signs = []
    for sign in unicodedata.normalize("NFKD", text.strip()[:80].replace("ß", "ss")):
        greek = re.fullmatch(r"GREEK (?:SMALL|CAPITAL) LETTER (\w+)", unicodedata.name(sign, ""))
        signs.append(greek[1].lower() if greek else "_" if sign in " -." else sign)
    name = re.sub(r"[^A-Za-z0-9_]", "", "".join(signs))
    return name if NAME.match(name) else ""


def _flag(field: Field, value: object) -> Checked:
    return (value, []) if isinstance(value, bool) else _wrong(field, value, "write true or false, without quotes")


def _choice(field: Field, value: object) -> Checked:
    if isinstance(value, str) and value in field.choices:
        return value, []
    return _wrong(field, value, near(value, field.choices) if isinstance(value, str) else "")


def _list_of(read: Callable[[Field, Any], Checked]) -> Callable[[Field, Any], Checked]:
    def reader(field: Field, value: object) -> Checked:
        low, high = field.length
        if not isinstance(value, list) or not low <= len(value) <= high:
            return _wrong(field, value, _length_remedy(field, value))
        pairs = [read(field, entry) for entry in value]
        problems = [problem.below(row) for row, (_, found) in enumerate(pairs) for problem in found]
        return [entry for entry, _ in pairs], problems

    return reader


def _length_remedy(field: Field, value: object) -> str:
    low, high = field.length
    if not isinstance(value, list):
        return "write a list in brackets"
    wanted = f"{low}" if low == high else f"{low} or more" if high == MOST_CELLS else f"{low} to {high}"
    return f"it has {len(value)} entries; give {wanted}"


def _vector(field: Field, value: object) -> Checked:
    if not isinstance(value, list) or len(value) != 3:
        return _wrong(field, value, "write three numbers in brackets")
    pairs = [_number(field, entry) for entry in value]
    return [entry for entry, _ in pairs], [problem for _, found in pairs for problem in found]


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
    pairs = [_integer(field, entry) for entry in value]
    problems = [problem for _, found in pairs for problem in found]
    return ([entry for entry, _ in pairs], problems) if problems or len(value) > 1 else (pairs[0][0], [])


def _lengths(field: Field, value: object) -> Checked:
    """Read ``"1..40"`` or a list of whole numbers as a rising list without repeats."""
    if isinstance(value, str):
        match = re.fullmatch(r"\s*(\d{1,9})\s*\.\.\s*(\d{1,9})\s*", value)
        if match is None or int(match[1]) > int(match[2]):
            return _wrong(field, value, 'write "1..40" or a list such as [2, 4, 8]')
        if int(match[2]) - int(match[1]) >= 10_000:
            return _wrong(field, value, "a range holds at most 10,000 lengths; give a list of the ones you need")
        value = list(range(int(match[1]), int(match[2]) + 1))
    if not isinstance(value, list) or not value:
        return _wrong(field, value, 'write "1..40" or a list such as [2, 4, 8]')
    pairs = [_integer(field, entry) for entry in value]
    problems = [problem.below(row) for row, (_, found) in enumerate(pairs) for problem in found]
    return (None, problems) if problems else (sorted({entry for entry, _ in pairs}), [])


#: Every kind of field: the reader takes the field and the value and returns the checked value and problems.
KINDS: Final[Mapping[str, Callable[[Field, Any], Checked]]] = {
    "number": _number,
    "integer": _integer,
    "text": _text,
    "name": _name,
    "flag": _flag,
    "choice": _choice,
    "choices": _list_of(_choice),
    "names": _list_of(_name),
    "texts": _list_of(_text),
    "integers": _list_of(_integer),
    "numbers": _list_of(_number),
    "vector": _vector,
    "vectors": _list_of(_vector),
    "row": _row,
    "rows": _list_of(_row),
    "cells": _cells,
    "lengths": _lengths,
    "table": lambda field, value: (dict(value), []) if isinstance(value, Mapping) else _wrong(field, value),
}

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
