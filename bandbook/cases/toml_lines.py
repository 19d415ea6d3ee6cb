"""TOML with the lines that keys and rows stand on, and its mistakes at their line of the file."""

import re
import tomllib
from collections.abc import Mapping
from typing import Any

from bandbook.errors import Problem

Lines = dict[tuple[str | int, ...], int]
_KEY = re.compile(
    r"""^\s*((?:"[^"]*"|'[^']*'|[A-Za-z0-9_-]+)(?:\s*\.\s*(?:"[^"]*"|'[^']*'|[A-Za-z0-9_-]+))*)\s*=(?!=)"""
)
_HEAD = re.compile(r"^\s*(\[\[?)\s*([^\[\]]+?)\s*\]\]?\s*(?:#.*)?$")
_COMMA = re.compile(r"=\s*[-+]?\d+,\d+\s*(?:#.*)?$")


def read_toml(source: str, fence: int) -> tuple[dict[str, Any], Lines, list[Problem]]:
    """Read a TOML block.

    Args:
        source: The block's text.
        fence: The line of the file before its first line.

    Returns:
        The table (empty when it is no TOML), the line of each top-level key and row, and what is wrong, placed.
    """
    try:
        table = tomllib.loads(source)
    except tomllib.TOMLDecodeError as error:
        return {}, {}, [_syntax(str(error), source, fence)]
    except (RecursionError, ValueError) as error:
        return {}, {}, [Problem(f"the block cannot be read: {error}", "TOML", "simplify it").at("", fence)]
    lines = find_lines(source, fence)
    return table, lines, _not_finite(table, lines, fence)


def _syntax(message: str, source: str, fence: int) -> Problem:
    match = re.search(r"\(at line (\d+), column (\d+)\)", message)
    all_lines = source.split("\n")
    number = int(match[1]) if match else max(1, len(all_lines) - 1)
    what = re.sub(r"\s*\(at .*\)$", "", message)
    text = all_lines[number - 1].strip() if number <= len(all_lines) else ""
    place = fence + min(number, max(1, len(all_lines) - 1))
    if _COMMA.search(text):
        wanted = text.split("#")[0].strip().replace(",", ".")
        found = f'a decimal comma in "{text}"'
        return Problem(found, "the decimal sign is a point", f"write {wanted}").at("", place)
    found = f'"{text}" is no TOML ({what})' if text else f"no TOML ({what})"
    return Problem(found, "a line is key = value, text in quotes, each key once", "correct the line").at("", place)


def _not_finite(table: Mapping[str, Any], lines: Lines, fence: int) -> list[Problem]:
    """Return nothing: numbers are judged by their fields; dates, which no field takes, are named here."""
    problems = []
    for key, value in table.items():
        if hasattr(value, "isoformat"):
            found = f"found the date or time {value}"
            problems.append(
                Problem(found, "no key here takes one", "put it in quotes", (key,)).at("", lines.get((key,), fence))
            )
    return problems


def find_lines(source: str, fence: int) -> Lines:
    """Return the line in the file of every top-level key, table head and row of a multi-line array."""
    lines: Lines = {}
    prefix: tuple[str | int, ...] = ()
    counts: dict[str, int] = {}
    key: tuple[str | int, ...] = ()
    depth, row = 0, 0
    for number, text in enumerate(source.split("\n"), start=fence + 1):
        bare = _without_strings(text)
        if depth == 0 and (head := _HEAD.match(text)):
            name = head[2].strip().strip("\"'")
            prefix = (name,)
            if head[1] == "[[":
                counts[name] = counts.get(name, -1) + 1
                prefix = (name, counts[name])
            lines.setdefault((name,), number)
            lines.setdefault(prefix, number)
            continue
        if depth == 0 and (match := _KEY.match(text)):
            key, row = (*prefix, *_key_parts(match[1])), 0
            lines.setdefault(key, number)
            lines.setdefault(key[:1], number)
        elif depth == 1 and bare.strip().startswith(("{", "[", "+", "-", *"0123456789", '"')):
            lines.setdefault((*key, row), number)
        if depth >= 1 or "[" in bare.partition("=")[2]:
            row += _rows_ended(bare, depth)
        depth = max(0, depth + bare.count("[") + bare.count("{") - bare.count("]") - bare.count("}"))
    return lines


def _rows_ended(bare: str, depth: int) -> int:
    """Return how many rows of the array end on this line: commas at the array's own depth."""
    ended = 0
    for sign in bare.partition("=")[2] if depth == 0 else bare:
        if sign in "[{":
            depth += 1
        elif sign in "]}":
            depth -= 1
        elif sign == "," and depth == 1:
            ended += 1
    return ended


def _without_strings(text: str) -> str:
    """Return a line without its strings and comment, so that brackets can be counted."""
    return re.sub(r'"(?:\\.|[^"\\])*"|\'[^\']*\'', '""', text).partition("#")[0]


def _key_parts(text: str) -> tuple[str, ...]:
    parts = re.findall(r'"([^"]*)"|\'([^\']*)\'|([A-Za-z0-9_-]+)', text)
    return tuple(next(part for part in parts_of if part) if any(parts_of) else "" for parts_of in parts)
