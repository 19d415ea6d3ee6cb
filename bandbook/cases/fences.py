"""From Markdown to prose and fenced blocks, with line numbers.

A fence is ours when its info string begins with one of :data:`WORDS` and it starts at the left margin (up to three
spaces, as CommonMark has it). Every other fence, and all that stands inside one, is left alone.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Final

from bandbook.errors import Problem
from bandbook.parameters import near

#: Info string → kind of block.
WORDS: Final = {
    "toml system": "system",
    "toml study": "study",
    "toml reference": "reference",
    "toml recorded": "recorded",
    "python workings": "workings",
}
_OPEN = re.compile(r"^( {0,3})(`{3,}|~{3,})([^\n]*)$")


@dataclass(frozen=True)
class Prose:
    """Markdown that is left as it is."""

    text: str
    line: int


@dataclass(frozen=True)
class Block:
    """A fenced block of ours.

    Attributes:
        kind: A value of :data:`WORDS`.
        line: Line of the opening fence, from 1.
        source: What stands inside.
        table: What TOML reads in it; empty for workings.
        lines: Key path → line in the file, for top-level keys and rows.
    """

    kind: str
    line: int
    source: str
    table: Mapping[str, Any] = field(default_factory=dict)
    lines: Mapping[tuple[str | int, ...], int] = field(default_factory=dict)

    @property
    def name(self) -> str | None:
        """The name that the block gives itself."""
        name = self.table.get("name")
        return name if isinstance(name, str) else None

    def line_of(self, key: tuple[str | int, ...]) -> int:
        """Return the line of the longest known beginning of a key path, otherwise of the fence."""
        for length in range(len(key), 0, -1):
            if key[:length] in self.lines:
                return self.lines[key[:length]]
        return self.line


def split(text: str, first: int) -> tuple[list[Prose | Block], list[Problem]]:
    """Split Markdown into prose and blocks.

    Args:
        text: The Markdown.
        first: The line of the file at which it begins, from 1.

    Returns:
        The parts in order, block tables not read yet; and an unclosed fence or a misspelt info string as problem, its
        ``line`` set.
    """
    parts: list[Prose | Block] = []
    problems: list[Problem] = []
    prose: list[str] = []
    lines = text.split("\n")
    number, began = 0, 0
    while number < len(lines):
        match = _OPEN.match(lines[number])
        if match is None or (match[2][0] == "`" and "`" in match[3]):
            prose.append(lines[number])
            number += 1
            continue
        end = _close(lines, number, match[2])
        info = " ".join(match[3].split())
        inside = lines[number + 1 : len(lines) if end is None else end]
        if end is None:
            problems.append(_unclosed(info).at("", first + number))
            end = len(lines) - 1
        problems += [problem.at("", first + number) for problem in _misspelt(info)]
        kind = _kind(info)
        if kind is None:
            prose += lines[number : end + 1]
        else:
            parts.append(Prose("\n".join(prose), first + began))
            parts.append(Block(kind, first + number, "\n".join(inside) + "\n"))
            prose, began = [], end + 1
        number = end + 1
    parts.append(Prose("\n".join(prose), first + began))
    return [part for part in parts if isinstance(part, Block) or part.text.strip()], problems


def _close(lines: list[str], opened: int, fence: str) -> int | None:
    closing = re.compile(rf"^ {{0,3}}{re.escape(fence[0])}{{{len(fence)},}}\s*$")
    return next((number for number in range(opened + 1, len(lines)) if closing.match(lines[number])), None)


def _kind(info: str) -> str | None:
    return WORDS.get(" ".join(info.split()[:2]))


def _unclosed(info: str) -> Problem:
    found = f'the fence "{info}" is not closed' if info else "a fence is not closed"
    return Problem(found, "a fence ends with a line of as many of its own signs", "add the closing line")


def _misspelt(info: str) -> list[Problem]:
    words = info.split()
    if len(words) < 2 or words[0].lower() not in {"toml", "python", "tml", "py"} or _kind(info):
        return []
    guess = near(" ".join(words[:2]), WORDS)
    if not guess:
        return []
    allowed = "blocks are " + ", ".join(f'"{word}"' for word in WORDS)
    return [Problem(f'unknown block "{info}"', allowed, guess)]
