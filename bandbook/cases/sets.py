"""Parameter sets: named values with unit, uncertainty and source, shared by cases."""

import hashlib
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from bandbook.cases.read import ID, read_text
from bandbook.cases.toml_lines import read_toml
from bandbook.errors import Problem
from bandbook.parameters import Field, check

_TOP = (
    Field("title", "text", "title of the set"),
    Field("source", "text", "key of sources.bib", default=""),
    Field("note", "text", "where the values come from", default=""),
    Field("values", "table", "the named values", default=None),
)
_VALUE = (
    Field("value", "number", "the value"),
    Field("u", "number", "standard uncertainty", default=None, least=0.0),
    Field("unit", "text", "unit", default=""),
    Field("meaning", "text", "what it is", default=""),
    Field("source", "text", "key of sources.bib", default=""),
    Field("note", "text", "where it comes from", default=""),
)


@dataclass(frozen=True)
class ParameterValue:
    """One named value of a set."""

    value: float
    u: float | None = None
    unit: str = ""
    meaning: str = ""
    source: str = ""
    note: str = ""
    line: int = 0


@dataclass(frozen=True)
class ParameterSet:
    """One parameter set as it was read.

    Attributes:
        name: Its file name without ending.
        file: The path from the book's folder.
        values: Name → value; those with mistakes are missing.
        digest: Digest of the file's bytes.
        problems: What is wrong, placed.
    """

    name: str
    file: str
    title: str = ""
    source: str = ""
    note: str = ""
    values: Mapping[str, ParameterValue] = field(default_factory=dict)
    digest: str = ""
    problems: tuple[Problem, ...] = ()


def read_parameter_set(path: Path, file: str) -> ParameterSet:
    """Read a parameter set; what is wrong is collected."""
    name = path.stem
    text, problems = read_text(path)
    if not ID.match(name) or "/" in name:
        problems.append(
            Problem(f'the set is called "{name}"', "small letters, digits, points, hyphens", "rename the file")
        )
    if text is None:
        return ParameterSet(name, file, problems=tuple(problem.at(file, problem.line or 1) for problem in problems))
    table, lines, wrong = read_toml(text, 0)
    problems += wrong
    checked, mistakes = check(_TOP, _without_bonds(table)) if not wrong else ({}, [])
    values, found = _values(checked.get("values") or {}, checked)
    mistakes = [*mistakes, *found]
    placed = [*problems, *(problem.at("", _line(problem, lines)) for problem in mistakes)]
    values = {key: _placed(value, lines.get(("values", key), 0)) for key, value in values.items()}
    return ParameterSet(
        name,
        file,
        str(checked.get("title") or name),
        str(checked.get("source") or ""),
        str(checked.get("note") or ""),
        values,
        "sha256:" + hashlib.sha256(text.encode()).hexdigest(),
        tuple(sorted((problem.at(file, problem.line or 1) for problem in placed), key=lambda problem: problem.line)),
    )


def _without_bonds(table: Mapping[str, Any]) -> dict[str, Any]:
    """Return the table without its bonds and atoms, which no form of this book reads yet."""
    return {key: value for key, value in table.items() if key not in {"bond", "atoms"}}


def _line(problem: Problem, lines: Mapping[tuple[str | int, ...], int]) -> int:
    for length in range(len(problem.key), 0, -1):
        if problem.key[:length] in lines:
            return lines[problem.key[:length]]
    return 1


def _placed(value: ParameterValue, line: int) -> ParameterValue:
    return ParameterValue(value.value, value.u, value.unit, value.meaning, value.source, value.note, line)


def _values(given: Mapping[str, Any], whole: Mapping[str, Any]) -> tuple[dict[str, ParameterValue], list[Problem]]:
    values, problems = {}, []
    for name, entry in given.items():
        row = entry if isinstance(entry, Mapping) else {"value": entry}
        checked, wrong = check(_VALUE, row)
        has_origin = any(checked.get(key) or whole.get(key) for key in ("source", "note"))
        if not wrong and not has_origin:
            wrong = [
                Problem("neither source nor note", "every value names one, or takes the set's", "add source or note")
            ]
        problems += [problem.below("values", name) for problem in wrong]
        if not wrong:
            values[name] = ParameterValue(**checked)
    return values, problems
