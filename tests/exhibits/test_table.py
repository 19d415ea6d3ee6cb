"""A table reads the same as CSV and as HTML, holds plain values only, and shows every unit once."""

import csv
import html.parser
import io
import json
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from bandbook.exhibits import Column, Table
from bandbook.exhibits.table import Cell

COLUMNS = (
    Column("n", "n", "number of the level"),
    Column("energy", "E", 'energy of "the" level & more', "eV", 6, 4),
    Column("open", "open shell", "whether it is one"),
    Column("remark", "remark", "why a value is missing"),
)
ROWS: tuple[tuple[Cell, ...], ...] = (
    (1, -1 / 3, True, None),
    (2, -1e-12, False, "a < b, & more"),
    (3, None, None, 'two\n"lines"'),
)
TABLE = Table("levels", "Levels & more.", COLUMNS, ROWS)


class _Reader(html.parser.HTMLParser):
    """Gathers tags and the text of each cell."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.cells: list[str] = []
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.feed(text)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs)))
        self.cells += [""] if tag in {"td", "th", "caption"} else []

    def handle_data(self, data: str) -> None:
        self.cells[-1] += data


def test_csv() -> None:
    """Judge: the csv module reads back what stands there."""
    rows = list(csv.reader(io.StringIO(TABLE.to_csv())))
    assert rows == [
        ["n", "energy (eV)", "open", "remark"],
        ["1", "-0.333333", "yes", ""],
        ["2", "0.000000", "no", "a < b, & more"],
        ["3", "", "", 'two\n"lines"'],
    ]
    assert "\r" not in TABLE.to_csv()


def test_html() -> None:
    """Judge: the parser of the standard library."""
    read = _Reader(TABLE.to_html())
    assert read.cells == [
        "Levels & more.", "n", "E eV", "open shell", "remark", "1", "−0.3333", "yes", "—", "2", "0.0000", "no",
        "a < b, & more", "3", "—", "—", 'two\n"lines"',
    ]  # fmt: skip
    heads = [attributes for tag, attributes in read.tags if tag == "th"]
    assert all(head["scope"] == "col" for head in heads)
    assert heads[1]["title"] == 'energy of "the" level & more'


def test_long_tables_say_that_they_are_cut() -> None:
    table = Table("t", "All.", COLUMNS[:1], tuple((n,) for n in range(50)), most_shown=12)
    assert table.to_html().count("<tr>") == 13
    assert "First 12 of 50 rows; all are in the CSV." in table.to_html()
    assert len(table.to_csv().splitlines()) == 51


def test_rows_hold_plain_values() -> None:
    numpys: Any = ((np.int64(3), np.float64("nan"), np.bool_(1), np.str_("a\rb")), (4.0, 2, None, None))
    table = Table("t", "T.", COLUMNS, numpys)
    assert table.rows == ((3, None, True, "a\nb"), (4, 2.0, None, None))
    assert [type(cell) for cell in table.rows[0]] == [int, type(None), bool, str]
    assert json.loads(json.dumps(table.as_dict(), allow_nan=False)) == table.as_dict()


def test_a_fraction_needs_decimals_and_a_row_its_columns() -> None:
    with pytest.raises(ValueError, match=r"0\.5 in the column 'n', which has no decimals"):
        Table("t", "T.", COLUMNS[:1], ((0.5,),))
    with pytest.raises(ValueError, match="argument 2"):
        Table("t", "T.", COLUMNS[:1], ((1, 2),))
    assert Table("t", "T.", COLUMNS[:1], ((float("nan"),), (float("inf"),))).rows == ((None,), (None,))


@given(
    st.lists(
        st.tuples(
            st.integers(-(10**6), 10**6), st.none() | st.floats(), st.none() | st.booleans(), st.none() | st.text()
        )
    )
)
def test_same_rows_give_the_same_bytes_and_read_back(rows: list[tuple[Cell, ...]]) -> None:
    table = Table("t", "T.", COLUMNS, tuple(rows))
    assert table.to_csv() == Table("t", "T.", COLUMNS, table.rows).to_csv()
    read = list(csv.reader(io.StringIO(table.to_csv(), newline="")))[1:]
    assert len(read) == len(rows)
    for cells, row in zip(read, table.rows, strict=True):
        assert int(cells[0]) == row[0]
        assert (float(cells[1]) if cells[1] else None) == row[1]
    assert "nan" not in "".join(cells[1] for cells in read)
