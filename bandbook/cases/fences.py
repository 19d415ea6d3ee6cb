"""From Markdown to prose and fenced blocks, with line numbers.

A fence is ours when its info string begins with one of :data:`WORDS` and it stands at the left margin (up to three
spaces, as CommonMark has it; three backquotes or tildes, or more). Every other fence, all that stands inside one, and
an HTML comment are left alone. A fence of ours inside a list, a quotation or an indented text would be lost in silence:
it is a mistake, and so is one whose info string is nearly ours.
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
_LANGUAGE: Final = {kind: words.split()[0] for words, kind in WORDS.items()}
_LANGUAGES: Final = frozenset(_LANGUAGE.values())
_SHORT: Final = {"py": "python", "python3": "python", "ipython": "python", "tml": "toml"}
_OPEN = re.compile(r"^( {0,3})(`{3,}|~{3,})([^\n]*)$")
_INSIDE = re.compile(r"^((?:[ \t]|>|[-*+][ \t]|\d{1,9}[.)][ \t])+)(`{3,}|~{3,})([^\n]*)$")
_COMMENT = re.compile(r"^ {0,3}<!--")


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
        lines: Key path → line in the file, for keys and rows.
        is_broken: Whether it is not closed, misspelt or no TOML; its table then holds what could be read.
    """

    kind: str
    line: int
    source: str
    table: Mapping[str, Any] = field(default_factory=dict)
    lines: Mapping[tuple[str | int, ...], int] = field(default_factory=dict)
    is_broken: bool = False

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
        The parts in order, block tables not read yet; and unclosed, misplaced and misspelt fences as problems, their
        ``line`` set.
    """
    splitter = _Splitter(text.split("\n"), first)
    number = 0
    while number < len(splitter.lines):
        number = splitter.step(number)
    splitter.flush(number)
    return splitter.parts, splitter.problems


class _Splitter:
    """Walks over the lines; ``step`` reads what begins at a line and returns the line after it."""

    def __init__(self, lines: list[str], first: int) -> None:
        self.lines, self.first = lines, first
        self.parts: list[Prose | Block] = []
        self.problems: list[Problem] = []
        self._began = 0

    def step(self, number: int) -> int:
        """Read a fence, a comment or a line of prose."""
        line = self.lines[number]
        if match := _OPEN.match(line):
            return number + 1 if _is_inline(match) else self._fence(number, match)
        if match := _INSIDE.match(line):
            return number + 1 if _is_inline(match) else self._inside(number, match)
        if _COMMENT.match(line):
            ends = (at for at in range(number, len(self.lines)) if "-->" in self.lines[at])
            return next(ends, len(self.lines) - 1) + 1
        return number + 1

    def flush(self, end: int) -> None:
        """Keep the prose that ends before a line."""
        text = "\n".join(self.lines[self._began : end])
        if text.strip():
            self.parts.append(Prose(text, self.first + self._began))

    def _fence(self, number: int, match: re.Match[str]) -> int:
        info = " ".join(match[3].split())
        end, is_closed = self._end(number, match[2])
        kind, wrong = kind_of(info), misspelt(info)
        if not is_closed:
            self.problems.append(_unclosed(info).at("", self.first + number))
        if wrong:
            kind, problem = wrong
            self.problems.append(problem.at("", self.first + number))
        after = end + 1 if is_closed else end
        if kind:
            inside = [_outdented(line, len(match[1])) for line in self.lines[number + 1 : end]]
            self.flush(number)
            source = "\n".join(inside) + "\n"
            is_broken = not is_closed or wrong is not None
            self.parts.append(Block(kind, self.first + number, source, is_broken=is_broken))
            self._began = after
        return after

    def _end(self, opened: int, fence: str) -> tuple[int, bool]:
        """Return the closing line; or, with ``False``, where another block of ours begins or the text ends."""
        closing = re.compile(rf"^ {{0,3}}{re.escape(fence[0])}{{{len(fence)},}}[ \t]*$")
        for number in range(opened + 1, len(self.lines)):
            if closing.match(self.lines[number]):
                return number, True
            again = _OPEN.match(self.lines[number])
            if again and again[2].startswith(fence) and kind_of(" ".join(again[3].split())):
                return number, False
        return len(self.lines), False

    def _inside(self, number: int, match: re.Match[str]) -> int:
        """Pass over a fence inside a list, a quotation or an indented text."""
        info = " ".join(match[3].split())
        if kind_of(info):
            found = f'the block "{info}" stands inside a list, a quotation or an indented text'
            remedy = "move it to the left margin, or put a longer fence around an example"
            self.problems.append(Problem(found, "blocks stand at the left margin", remedy).at("", self.first + number))
        closing = re.compile(rf"^[ \t>]+{re.escape(match[2][0])}{{{len(match[2])},}}[ \t]*$")
        for end in range(number + 1, len(self.lines)):
            if closing.match(self.lines[end]):
                return end + 1
            again = _OPEN.match(self.lines[end])
            if again and kind_of(" ".join(again[3].split())):
                break  # a block of ours stands outside, so the list or quotation has ended
        return number + 1


def _is_inline(match: re.Match[str]) -> bool:
    """Return whether these backquotes are code in a line of prose: a backquote stands in the info string."""
    return match[2][0] == "`" and "`" in match[3]


def _outdented(line: str, width: int) -> str:
    """Return a line without as much of its indentation as its fence has."""
    spaces = len(line) - len(line.lstrip(" "))
    return line[min(width, spaces) :]


def kind_of(info: str) -> str | None:
    """Return the kind of block that an info string opens, or nothing.

    >>> kind_of("toml study"), kind_of("toml")
    ('study', None)
    """
    return WORDS.get(" ".join(info.split()[:2]))


def _unclosed(info: str) -> Problem:
    found = f'the fence "{info}" is not closed' if info else "a fence is not closed"
    return Problem(found, "a fence ends with a line of as many of its own signs", "add the closing line")


def misspelt(info: str) -> tuple[str, Problem] | None:
    """Return the kind of block that a nearly right info string means, and its problem; nothing for any other.

    >>> misspelt("toml sytem")[0], misspelt("toml settings"), misspelt("python")
    ('system', None, None)
    """
    if kind_of(info):
        return None
    words = [word for word in re.split(r"[\s_:.,;{}=#-]+", info.lower()) if word][:2]
    kind = _meant(words)
    if kind is None:
        return None
    allowed = "blocks are " + ", ".join(f'"{word}"' for word in WORDS)
    return kind, Problem(f'unknown block "{info}"', allowed, f'did you mean "{_LANGUAGE[kind]} {kind}"?')


def _meant(words: list[str]) -> str | None:
    """Return the kind that one or two words of an info string mean."""
    if len(words) == 1:
        return next((kind for kind, language in _LANGUAGE.items() if words[0] in {kind, language + kind}), None)
    for language, word in (words, words[::-1]) if len(words) == 2 else ():
        spoken = _SHORT.get(language, language)
        guess = word if word in _LANGUAGE else _near(word, _LANGUAGE)
        is_right = guess is not None and spoken == _LANGUAGE[guess]
        is_nearly = word in _LANGUAGE and (spoken in _LANGUAGES or _near(spoken, _LANGUAGES) == _LANGUAGE[word])
        if is_right or is_nearly:
            return guess
    return None


def _near(word: str, known: Mapping[str, str] | frozenset[str]) -> str | None:
    match = re.search(r'"(\w+)"', near(word, list(known)))
    return match[1] if match else None
