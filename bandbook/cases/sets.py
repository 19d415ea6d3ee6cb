"""Parameter sets: named values with unit, uncertainty and source, shared by cases."""

import hashlib
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any, Final

from bandbook.cases.read import ID, read_text
from bandbook.cases.toml_lines import Key, Lines, read_toml
from bandbook.errors import Problem
from bandbook.parameters import NAME, Field, check, plain_name

ORDERS: Final = ("single", "double", "triple", "aromatic")
_ORIGIN = (
    Field("source", "text", "key of sources.bib", default=""),
    Field("note", "text", "where it comes from", default=""),
)
_TOP = (
    Field("title", "text", "title of the set"),
    *_ORIGIN,
    Field("values", "table", "the named values", default=None),
    Field("atoms", "table", "kinds of atom: h and the electrons that each brings", default=None),
    Field("bond", "rows", "kinds of bond: k between two kinds of atom", default=()),
)
_VALUE = (
    Field("value", "number", "the value"),
    Field("u", "number", "standard uncertainty", default=None, least=0.0),
    Field("unit", "text", "unit", default=""),
    Field("meaning", "text", "what it is", default=""),
    *_ORIGIN,
)
_NUMBER = (_VALUE[0], _VALUE[1], *_ORIGIN)
_ATOM = (
    Field("h", "number", "alpha of this atom is alpha + h beta"),
    Field("electrons", "integer", "electrons that it brings", least=0, most=2),
    *_ORIGIN,
)
_BOND = (
    Field("between", "texts", "the two kinds of atom", length=(2, 2)),
    Field("order", "choice", "order of the bond", default=None, choices=ORDERS),
    Field("k", "number", "beta of this bond is k beta"),
    *_ORIGIN,
)


@dataclass(frozen=True)
class ParameterValue:
    """One named value of a set; ``source`` and ``note`` are the set's where the value names neither."""

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
        atoms: Kind of atom → its checked row, every number with its uncertainty as ``<name>_u``.
        bonds: Checked rows of ``[[bond]]``, likewise.
        digest: Digest of the file's text.
        problems: What is wrong, placed.
        lines: Key path → line in the file.
    """

    name: str
    file: str
    title: str = ""
    source: str = ""
    note: str = ""
    values: Mapping[str, ParameterValue] = field(default_factory=dict)
    atoms: Mapping[str, Mapping[str, Any]] = field(default_factory=dict)
    bonds: tuple[Mapping[str, Any], ...] = ()
    digest: str = ""
    problems: tuple[Problem, ...] = ()
    lines: Lines = field(default_factory=dict)

    def line_of(self, key: Key) -> int:
        """Return the line of the longest known beginning of a key path, otherwise the first."""
        return next((self.lines[key[:n]] for n in range(len(key), 0, -1) if key[:n] in self.lines), 1)


def read_parameter_set(path: Path, file: str) -> ParameterSet:
    """Read a parameter set; what is wrong is collected."""
    text, problems = read_text(path)
    problems += _name_problems(path.stem)
    if text is None:
        return ParameterSet(path.stem, file, problems=_sorted(problems, file))
    table, lines, wrong = read_toml(text + "\n", 0)
    digest = "sha256:" + hashlib.sha256(text.encode()).hexdigest()
    read = ParameterSet(path.stem, file, title=path.stem, digest=digest, lines=lines)
    if wrong:
        return replace(read, problems=_sorted([*problems, *wrong], file))
    read, mistakes = _filled(read, table)
    problems += [problem.at("", read.line_of(problem.key)) for problem in mistakes]
    return replace(read, problems=_sorted(problems, file))


def _sorted(problems: list[Problem], file: str) -> tuple[Problem, ...]:
    placed = [problem.at(file, problem.line or 1) for problem in problems]
    return tuple(sorted(placed, key=lambda problem: problem.line))


def _name_problems(name: str) -> list[Problem]:
    if ID.match(name) and "/" not in name:
        return []
    found = f'the file name gives the set the name "{name}"'
    return [Problem(found, "small letters a to z, digits, points and hyphens", "rename the file")]


def _filled(read: ParameterSet, table: Mapping[str, Any]) -> tuple[ParameterSet, list[Problem]]:
    """Return the set with what its table says, and every mistake, not placed."""
    outer = {key: {} if isinstance(entry, Mapping) else entry for key, entry in table.items() if key != "bond"}
    checked, problems = check(_TOP, outer)
    origin = {"source": checked["source"] or "", "note": checked["note"] or ""}
    is_told = any(problem.key[:1] in {("source",), ("note",)} for problem in problems)
    if not any(origin.values()) and not is_told:
        allowed = "the set names one, for every value that does not name its own"
        problems.append(Problem("neither source nor note", allowed, "add source or note above [values]"))
    inner = {key: table.get(key, {}) if checked[key] == {} else {} for key in ("values", "atoms")}
    values, wrong = _values(read, inner["values"], origin)
    atoms, wrong_atoms = _atoms(inner["atoms"])
    bonds, wrong_bonds = _bonds(table.get("bond", []))
    read = replace(read, title=checked["title"] or read.name, source=origin["source"], note=origin["note"])
    return replace(read, values=values, atoms=atoms, bonds=tuple(bonds)), [
        *problems,
        *wrong,
        *wrong_atoms,
        *wrong_bonds,
    ]


def _values(
    read: ParameterSet, given: Mapping[str, Any], origin: Mapping[str, str]
) -> tuple[dict[str, ParameterValue], list[Problem]]:
    values, problems = {}, []
    for name, entry in given.items():
        row = entry if isinstance(entry, Mapping) else {"value": entry}
        checked, wrong = check(_VALUE, row)
        if not NAME.match(name):
            plain = plain_name(name)
            remedy = f'call it "{plain}"' if plain else "choose another name"
            wrong.append(Problem(f'the name "{name}"', "letters a to z, digits and _, a letter first", remedy))
        problems += [problem.below("values", name) for problem in wrong]
        if not wrong:
            own = {} if checked["source"] or checked["note"] else origin
            values[name] = ParameterValue(**{**checked, **own, "line": read.line_of(("values", name))})
    return values, problems


def _atoms(given: Mapping[str, Any]) -> tuple[dict[str, Mapping[str, Any]], list[Problem]]:
    atoms: dict[str, Mapping[str, Any]] = {}
    problems: list[Problem] = []
    for name, entry in given.items():
        if not isinstance(entry, Mapping):
            problems.append(Problem("found no table", "{ h = …, electrons = … }", "write a table", ("atoms", name)))
            continue
        checked, wrong = _row(_ATOM, entry, "h")
        problems += [problem.below("atoms", name) for problem in wrong]
        atoms[name] = checked
    return atoms, problems


def _bonds(given: Any) -> tuple[list[Mapping[str, Any]], list[Problem]]:
    if not isinstance(given, list) or not all(isinstance(entry, Mapping) for entry in given):
        return [], [Problem("found no rows", "[[bond]] and its keys below it", "write [[bond]]", ("bond",))]
    bonds: list[Mapping[str, Any]] = []
    problems: list[Problem] = []
    seen: set[tuple[Any, ...]] = set()
    for row, entry in enumerate(given):
        checked, wrong = _row(_BOND, entry, "k")
        name = (*sorted(checked["between"] or (row,), key=str), checked["order"])
        if not wrong and name in seen:
            wrong = [
                Problem("the bond stands twice", "each pair of atoms once for each order", "remove one of the two")
            ]
        seen.add(name)
        problems += [problem.below("bond", row) for problem in wrong]
        bonds.append(checked)
    return bonds, problems


def _row(fields: tuple[Field, ...], given: Mapping[str, Any], number: str) -> tuple[dict[str, Any], list[Problem]]:
    """Check a row in which one number may be a table that carries its uncertainty."""
    plain, u = dict(given), None
    found: list[Problem] = []
    if isinstance(given.get(number), Mapping):
        checked, found = check(_NUMBER, given[number])
        plain[number], u = 1.0 if checked["value"] is None else checked["value"], checked["u"]
    checked, wrong = check(fields, plain)
    return {**checked, f"{number}_u": u}, [*(problem.below(number) for problem in found), *wrong]
