"""Measured series of the book: each way to be wrong is told with the line of the CSV file."""

from collections.abc import Callable
from pathlib import Path

import pytest

from bandbook import workflow
from bandbook.cases.measured import with_series
from bandbook.settings import read_settings
from bandbook.store import key_of

MakeBook = Callable[..., Path]
GOOD = "# invented\nN, onset ,u\n2,3.5,0.03\n\n3,2.9,0.02\n"


def told(tmp_path: Path, text: str | None, **keys: str) -> tuple[object, list[str]]:
    (tmp_path / "data").mkdir(exist_ok=True)
    if text is not None:
        (tmp_path / "data/x.csv").write_text(text, encoding="utf-8")
    table, problems = with_series({"measured": {"file": "data/x.csv", "gap": "onset", **keys}}, tmp_path)
    return table["measured"], [str(problem) for problem in problems]


def test_a_series_is_read(tmp_path: Path) -> None:
    measured, problems = told(tmp_path, GOOD, u="u")
    assert problems == []
    assert measured == {
        "file": "data/x.csv", "gap": "onset", "u": "u", "lengths": [2, 3], "gaps": [3.5, 2.9], "errors": [0.03, 0.02]
    }  # fmt: skip


def test_a_study_without_a_series_is_left_alone(tmp_path: Path) -> None:
    assert with_series({"cells": 3}, tmp_path) == ({"cells": 3}, [])
    assert with_series({"measured": 3}, tmp_path) == ({"measured": 3}, [])


@pytest.mark.parametrize(
    ("text", "line", "words"),
    [
        (None, 0, 'measured.file: there is no file "data/x.csv"'),
        ("", 1, "the file has no rows"),
        ("n,onset\n2,3\n", 1, 'no column "N"; columns are "n", "onset"; did you mean "n"?'),
        ("N,onset\n2;3\n", 2, "1 cells in a table of 2 columns"),
        ('N,onset\n2,"3,5"\n', 2, '"3,5" in the column "onset"; a number with a point as decimal sign; write 3.5'),
        ("N,onset\n2,nan\n", 2, '"nan" in the column "onset"; a finite number above 0'),
        ("N,onset\n2,-1\n", 2, '"-1" in the column "onset"; a finite number above 0'),
        ("N,onset\n2.5,3\n", 2, '"2.5" in the column "N"; a whole number of cells'),
        ("N,onset\n2,3\n2,4\n", 3, "the length 2 stands twice"),
        ("N,onset\n2,three\nx,4\n", 2, '"three" in the column "onset"'),
    ],
)
def test_what_is_wrong_is_told_at_its_line(tmp_path: Path, text: str | None, line: int, words: str) -> None:
    _, problems = told(tmp_path, text)
    assert words in problems[0]
    assert not line or problems[0].startswith(f"content/data/x.csv:{line}: ")


def test_all_mistakes_at_once(tmp_path: Path) -> None:
    _, problems = told(tmp_path, "N,onset,u\n2,three,0.1\nx,4,0\n", u="u")
    assert len(problems) == 3


def test_a_path_out_of_the_book_is_refused(tmp_path: Path) -> None:
    _, problems = with_series({"measured": {"file": "../x.csv"}}, tmp_path)
    assert "leads out of the book" in str(problems[0])


def test_the_check_of_a_case_tells_the_file_and_line_of_the_series(make_book: MakeBook, case_text: str) -> None:
    study = 'question = "length_series"\ncells = "1..4"\nfits = []\nmeasured = { file = "data/x.csv" }'
    root = make_book(
        {
            "a": case_text.replace('question = "levels"\ncells = 4', study).replace(
                "levels.homo", "length_series.band_gap"
            )
        }
    )
    (root / "content/data").mkdir()
    (root / "content/data/x.csv").write_text("N,gap\n2,3,5\n", encoding="utf-8")
    settings = read_settings(root / "mkdocs.yml", root)
    (problem,) = workflow.check(settings).problems
    assert str(problem).startswith("content/data/x.csv:2: 3 cells in a table of 2 columns")


def test_editing_the_series_makes_its_case_stale(make_book: MakeBook, case_text: str) -> None:
    study = 'question = "length_series"\ncells = "1..4"\nfits = []\nmeasured = { file = "data/x.csv" }'
    text = case_text.replace('question = "levels"\ncells = 4', study).replace("levels.homo", "length_series.band_gap")
    root = make_book({"a": text, "b": case_text})
    (root / "content/data").mkdir()
    keys = []
    for value in ("3.5", "3.6"):
        (root / "content/data/x.csv").write_text(f"N,gap\n2,{value}\n", encoding="utf-8")
        checked = workflow.check(read_settings(root / "mkdocs.yml", root))
        assert checked.problems == ()
        keys.append([key_of(case.parameters or {}) for case in checked.cases])
    assert [one == two for one, two in zip(*keys, strict=True)] == [False, True]
