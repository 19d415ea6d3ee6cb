"""TOML with the lines that keys and rows stand on, and its mistakes at their line of the file."""

import re
import tomllib
from bisect import bisect_right
from contextlib import suppress
from typing import Any, Final

from bandbook.errors import Problem

Key = tuple[str | int, ...]
Lines = dict[Key, int]

#: After so many mistakes of syntax a block is read no further.
MOST_TOLD: Final = 10
#: A longer line is not searched for habits.
MOST_QUOTED: Final = 300
_ALLOWED = "a line is key = value, text in quotes, each key once"
_VALUE = r"(?P<key>[\w\s.\"'-]+?)\s*=\s*"
#: What authors write by habit → what is told: (pattern of the line, found, allowed, remedy).
_HABITS: Final = tuple(
    (re.compile(pattern), found, allowed, remedy)
    for pattern, found, allowed, remedy in (
        (r"(?P<whole>.*=\s*[-+]?\d+,\d+.*)", "a decimal comma", "the decimal sign is a point", "write {point}"),
        (r"(?P<whole>.*[=,\[]\s*−\s*[\d.].*)", "a typeset minus sign", "the sign of a number is -", "write {minus}"),
        (_VALUE + r"(?P<number>[-+]?\d[\d.eE+-]*)\s*(?P<unit>eV|Å|°|%|nm|beta|β)\s*$", "a unit after the number",
         "a number stands alone", "write {key} = {number}"),
        (_VALUE + r"(?P<sign>[-+]?)\.(?P<number>\d+)\s*$", "a number that begins with its point",
         "a digit stands on both sides of the point", "write {key} = {sign}0.{number}"),
        (_VALUE + r"(?P<number>[-+]?\d+)\.\s*$", "a number that ends with its point",
         "a digit stands on both sides of the point", "write {key} = {number}.0"),
        (_VALUE + r"(?P<flag>True|False|TRUE|FALSE)\s*$", "a boolean with capital letters", "true or false",
         "write {key} = {lower}"),
        (_VALUE + r"(?P<text>(?!true$|false$|inf$|nan$)[A-Za-z@][\w.-]*)$", "a text without quotes", _ALLOWED,
         'write {key} = "{text}"'),
        (r"(?P<key>[A-Za-z_][\w-]*)\s*:\s*(?P<text>\S.*)$", "a colon after a key", _ALLOWED, "write {key} = {text}"),
    )
)  # fmt: skip


def read_toml(source: str, fence: int) -> tuple[dict[str, Any], Lines, list[Problem]]:
    """Read a TOML block.

    Args:
        source: The block's text.
        fence: The line of the file before its first line.

    Returns:
        The table, the line of each key and row, and every mistake of syntax, placed; with mistakes the table holds what
        could be read without their lines.
    """
    lines = source.split("\n")
    problems: list[Problem] = []
    while len(problems) < MOST_TOLD:
        text = "\n".join(lines)
        try:
            table = tomllib.loads(text)
        except tomllib.TOMLDecodeError as error:
            number, is_whole_line = _line_of(str(error), text)
            if problems and not re.match(r"\s*[\w\"'.-]+\s*[=:]", lines[number - 1]):
                break  # what follows from a line that was left out is no mistake of its own
            problems.append(_syntax(str(error), lines[number - 1].strip()).at("", fence + number))
            if not is_whole_line or lines[number - 1].lstrip().startswith("["):
                break
            lines[number - 1] = ""
        except (RecursionError, ValueError) as error:
            problems.append(_unreadable(error).at("", fence + _longest(lines)))
            break
        else:
            return table, find_lines(text, fence), problems
    return {}, {}, problems


def _line_of(message: str, text: str) -> tuple[int, bool]:
    """Return the line of a mistake, from 1, and whether the text can be read on without that line."""
    match = re.search(r"\(at line (\d+), column (\d+)\)", message)
    if match is None:
        return find_unfinished(text), False
    number = int(match[1])
    return number, bool(text.split("\n")[number - 1].strip())


def _longest(lines: list[str]) -> int:
    return max(range(len(lines)), key=lambda number: len(lines[number])) + 1


def _unreadable(error: Exception) -> Problem:
    what = "nested too deeply" if isinstance(error, RecursionError) else "with a number of too many digits"
    return Problem(f"a block {what}", "numbers of up to 4,300 digits, in rows of tables", "simplify it")


def _syntax(message: str, text: str) -> Problem:
    what = re.sub(r"\s*\(at .*\)$", "", message)
    if re.search(r"Cannot (?:overwrite|declare|mutate|redefine)|Duplicate", what):
        named = re.search(r"'([^']*)'", what)
        key = named[1] if named else text.partition("=")[0].strip()
        return Problem(f'the key "{key}" stands twice', "each key once", "remove one of the two")
    bare = re.sub(r"\s+#.*$", "", text) if len(text) < MOST_QUOTED else ""
    for pattern, found, allowed, remedy in _HABITS:
        if match := pattern.match(bare):
            return Problem(f'{found} in "{_short(text)}"', allowed, remedy.format_map(_parts(match)))
    found = f'"{_short(text)}" is no TOML ({what})' if text else f"no TOML ({what})"
    return Problem(found, _ALLOWED, "correct the line")


def _parts(match: re.Match[str]) -> dict[str, str]:
    """Return what a remedy may quote of a line."""
    parts = {name: (value or "").strip() for name, value in match.groupdict().items()}
    whole = parts.get("whole", "")
    point = re.sub(r"(?<==)(\s*[-+]?\d+),(?=\d)", r"\1.", whole)
    return {**parts, "point": point, "minus": whole.replace("−", "-"), "lower": parts.get("flag", "").lower()}


def _short(text: str) -> str:
    return text if len(text) <= 60 else text[:59] + "…"


def find_lines(source: str, fence: int) -> Lines:
    r"""Return the line in the file of every key, table head and row of an array in a text that is TOML.

    >>> find_lines('a = 1\nb = [\n  { x = 1 },\n  2,\n]\n', 10)
    {('a',): 11, ('b',): 12, ('b', 0): 13, ('b', 1): 14}
    """
    scanner = _Scanner(source, fence)
    with suppress(IndexError, RecursionError):  # a key without a line is placed at its block's fence
        scanner.run()
    return scanner.lines


def find_unfinished(source: str) -> int:
    """Return the line, from 1, of the statement that the end of the text cuts off."""
    scanner = _Scanner(source.rstrip(), 0)
    with suppress(IndexError, RecursionError):
        scanner.run()
    return scanner.line_at(scanner.began)


_BLANK = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_KEY = re.compile(r"""[ \t]*(?:"((?:\\.|[^"\\\n])*)"|'([^'\n]*)'|([\w-]+))[ \t]*""")
_STRING = re.compile(
    r'"""(?:\\.|[^\\])*?"{3,5}(?!")'
    r"|'''.*?'{3,5}(?!')"
    r'|"(?!"")(?:\\.|[^"\\\n])*"'
    r"|'(?!'')[^'\n]*'",
    re.DOTALL,
)
_BARE = re.compile(r"[^,\]}#\n\"'\[{]+")


class _Scanner:
    """Walks over a text that is TOML and notes where its keys and rows begin.

    Attributes:
        lines: Key path → line in the file.
        began: Where the statement begins that is being read.
    """

    def __init__(self, text: str, fence: int) -> None:
        self.lines: Lines = {}
        self.began = 0
        self._text, self._fence, self._place = text, fence, 0
        self._ends = [match.start() for match in re.finditer("\n", text)]
        self._prefix: Key = ()
        self._rows: dict[Key, int] = {}

    def line_at(self, place: int) -> int:
        """Return the line in the file of a place in the text."""
        return self._fence + bisect_right(self._ends, place - 1) + 1

    def run(self) -> None:
        """Read every statement.

        Raises:
            IndexError: The text ends in the middle of a statement, or is no TOML.
        """
        self._skip(_BLANK)
        while self._place < len(self._text):
            self.began = self._place
            if self._text[self._place] == "[":
                self._head()
            else:
                path = self._path((*self._prefix, *self._keys("=")))
                self._note(path)
                self._value(path)
            self._skip(_BLANK)

    def _skip(self, pattern: re.Pattern[str]) -> None:
        match = pattern.match(self._text, self._place)
        if match is None:
            raise IndexError
        self._place = match.end()

    def _keys(self, end: str) -> tuple[str, ...]:
        """Read a dotted key and the sign that ends it."""
        keys = []
        while True:
            match = _KEY.match(self._text, self._place)
            if match is None:
                raise IndexError
            keys.append(next(part for part in match.groups() if part is not None))
            self._place = match.end()
            sign = self._text[self._place]
            self._place += 1
            if sign == end:
                return tuple(keys)
            if sign != ".":
                raise IndexError

    def _head(self) -> None:
        is_row = self._text.startswith("[[", self._place)
        self._place += 2 if is_row else 1
        keys = self._keys("]")
        self._place += is_row
        path = (*self._path(keys[:-1]), keys[-1])
        if is_row:
            self._rows[path] = self._rows.get(path, -1) + 1
            path = (*path, self._rows[path])
        self._prefix = self._path(path)
        self._note(self._prefix)

    def _path(self, keys: Key) -> Key:
        """Return a key path with the number of the row after each array of tables."""
        path: Key = ()
        for key in keys:
            path = (*path, key)
            is_numbered = len(path) < len(keys) and isinstance(keys[len(path)], int)
            if path in self._rows and not is_numbered:
                path = (*path, self._rows[path])
        return path

    def _note(self, path: Key) -> None:
        line = self.line_at(self.began)
        for length in range(1, len(path) + 1):
            self.lines.setdefault(path[:length], line)

    def _value(self, path: Key | None) -> None:
        """Read a value; of an array that stands at ``path`` note the rows."""
        self._skip(_BLANK)
        sign = self._text[self._place]
        if sign in "\"'":
            self._skip(_STRING)
        elif sign == "[":
            self._array(path)
        elif sign == "{":
            self._table()
        else:
            self._skip(_BARE)

    def _array(self, path: Key | None) -> None:
        self._place += 1
        row = 0
        while self._next("]"):
            if path is not None:
                self.lines.setdefault((*path, row), self.line_at(self._place))
            self._value(None)
            row += 1

    def _table(self) -> None:
        self._place += 1
        while self._next("}"):
            self._keys("=")
            self._value(None)

    def _next(self, end: str) -> bool:
        """Return whether another entry follows before the sign that ends an array or table."""
        self._skip(_BLANK)
        if self._text[self._place] == ",":
            self._place += 1
            self._skip(_BLANK)
        if self._text[self._place] != end:
            return True
        self._place += 1
        return False
