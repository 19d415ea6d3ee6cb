"""From the text of a case file to a Case with line numbers; what is wrong is collected, never raised."""

import re
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Final

from bandbook.cases.fences import Block, Prose, split
from bandbook.cases.front import FrontMatter, read_front
from bandbook.cases.toml_lines import read_toml
from bandbook.errors import Problem

ID: Final = re.compile(r"[a-z0-9][a-z0-9.-]*(?:/[a-z0-9][a-z0-9.-]*)*\Z")
RESERVED: Final = frozenset({"index", "figures", "tables"})
#: A case file is prose and numbers; anything larger is a mistake.
MOST_BYTES: Final = 5_000_000


@dataclass(frozen=True)
class Case:
    """One case file as it was read.

    Attributes:
        id: The path below ``cases/`` without ``.md``.
        file: The path from the book's folder, with ``/``.
        front: Its front matter.
        parts: Prose and blocks in file order.
        problems: What is wrong with its form, placed.
    """

    id: str
    file: str
    front: FrontMatter = field(default_factory=FrontMatter)
    parts: tuple[Prose | Block, ...] = ()
    problems: tuple[Problem, ...] = ()

    @property
    def blocks(self) -> tuple[Block, ...]:
        """The blocks in file order."""
        return tuple(part for part in self.parts if isinstance(part, Block))

    def of_kind(self, kind: str) -> tuple[Block, ...]:
        """Return the blocks of one kind."""
        return tuple(block for block in self.blocks if block.kind == kind)


def read_case(path: Path, *, identity: str, file: str) -> Case:
    """Read a case file.

    Args:
        path: Where it lies.
        identity: Its id.
        file: How messages name it.
    """
    text, problems = read_text(path)
    problems += _identity(identity)
    if text is None:
        return Case(identity, file, problems=tuple(problem.at(file, problem.line or 1) for problem in problems))
    return case_of(text, identity=identity, file=file, problems=problems)


def case_of(text: str, *, identity: str, file: str, problems: list[Problem] | None = None) -> Case:
    """Return the Case of a text."""
    found = list(problems or [])
    if not text.strip():
        found.append(
            Problem("the file is empty", "front matter, a system and a study", "write the case or remove the file")
        )
        return Case(identity, file, problems=tuple(problem.at(file, 1) for problem in found))
    front, rest, first, wrong = read_front(text)
    parts, unclosed = split(rest, first)
    found += [*wrong, *unclosed]
    read: list[Prose | Block] = []
    for part in parts:
        if isinstance(part, Block) and part.kind != "workings":
            table, lines, mistakes = read_toml(part.source, part.line)
            found += mistakes
            part = replace(part, table=table, lines=lines)  # noqa: PLW2901 - the block with what stands in it
        read.append(part)
    placed = sorted((problem.at(file, problem.line or 1) for problem in found), key=lambda problem: problem.line)
    return Case(identity, file, front, tuple(read), tuple(placed))


def read_text(path: Path) -> tuple[str | None, list[Problem]]:
    """Read a text file of the book: UTF-8, with or without a byte order mark, any line ends."""
    try:
        if not path.is_file():
            return None, [Problem("it is no file", "a text file", "remove it or put a file there").at("", 1)]
        if path.stat().st_size > MOST_BYTES:
            return None, [Problem("it is larger than 5 MB", "text", "put data into content/data").at("", 1)]
        data = path.read_bytes()
    except OSError as error:
        return None, [Problem(f"it cannot be read: {error.strerror}", "a text file", "check its rights").at("", 1)]
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        found = f"byte {data[error.start]:#04x} is no UTF-8"
        return None, [Problem(found, "text files are UTF-8", "save the file as UTF-8").at("", line)]
    return text.replace("\r\n", "\n").replace("\r", "\n"), []


def _identity(identity: str) -> list[Problem]:
    problems = []
    if not ID.match(identity):
        allowed = "small letters, digits, points and hyphens, / between folders"
        problems.append(Problem(f'the file name gives the id "{identity}"', allowed, "rename the file"))
    if RESERVED & set(identity.split("/")):
        allowed = "index, figures and tables are names of the book's own"
        problems.append(Problem(f'the id "{identity}" is reserved', allowed, "rename the file"))
    return problems
