"""The steps in their order: what one case meets stops no other."""

import errno
import os
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from bandbook import workflow
from bandbook.notebooks import Harvest
from bandbook.settings import read_settings
from bandbook.store import files, store

MakeBook = Callable[..., Path]


def fake(parameters: dict[str, Any], key: str) -> Harvest:
    """Return what a kernel would give: one quantity of the study."""
    del key
    (study,) = parameters["studies"]
    row = {"kind": "level", "unit": "eV", "in_beta": 0.618034, "uncertainty": None, "meaning": "highest"}
    return Harvest(quantities=[{"name": f"{study}.homo", "value": -1.5, **row}], files={"notebook.ipynb": b"{}"})


@pytest.fixture
def book(make_book: MakeBook, case_text: str) -> Path:
    """Return a book of three cases, each with a key of its own."""
    cells = {"a": "4", "b": "6", "c": "8"}
    return make_book({name: case_text.replace("cells = 4", f"cells = {n}") for name, n in cells.items()})


def test_a_list_of_keys_that_cannot_be_written_stops_no_case(book: Path) -> None:
    """Every case is run and kept; each is told to have failed, and the next run finds all of them fresh."""
    settings = read_settings(None, book)
    in_the_way = settings.store / "cases.json"
    in_the_way.mkdir(parents=True)
    finished = workflow.run(settings, runner=fake)
    assert [outcome.status for outcome in finished.outcomes] == ["failed"] * 3
    assert finished.exit_status == 4
    assert all("cases.json could not be written" in message for message in finished.messages)
    assert [outcome.status for outcome in workflow.look(settings).outcomes] == ["fresh"] * 3
    in_the_way.rmdir()
    assert workflow.run(settings, runner=fake).summary == "executed 0, fresh 3, failed 0"


def test_a_disk_that_is_full_at_the_list_of_keys_stops_no_case(book: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    settings, write, refused = read_settings(None, book), os.fsync, list[str]()
    is_list: list[str] = []
    write_file = files.write_file

    def written(path: Path, data: bytes) -> None:
        is_list[:] = [path.name] if path.name == "cases.json" else []
        write_file(path, data)

    def full(handle: int) -> None:
        if is_list and not refused:
            refused.append(is_list.pop())
            raise OSError(errno.ENOSPC, "No space left on device")
        write(handle)

    monkeypatch.setattr(store, "write_file", written)
    monkeypatch.setattr(os, "fsync", full)
    finished = workflow.run(settings, runner=fake)
    assert refused == ["cases.json"]
    assert [outcome.status for outcome in finished.outcomes] == ["failed", "executed", "executed"]
    assert "No space left on device" in finished.messages[0]
    assert not list(settings.store.rglob(".tmp-*"))
    assert workflow.run(settings, runner=fake).summary == "executed 0, fresh 3, failed 0"
