"""The sources of a book, by key, from ``sources.bib`` (BibTeX)."""

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from bandbook.cases.read import read_text
from bandbook.errors import Problem


@dataclass(frozen=True)
class Source:
    """One source.

    Attributes:
        key: Its key.
        text: Its citation as plain text.
        fields: What the entry says, as plain text.
        line: Its line in the file.
        kind: The entry's type, such as ``"article"``.
    """

    key: str
    text: str
    fields: Mapping[str, str] = field(default_factory=dict)
    line: int = 0
    kind: str = ""


@dataclass(frozen=True)
class Sources:
    """Every source of the book, and what is wrong with the file."""

    entries: Mapping[str, Source] = field(default_factory=dict)
    problems: tuple[Problem, ...] = ()


def read_sources(path: Path, file: str) -> Sources:
    """Read ``sources.bib``; a book without one has no sources."""
    if not path.exists() and not path.is_symlink():
        return Sources()
    text, problems = read_text(path)
    entries: dict[str, Source] = {}
    if text is not None:
        entries, problems = _parsed(text)
    placed = [problem.at(file, problem.line or 1) for problem in problems]
    return Sources(entries, tuple(sorted(placed, key=lambda problem: problem.line)))


def _parsed(text: str) -> tuple[dict[str, Source], list[Problem]]:
    """Return the sources that can be read, and every mistake, its line set."""
    import pybtex.errors
    from pybtex.database import parse_string
    from pybtex.exceptions import PybtexError

    with pybtex.errors.capture() as captured:
        try:
            found = parse_string(text, "bibtex").entries
            entries = {key: _source(key, entry, text) for key, entry in found.items()}
        except (PybtexError, ValueError, RecursionError) as error:
            entries = {}
            captured.append(error)
    return entries, [_problem(error, text) for error in captured]


def _problem(error: Any, text: str) -> Problem:
    """Return what BibTeX's reader found wrong as a problem with its line."""
    message = re.sub(r"^syntax error in line \d+: |^undefined string in line \d+: ", "", str(error).split("\n")[0])
    if match := re.search(r"repeated bibliography entry: (.*)", message):
        problem = Problem(f'the key "{match[1]}" stands twice', "each source has a key of its own", "rename one")
        return problem.at("", _line_of(text, match[1], last=True))
    if match := re.search(r"entry with key (.*) has a duplicate (.*) field", message):
        problem = Problem(f'"{match[1]}" has the field "{match[2]}" twice', "each field once", "remove one")
        return problem.at("", _line_of(text, match[1]))
    if match := re.search(r"in '(.*)'$", message):
        place = text.find(match[1])
        line = text.count("\n", 0, max(0, place)) + 1
        return Problem(message[:200], "names as First Last, joined by and", "correct the name").at("", line)
    allowed = "entries such as @book{key, author = {…}, title = {…}, year = {…}}"
    line = min(int(getattr(error, "lineno", None) or 1), text.count("\n") + 1)
    return Problem(f"no BibTeX ({message[:200]})", allowed, "correct the entry").at("", line)


def _line_of(text: str, key: str, *, last: bool = False) -> int:
    """Return the line of an entry; BibTeX does not tell capital letters of a key apart."""
    matches = list(re.finditer(rf"@\s*\w+\s*[{{(]\s*{re.escape(key)}\s*,", text, flags=re.IGNORECASE))
    return text.count("\n", 0, matches[-1 if last else 0].start()) + 1 if matches else 1


def _source(key: str, entry: Any, text: str) -> Source:
    people = [_plain(_joined(person)) for person in entry.persons.get("author", entry.persons.get("editor", []))]
    fields = {name.lower(): _plain(value) for name, value in entry.fields.items()}
    return Source(key, _citation(people, fields), fields, _line_of(text, key), entry.type)


def _joined(person: Any) -> str:
    """Return a name as it is spoken."""
    parts: Iterable[str] = [*person.first_names, *person.middle_names, *person.prelast_names, *person.last_names]
    return " ".join([*parts, *person.lineage_names])


def _plain(value: str) -> str:
    """Return BibTeX's text as plain text: accents and signs for LaTeX's commands, no braces."""
    from pybtex.exceptions import PybtexError
    from pybtex.richtext import Text

    try:
        value = str(Text.from_latex(value))
    except (PybtexError, ValueError, RecursionError):
        value = value.replace("{", "").replace("}", "").replace("\\&", "&")
    return re.sub(r"\s+", " ", value.replace("--", "–")).strip()


def _citation(people: list[str], fields: Mapping[str, str]) -> str:
    """Return a citation as one line: people, title, where, volume, pages, year."""
    who = ", ".join(people[:-1]) + (" and " if len(people) > 1 else "") + people[-1] if people else ""
    where = fields.get("journal") or fields.get("booktitle") or fields.get("publisher") or ""
    volume = f"{where} {fields.get('volume', '')}".strip()
    pages = fields.get("pages", "")
    parts = [who, fields.get("title", ""), ", ".join(part for part in (volume, pages) if part)]
    year = f" ({fields['year']})" if "year" in fields else ""
    return " ".join(part if part.endswith(".") else f"{part}." for part in parts if part).removesuffix(".") + year
