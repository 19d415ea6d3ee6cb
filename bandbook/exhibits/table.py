"""A table: columns with unit and meaning, rows of plain values, one reading as CSV and one as HTML."""

import csv
import html
import io
from dataclasses import dataclass
from typing import Any

from bandbook.exhibits.quantity import fixed, typeset

Cell = float | int | str | bool | None


@dataclass(frozen=True)
class Column:
    """One column.

    Attributes:
        name: Its name in the CSV, ``snake_case``.
        label: Its head on the page.
        meaning: One line.
        unit: Unit, once in the head; empty for a plain number or text.
        decimals: Decimals stored in the CSV; ``None`` for text and whole numbers.
        shown: Decimals shown on the page; ``None`` for text and whole numbers.
    """

    name: str
    label: str
    meaning: str
    unit: str = ""
    decimals: int | None = None
    shown: int | None = None


@dataclass(frozen=True)
class Table:
    """Rows under columns.

    Attributes:
        name: File name without ending, unique in its study, such as ``"levels"``.
        caption: One sentence.
        columns: The heads.
        rows: One value a column: number, text, or ``None`` where there is no answer.
        most_shown: Rows that a page shows; all of them stand in the CSV.
    """

    name: str
    caption: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[Cell, ...], ...]
    most_shown: int = 14

    def __post_init__(self) -> None:
        rows = tuple(
            tuple(_stored(cell, column) for cell, column in zip(row, self.columns, strict=True)) for row in self.rows
        )
        object.__setattr__(self, "rows", rows)

    def to_csv(self) -> str:
        """Return the table as CSV: heads ``name`` or ``name (unit)``, decimal points, nothing for no answer."""
        out = io.StringIO()
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow([f"{column.name} ({column.unit})" if column.unit else column.name for column in self.columns])
        writer.writerows(
            [_plain(cell, column) for cell, column in zip(row, self.columns, strict=True)] for row in self.rows
        )
        return out.getvalue()

    def to_html(self) -> str:
        """Return the table as HTML: caption, heads with scope and unit, numbers typeset."""
        heads = "".join(
            f'<th scope="col" title="{html.escape(column.meaning)}">{_head(column)}</th>' for column in self.columns
        )
        body = "".join(
            "<tr>" + "".join(_td(cell, column) for cell, column in zip(row, self.columns, strict=True)) + "</tr>"
            for row in self.rows[: self.most_shown]
        )
        more = len(self.rows) - self.most_shown
        caption = html.escape(self.caption) + (
            f" First {self.most_shown} of {len(self.rows)} rows; all are in the CSV." if more > 0 else ""
        )
        head = f"<caption>{caption}</caption><thead><tr>{heads}</tr></thead>"
        return f"<table data-table>{head}<tbody>{body}</tbody></table>"

    def as_dict(self) -> dict[str, Any]:
        """Return what a page needs besides the CSV: plain JSON."""
        return {"name": self.name, "caption": self.caption, "csv": self.to_csv(), "html": self.to_html()}


def _stored(cell: Any, column: Column) -> Cell:
    """Return a plain value with the column's decimals; numbers of numpy become Python's."""
    plain: Cell = cell.item() if hasattr(cell, "item") else cell
    if isinstance(plain, str):
        return plain.replace("\r\n", "\n").replace("\r", "\n")
    if plain is None or isinstance(plain, bool):
        return plain
    if column.decimals is not None:
        return fixed(plain, column.decimals)
    whole = fixed(plain, 0)
    if whole is not None and whole != plain:
        raise ValueError(f"{plain} in the column {column.name!r}, which has no decimals; give it decimals")
    return None if whole is None else int(plain)


def _plain(cell: Cell, column: Column) -> str:
    if cell is None:
        return ""
    if isinstance(cell, bool):
        return "yes" if cell else "no"
    if isinstance(cell, str) or column.decimals is None:
        return str(cell)
    return f"{float(cell):.{column.decimals}f}"


def _head(column: Column) -> str:
    label = html.escape(column.label)
    return f"{label} <small>{html.escape(column.unit)}</small>" if column.unit else label


def _td(cell: Cell, column: Column) -> str:
    if isinstance(cell, str):
        return f"<td>{html.escape(cell)}</td>"
    if isinstance(cell, bool):
        return f"<td>{'yes' if cell else 'no'}</td>"
    shown = column.shown if column.shown is not None else column.decimals if column.decimals is not None else 0
    return f"<td data-number>{typeset(cell, shown)}</td>"
