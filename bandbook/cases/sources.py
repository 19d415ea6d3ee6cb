"""The sources of a book, by key, from ``sources.bib`` (BibTeX)."""

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

from bandbook.cases.read import read_text
from bandbook.errors import Problem


@dataclass(frozen=True)
class Source:
    """One source.

    Attributes:
        key: Its key.
        text: Its citation as plain text.
        fields: What the entry says.
        line: Its line in the file.
    """

    key: str
    text: str
    fields: Mapping[str, str] = field(default_factory=dict)
    line: int = 0


@dataclass(frozen=True)
class Sources:
    """Every source of the book, and what is wrong with the file."""

    entries: Mapping[str, Source] = field(default_factory=dict)
    problems: tuple[Problem, ...] = ()


def read_sources(path: Path, file: str) -> Sources:
    """Read ``sources.bib``; a book without one has no sources."""
    if not path.exists():
        return Sources()
    text, problems = read_text(path)
    if text is None:
        return Sources(problems=tuple(problem.at(file, problem.line) for problem in problems))
    from pybtex.database import parse_string
    from pybtex.exceptions import PybtexError
    from pybtex.scanner import PybtexSyntaxError

    try:
        data = parse_string(text, "bibtex")
    except PybtexSyntaxError as error:
        line = int(getattr(error, "lineno", 1) or 1)
        return Sources(
            problems=(Problem(f"no BibTeX: {error}".split("\n")[0], "BibTeX entries", "correct it").at(file, line),)
        )
    except PybtexError as error:
        match = re.search(r"key \"?([\w:-]+)", str(error))
        line = _line_of(text, match[1]) if match else 1
        return Sources(problems=(Problem(f"no BibTeX: {error}", "each key once", "correct it").at(file, line),))
    entries = {}
    for key, entry in data.entries.items():
        people = [
            " ".join([*person.first_names, *person.prelast_names, *person.last_names])
            for person in entry.persons.get("author", [])
        ]
        fields = {name.lower(): _plain(value) for name, value in entry.fields.items()}
        entries[key] = Source(
            key, _citation([_plain(person) for person in people], fields), fields, _line_of(text, key)
        )
    return Sources(entries)


def _line_of(text: str, key: str) -> int:
    match = re.search(rf"@\w+\s*\{{\s*{re.escape(key)}\s*,", text)
    return text[: match.start()].count("\n") + 1 if match else 1


def _plain(value: str) -> str:
    return re.sub(r"\s+", " ", value.replace("{", "").replace("}", "").replace("--", "–").replace("\\&", "&")).strip()


def _citation(people: list[str], fields: Mapping[str, str]) -> str:
    """Return a citation as one line: people, title, where, volume, pages, year."""
    who = ", ".join(people[:-1]) + (" and " if len(people) > 1 else "") + people[-1] if people else ""
    where = fields.get("journal") or fields.get("booktitle") or fields.get("publisher") or ""
    volume = f"{where} {fields.get('volume', '')}".strip()
    pages = fields.get("pages", "")
    parts = [who, fields.get("title", ""), ", ".join(part for part in (volume, pages) if part)]
    year = f" ({fields['year']})" if "year" in fields else ""
    return ". ".join(part for part in parts if part) + year
