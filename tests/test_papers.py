"""What may be asked of a figure for a paper, which figure is meant, and what is written."""

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from bandbook import workflow
from bandbook.errors import AuthorError, PhysicsError
from bandbook.exhibits.paper import packed
from bandbook.notebooks import Harvest
from bandbook.papers import check_paper, up_to
from bandbook.settings import read_settings

MakeBook = Callable[..., Path]
PARAMETERS: dict[str, Any] = {
    "steps": [["study", "levels"], ["workings", "1"], ["study", "bands"]],
    "workings": {"1": "pass"},
}


def exhibit(study: str, kind: str, name: str, ending: str) -> dict[str, Any]:
    folder = "figures" if kind == "figure" else "tables"
    stem = name if study == "workings" else f"{study}-{name}"
    return {"study": study, "kind": kind, "name": name, "file": f"{folder}/{stem}.{ending}"}


def fake(tables: int = 1) -> Callable[[dict[str, Any], str], Harvest]:
    rows = [exhibit("levels", "figure", name, "svg") for name in ("diagram", "on-bands")]
    rows += [exhibit("levels", "table", f"t{number}", "csv") for number in range(tables)]
    rows += [exhibit("workings", "figure", "workings-1", "svg")]
    files = {row["file"]: packed(row["file"].encode(), "pdf").encode() for row in rows if row["kind"] == "figure"}
    files |= {row["file"]: row["name"].encode() for row in rows if row["kind"] == "table"}
    files["figures/workings-1.svg"] = b"<svg/>"
    return lambda _parameters, _key: Harvest(exhibits=rows, files=files)


def drawn(root: Path, figure: str = "levels.diagram", *, tables: int = 1, **asked: Any) -> list[Path]:
    given = {"case": "a", "to": root / "out.pdf", "width": "85mm", "font_size": 8.0, **asked}
    return workflow.draw(read_settings(None, root), workflow.Drawing(figure=figure, **given), runner=fake(tables))


@pytest.mark.parametrize("width", ["85mm", "8.5cm", "8.5 cm", "85.0MM"])
def test_units_of_a_width(width: str) -> None:
    assert check_paper(width, 8.0, ".svg").width * 25.4 == pytest.approx(85.0)
    assert check_paper("3in", 8.0, ".svg").width == check_paper("216pt", 8.0, ".svg").width == pytest.approx(3.0)


@pytest.mark.parametrize(
    "width", ["85", "mm", "-85mm", "0mm", "29mm", "401mm", "1e2mm", "85 px", "nanmm", "9" * 400 + "mm"]
)
def test_a_width_that_is_refused(width: str) -> None:
    with pytest.raises(AuthorError, match="30 to 400 mm, as a number with mm, cm, in or pt"):
        check_paper(width, 8.0, ".svg")


def test_every_mistake_is_told_at_once() -> None:
    with pytest.raises(AuthorError) as caught:
        check_paper("wide", float("nan"), ".jpg")
    assert len(caught.value.problems) == 3
    assert 'the file ends with ".jpg"; it ends with .svg, .pdf or .png; name the file so' in str(caught.value)


def test_words_too_large_for_the_width_are_refused() -> None:
    with pytest.raises(AuthorError, match="at least 169 mm at this size"):
        check_paper("85mm", 24.0, ".svg")


def test_only_the_steps_that_a_figure_needs() -> None:
    assert up_to(PARAMETERS, "levels.diagram")["steps"] == PARAMETERS["steps"][:1]
    assert up_to(PARAMETERS, "figures/bands.svg")["steps"] == up_to(PARAMETERS, "workings-1")["steps"]
    assert len(up_to(PARAMETERS, "bands")["steps"]) == 3


@pytest.mark.parametrize(
    "name", ["levels.diagram", "levels-diagram", "levels-diagram.svg", "figures/levels-diagram.svg"]
)
def test_names_of_a_figure(name: str, make_book: MakeBook) -> None:
    root = make_book()
    assert drawn(root, name) == [root / "out.pdf", root / "out.csv"]
    assert (root / "out.pdf").read_bytes() == b"figures/levels-diagram.svg"
    assert (root / "out.csv").read_bytes() == b"t0"


def test_several_tables_have_a_file_each(make_book: MakeBook) -> None:
    root = make_book()
    assert [path.name for path in drawn(root, tables=2)] == ["out.pdf", "out-t0.csv", "out-t1.csv"]


@pytest.mark.parametrize(
    ("figure", "words"),
    [
        ("levels", '"levels" has 2 figures; its figures are levels.diagram, levels.on-bands; name one of them'),
        (
            "levels.diagramm",
            'figures are levels.diagram, levels.on-bands, workings.workings-1; did you mean "levels.diagram"?',
        ),
        ("level", 'the case has no study "level"; its studies are levels; did you mean "levels"?'),
        ("", 'the case has no study ""; its studies are levels; name one'),
    ],
)
def test_a_figure_that_is_refused(figure: str, words: str, make_book: MakeBook) -> None:
    root = make_book()
    with pytest.raises(AuthorError) as caught:
        drawn(root, figure)
    assert words in str(caught.value)
    assert not list(root.glob("out*"))


def test_what_matplotlib_did_not_draw_is_refused(make_book: MakeBook, case_text: str) -> None:
    root = make_book({"a": case_text + "\n```python workings\npass\n```\n"})
    with pytest.raises(AuthorError, match="was not drawn with matplotlib"):
        drawn(root, "workings-1.svg")


def test_a_folder_where_the_table_would_go_is_kept(make_book: MakeBook) -> None:
    root = make_book()
    (root / "out.csv").mkdir()
    with pytest.raises(AuthorError, match="is a folder"):
        drawn(root)
    assert not (root / "out.pdf").exists()


def test_a_broken_case_is_refused_with_its_mistakes(make_book: MakeBook, case_text: str) -> None:
    root = make_book({"a": case_text.replace("cells = 4", "cells = -4")})
    with pytest.raises(AuthorError, match=r"content/cases/a\.md:14: "):
        drawn(root)
    with pytest.raises(AuthorError, match='unknown case "b"'):
        drawn(root, case="b")


def test_a_run_that_fails_is_placed(make_book: MakeBook) -> None:
    def failing(_parameters: dict[str, Any], _key: str) -> Harvest:
        error = PhysicsError("no gap")
        error.step = 1
        raise error

    root = make_book()
    asked = workflow.Drawing("a", "levels", root / "x.pdf", "85mm", 8.0)
    with pytest.raises(PhysicsError, match=r"\Acontent/cases/a\.md:12: no gap\Z"):
        workflow.draw(read_settings(None, root), asked, runner=failing)
