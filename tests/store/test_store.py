"""Results are whole or absent, verified at every read, and keyed by what can change them."""

import errno
import json
import os
from pathlib import Path

import pytest

from bandbook.errors import RunError, WorkingsError
from bandbook.notebooks import Harvest
from bandbook.store import Store, canonical_json, environment, key_of

PARAMETERS = {"format": 1, "systems": {"s": {"beta": -2.5}}, "studies": {}, "workings": [], "steps": [], "files": {}}


def harvest() -> Harvest:
    return Harvest(
        quantities=[{"name": "levels.gap", "kind": "difference", "value": 1.0, "unit": "eV"}],
        files={"notebook.ipynb": b"{}\n", "figures/levels.svg": b"<svg/>"},
        run={"seconds": 1.0},
    )


def test_canonical_json_is_pinned() -> None:
    found = canonical_json({"b": [1.0, -0.0, 2.5], "a": "é"})
    assert found == b'{"a":"\\u00e9","b":[1,0,2.5]}', "a change here makes every stored result of every book stale"


def test_equal_numbers_give_one_key() -> None:
    assert key_of({**PARAMETERS, "x": 1}) == key_of({**PARAMETERS, "x": 1.0})
    assert key_of({**PARAMETERS, "x": 0.0}) == key_of({**PARAMETERS, "x": -0.0})
    assert key_of({**PARAMETERS, "x": 1}) != key_of({**PARAMETERS, "x": 2})


def test_environment_lists_what_the_key_covers() -> None:
    assert set(environment()) == {"python", "numpy", "scipy", "matplotlib", "bandbook"}


def test_put_and_get(tmp_path: Path) -> None:
    store = Store(tmp_path / ".bandbook")
    key = key_of(PARAMETERS)
    assert store.get(key) is None
    put = store.put(key, PARAMETERS, harvest())
    assert store.get(key) == put
    assert not list((tmp_path / ".bandbook/tmp").iterdir())
    assert (tmp_path / ".bandbook/.gitignore").read_text() == "*\n"
    assert store.put(key, PARAMETERS, harvest()).files == put.files


@pytest.mark.parametrize("name", ["result.json", "notebook.ipynb", "figures/levels.svg"])
def test_a_damaged_result_is_set_aside_and_named(name: str, tmp_path: Path) -> None:
    store = Store(tmp_path / ".bandbook")
    key = key_of(PARAMETERS)
    result = store.put(key, PARAMETERS, harvest())
    path = result.folder / name
    path.write_bytes(path.read_bytes().replace(b"}", b"} ", 1) if name != "figures/levels.svg" else b"<svg />")
    if name == "result.json":
        path.write_text(path.read_text().replace('"value": 1.0', '"value": 2.0'))
    assert store.get(key) is None
    assert len(store.set_aside) == 1
    assert not result.folder.exists()
    assert (tmp_path / ".bandbook/damaged").is_dir()


def test_a_full_disk_leaves_nothing_behind(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    store = Store(tmp_path / ".bandbook")
    key = key_of(PARAMETERS)
    store.remember("a", key)

    def full(_: int) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(RunError, match="No space left on device"):
        store.put(key, PARAMETERS, harvest())
    monkeypatch.undo()
    assert store.get(key) is None
    assert not list((tmp_path / ".bandbook").rglob("notebook.ipynb"))


def test_cases_remember_their_last_key(tmp_path: Path) -> None:
    store = Store(tmp_path / ".bandbook")
    store.remember("b", "sha256:1")
    store.remember("a", "sha256:2")
    store.remember("b", "sha256:3")
    assert json.loads((tmp_path / ".bandbook/cases.json").read_text()) == {"a": "sha256:2", "b": "sha256:3"}
    assert store.latest("b") == "sha256:3"


def test_a_failure_is_kept_until_the_next_outcome(tmp_path: Path) -> None:
    store = Store(tmp_path / ".bandbook")
    error = WorkingsError("ValueError: x", source="raise", traceback="Traceback")
    kept = store.keep_failure(error, case="a/b", key="sha256:1", file="content/cases/a/b.md", line=7)
    assert kept.message == "content/cases/a/b.md:7: ValueError: x"
    assert store.failure("a/b") == kept
    store.forget_failure("a/b")
    assert store.failure("a/b") is None


def test_what_a_dead_process_left_is_cleared(tmp_path: Path) -> None:
    store = Store(tmp_path / ".bandbook")
    left = tmp_path / ".bandbook/tmp/99999999-x"
    left.mkdir(parents=True)
    store.remember("a", "sha256:1")
    assert not left.exists()
