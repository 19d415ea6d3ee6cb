"""What an author writes is escaped, links lead where they led, and only what changed is written."""

from collections.abc import Callable
from pathlib import Path
from typing import Any

from bandbook import workflow
from bandbook.exhibits import MIME
from bandbook.notebooks import Harvest
from bandbook.pages.links import adjusted
from bandbook.settings import read_settings

MakeBook = Callable[..., Path]
assert MIME


def fake(parameters: dict[str, Any], key: str) -> Harvest:
    del key
    (study,) = parameters["studies"]
    row = {"kind": "level", "unit": "eV", "in_beta": 0.618034, "uncertainty": None, "meaning": "<b>"}
    return Harvest(
        quantities=[{"name": f"{study}.homo", "value": -1.5, **row}],
        exhibits=[
            {
                "study": study,
                "kind": "figure",
                "name": "x",
                "file": "figures/x.svg",
                "alt": '"<',
                "caption": "c",
                "step": "step-1",
            }
        ],
        warnings=[{"study": study, "text": "mind <this>"}],
        files={"notebook.ipynb": b"{}", "figures/x.svg": b"<svg/>"},
    )


def write(root: Path) -> tuple[workflow.Finished, Path]:
    settings = read_settings(None, root)
    finished = workflow.run(settings, runner=fake)
    return finished, workflow.write_pages(settings, finished)


def test_titles_and_words_are_escaped(make_book: MakeBook, case_text: str) -> None:
    text = case_text.replace("title: A chain", 'title: "<script>alert(1)</script> *x* _y_"\naim: "<i>"')
    finished, tree = write(make_book({"a": text}))
    assert finished.exit_status == 0
    for name in ("cases/a/index.md", "catalogue/index.md"):
        page = (tree / name).read_text(encoding="utf-8").partition("\n---\n")[2]
        assert "<script>" not in page
        assert "<i>" not in page
    page = (tree / "cases/a/index.md").read_text(encoding="utf-8")
    assert "mind &lt;this&gt;" in page
    assert 'alt="&#34;&lt;"' in page


def test_only_what_changed_is_written_and_what_is_gone_goes(make_book: MakeBook, case_text: str) -> None:
    root = make_book({"a": case_text, "b": case_text})
    _, tree = write(root)
    before = {path: path.stat().st_mtime_ns for path in tree.rglob("*") if path.is_file()}
    (root / "content/cases/b.md").unlink()
    _, tree = write(root)
    assert not (tree / "cases/b").exists()
    changed = [path.name for path, time in before.items() if path.exists() and path.stat().st_mtime_ns != time]
    assert not any(path in changed for path in ("record.json", "book.css", "x.svg"))


def test_disagreement_and_unknown_quantity(make_book: MakeBook, case_text: str) -> None:
    finished, _ = write(make_book({"a": case_text.replace("0.618034", "0.7")}))
    assert (finished.exit_status, finished.summary) == (1, "executed 1, fresh 0, failed 0")
    finished, _ = write(make_book({"a": case_text.replace("levels.homo", "levels.energy_77")}, folder="other"))
    assert finished.exit_status == 2
    assert "content/cases/a.md:18: " in finished.messages[0]


def test_links() -> None:
    text = "[a](b.md) [b](../x.png) [c](https://e.org) `[d](b.md)` [e](#x) [f](sub/c.md#s)"
    moved = adjusted(text, source="cases/p/a.md", page="cases/p/a/index.md", ids=["p/a", "p/b", "p/sub/c"])
    assert (
        moved == "[a](../b/index.md) [b](../../x.png) [c](https://e.org) `[d](b.md)` [e](#x) [f](../sub/c/index.md#s)"
    )
