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
RESERVED: Final = (
    "index",
    "figures",
    "tables",
    "index.md",
    "index.html",
    "record.json",
    "notebook.ipynb",
    "quantities.csv",
)
#: A file of the book is prose and numbers; anything larger is a mistake.
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
    parts, misplaced = split(rest, first)
    read = [_read_part(part) for part in parts]
    found += [*wrong, *misplaced, *(problem for _, mistakes in read for problem in mistakes)]
    placed = sorted((problem.at(file, problem.line or 1) for problem in found), key=lambda problem: problem.line)
    return Case(identity, file, front, tuple(part for part, _ in read), tuple(placed))


def _read_part(part: Prose | Block) -> tuple[Prose | Block, list[Problem]]:
    """Return a block with what TOML reads in it; of one whose fence is wrong, that is the one mistake told."""
    if isinstance(part, Prose) or part.kind == "workings":
        return part, []
    table, lines, mistakes = read_toml(part.source, part.line)
    is_broken = part.is_broken or bool(mistakes)
    return replace(part, table=table, lines=lines, is_broken=is_broken), [] if part.is_broken else mistakes


def read_text(path: Path) -> tuple[str | None, list[Problem]]:
    """Read a text file of the book: UTF-8, with or without a byte order mark, any line ends."""
    try:
        if not path.is_file():
            remedy = "remove it, or put a file there"
            return None, [Problem("it is no file", "a text file of this name", remedy).at("", 1)]
        if path.stat().st_size > MOST_BYTES:
            return None, [Problem("it is larger than 5 MB", "prose and numbers", "shorten it").at("", 1)]
        data = path.read_bytes()
    except (OSError, ValueError) as error:
        found = f"it cannot be read: {getattr(error, 'strerror', None) or error}"
        return None, [Problem(found, "a text file that the command may read", "check its name and rights").at("", 1)]
    try:
        text = data.decode("utf-8-sig")
        bad = data.index(0) if 0 in data else -1
    except UnicodeDecodeError as error:
        text, bad = "", data.startswith(b"\xef\xbb\xbf") * 3 + error.start
    if bad >= 0:
        found = f"the byte {data[bad]:#04x} is no UTF-8 text"
        line = len(re.findall(rb"\r\n|\r|\n", data[:bad])) + 1
        return None, [Problem(found, "text files are UTF-8", "save the file as UTF-8").at("", line)]
    return text.replace("\r\n", "\n").replace("\r", "\n"), []


def _identity(identity: str) -> list[Problem]:
    if not ID.match(identity):
        found = f'the file name gives the id "{identity}"'
        allowed = "small letters a to z, digits, points and hyphens, / between folders"
        return [Problem(found, allowed, "rename the file")]
    taken = [part for part in identity.split("/") if part in RESERVED]
    if taken:
        allowed = "these names are the book's own: " + ", ".join(RESERVED)
        return [Problem(f'the id "{identity}" uses the name "{taken[0]}"', allowed, "rename the file or folder")]
    return []
