"""A measured series that a study compares with: a CSV file of the book, checked by the host and put into the study."""

import csv
import io
import math
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from bandbook.cases.embed import text_of_book
from bandbook.errors import Problem
from bandbook.parameters import near, shortened

_DECIMAL = "a number with a point as decimal sign"


def with_series(table: Mapping[str, Any], content: Path) -> tuple[dict[str, Any], list[Problem]]:
    """Return a study in which the numbers of its measured series stand in the place of the file's name.

    Args:
        table: The study block.
        content: The content folder.

    Returns:
        The study; and the problems, those of the file placed at its own line.
    """
    measured = table.get("measured")
    if not isinstance(measured, Mapping) or not isinstance(measured.get("file"), str):
        return dict(table), []
    file = measured["file"]
    text, problems = text_of_book(file, content)
    if text is None:
        return {**table, "measured": _stand_in(measured)}, [problem.below("measured", "file") for problem in problems]
    numbers, wrong = _read(text, measured)
    placed = [problem.at(f"content/{file}", problem.line or 1) for problem in wrong]
    return {**table, "measured": {**measured, **(numbers or _stand_in(measured))}}, placed


def _stand_in(measured: Mapping[str, Any]) -> dict[str, Any]:
    """Return numbers that let the rest of the block be checked."""
    return {**measured, "lengths": [*range(1, 13)], "gaps": [1.0] * 12}


def _read(text: str, measured: Mapping[str, Any]) -> tuple[dict[str, Any] | None, list[Problem]]:
    lines = [
        (number, line) for number, line in enumerate(text.splitlines(), start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]  # fmt: skip
    if not lines:
        return None, [Problem("the file has no rows", "a head and a row a length", "write them")]
    rows = [(number, next(csv.reader(io.StringIO(line)))) for number, line in lines]
    (first, head), *body = rows
    names = [name.strip() for name in head]
    wanted = {"lengths": measured.get("length", "N"), "gaps": measured.get("gap", "gap")}
    if measured.get("u") is not None:
        wanted["errors"] = measured["u"]
    problems = [
        Problem(f'no column "{shortened(str(name))}"', "columns are " + ", ".join(f'"{one}"' for one in names),
                near(str(name), names) or "name one of them in the study, or add it", line=first)
        for name in wanted.values() if name not in names
    ]  # fmt: skip
    if problems:
        return None, problems
    numbers: dict[str, list[Any]] = {key: [] for key in wanted}
    for number, row in body:
        if len(row) != len(names):
            found = f"{len(row)} cells in a table of {len(names)} columns"
            problems.append(Problem(found, "one cell a column", "correct the row", line=number))
            continue
        for key, name in wanted.items():
            value, wrong = _number(row[names.index(name)], name, is_length=key == "lengths")
            numbers[key].append(value)
            problems += [Problem(*wrong, line=number)] if wrong else []
    problems += _twice(numbers["lengths"], [number for number, _ in body]) if not problems else []
    return (None if problems else numbers), problems


def _number(text: str, name: str, *, is_length: bool) -> tuple[float | int | None, tuple[str, str, str] | None]:
    text = text.strip()
    shown = f'"{shortened(text)}" in the column "{name}"'
    try:
        value = float(text)
    except ValueError:
        remedy = f"write {text.replace(',', '.')}" if "," in text else "correct it"
        return None, (shown, _DECIMAL, remedy)
    if not math.isfinite(value) or value <= 0:
        return None, (shown, "a finite number above 0", "correct it, or leave the row out")
    if is_length and not value.is_integer():
        return None, (shown, "a whole number of cells", "correct it")
    return (int(value) if is_length else value), None


def _twice(lengths: list[Any], lines: list[int]) -> list[Problem]:
    return [
        Problem(f"the length {length} stands twice", "each length once", "take the mean, or leave one out", line=line)
        for number, (length, line) in enumerate(zip(lengths, lines, strict=True)) if length in lengths[:number]
    ]  # fmt: skip
