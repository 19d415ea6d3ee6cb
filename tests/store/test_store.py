"""Results are whole or absent, and verified at every read."""

import concurrent.futures
import errno
import json
import os
import platform
import subprocess
import sys
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from bandbook.errors import AuthorError, IntegrityError, PhysicsError, Problem, RunError, WorkingsError
from bandbook.notebooks import Harvest
from bandbook.store import Failure, Store, digest, files, key_of, result, store

ROOT = Path(__file__).resolve().parents[2]
PARAMETERS: dict[str, Any] = {
    "format": 1,
    "systems": {"s": {"beta": -2.5}},
    "studies": {},
    "workings": [],
    "steps": [],
    "files": {},
}
KEY = key_of(PARAMETERS)


def harvest(gap: float = 1.0) -> Harvest:
    return Harvest(
        quantities=[{"name": "levels.gap", "kind": "difference", "value": gap, "unit": "eV"}],
        warnings=[{"study": "levels", "text": "ä"}],
        files={"notebook.ipynb": b"{}\n", "figures/levels.svg": b"<svg/>", "tables/levels.csv": b"n\n1\n"},
        run={"seconds": 1.0, "host": "h"},
    )


def everything(root: Path) -> dict[str, bytes]:
    return {path.relative_to(root).as_posix(): path.read_bytes() for path in root.rglob("*") if path.is_file()}


def test_put_and_get(tmp_path: Path) -> None:
    shelf = Store(tmp_path / ".bandbook")
    assert shelf.get(KEY) is None
    put = shelf.put(KEY, PARAMETERS, harvest())
    assert shelf.get(KEY) == put
    assert put.folder == tmp_path / ".bandbook/store" / KEY.removeprefix("sha256:")
    assert {path.name for path in put.folder.iterdir()} == {
        "result.json",
        "run.json",
        "notebook.ipynb",
        "figures",
        "tables",
    }
    assert not list((tmp_path / ".bandbook/tmp").iterdir())
    assert (tmp_path / ".bandbook/.gitignore").read_text() == "*\n"
    assert shelf.put(KEY, PARAMETERS, harvest()).files == put.files


def test_times_and_places_stand_in_run_json_alone(tmp_path: Path) -> None:
    first = Store(tmp_path / "one").put(KEY, PARAMETERS, harvest()).folder
    later = harvest()
    later.run = {"seconds": 9.0, "host": "another"}
    second = Store(tmp_path / "two").put(KEY, PARAMETERS, later).folder
    one, two = everything(first), everything(second)
    assert one.pop("run.json") != two.pop("run.json")
    assert one == two
    assert not [name for name, data in one.items() if str(tmp_path).encode() in data]


def test_result_json_is_pinned(tmp_path: Path) -> None:
    whole = json.loads((Store(tmp_path).put(KEY, PARAMETERS, harvest()).folder / "result.json").read_bytes())
    assert set(whole) == {
        "format",
        "key",
        "quantities",
        "exhibits",
        "warnings",
        "inputs",
        "environment",
        "files",
        "digest",
    }, "formats.md §5 names these; another set needs another format number"


DAMAGE: dict[str, Callable[[Path], object]] = {
    "a figure changed": lambda folder: (folder / "figures/levels.svg").write_bytes(b"<svg />"),
    "a table gone": lambda folder: (folder / "tables/levels.csv").unlink(),
    "a number changed": lambda folder: _replace(folder, b"1.0", b"2.0"),
    "a blank more": lambda folder: _replace(folder, b"}", b"} "),
    "half a file": lambda folder: (folder / "result.json").write_bytes((folder / "result.json").read_bytes()[:100]),
    "no table": lambda folder: (folder / "result.json").write_bytes(b"[]"),
    "no text": lambda folder: (folder / "result.json").write_bytes(b"\xff\xfe"),
    "nothing": lambda folder: (folder / "result.json").unlink(),
    "another digest": lambda folder: _replace(folder, b'"digest": "sha256:', b'"digest": "sha256:0'),
    "nested without end": lambda folder: (folder / "result.json").write_bytes(b"[" * 100_000),
}


def _replace(folder: Path, old: bytes, new: bytes) -> None:
    path = folder / "result.json"
    assert old in path.read_bytes()
    path.write_bytes(path.read_bytes().replace(old, new, 1))


@pytest.mark.parametrize("kind", DAMAGE)
def test_a_damaged_result_is_set_aside_and_named(kind: str, tmp_path: Path) -> None:
    shelf = Store(tmp_path / ".bandbook")
    folder = shelf.put(KEY, PARAMETERS, harvest()).folder
    DAMAGE[kind](folder)
    assert shelf.get(KEY) is None
    (said,) = shelf.set_aside
    assert f"result {folder.name}" in said
    assert f"damaged/{folder.name}-1" in said
    assert not folder.exists()
    assert (tmp_path / ".bandbook/damaged" / f"{folder.name}-1").is_dir()
    assert shelf.get(KEY) is None
    assert len(shelf.set_aside) == 1
    DAMAGE[kind](shelf.put(KEY, PARAMETERS, harvest()).folder)
    assert shelf.get(KEY) is None
    assert (tmp_path / ".bandbook/damaged" / f"{folder.name}-2").is_dir()


def test_a_result_under_another_key_is_damage(tmp_path: Path) -> None:
    shelf = Store(tmp_path)
    other = key_of({**PARAMETERS, "format": 2})
    shelf.put(KEY, PARAMETERS, harvest()).folder.rename(shelf.folder(other))
    assert shelf.get(other) is None
    assert shelf.set_aside


def test_a_result_that_names_files_elsewhere_is_damage(tmp_path: Path) -> None:
    shelf = Store(tmp_path / "store")
    folder = shelf.put(KEY, PARAMETERS, harvest()).folder
    content = json.loads((folder / "result.json").read_bytes())
    del content["digest"]
    (folder.parent / "x").write_bytes(b"1")
    content["files"]["../x"] = files_digest = digest(b"1")
    assert files_digest.startswith("sha256:")
    (folder / "result.json").write_bytes(result.result_bytes(content))
    assert shelf.get(KEY) is None


@pytest.mark.parametrize("path", ["../x", "/x", "a/../../x", "", "C:x", "a\\..\\x"])
def test_no_file_is_written_outside(path: str, tmp_path: Path) -> None:
    shelf = Store(tmp_path / ".bandbook")
    one = harvest()
    one.files[path] = b"x"
    with pytest.raises(IntegrityError, match="below its own folder"):
        shelf.put(KEY, PARAMETERS, one)
    assert shelf.get(KEY) is None


def test_a_damaged_result_that_cannot_be_moved_is_named_all_the_same(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    shelf = Store(tmp_path)
    folder = shelf.put(KEY, PARAMETERS, harvest()).folder
    (folder / "notebook.ipynb").write_bytes(b"x")

    def refuse(*_: object) -> None:
        raise OSError(errno.EROFS, "Read-only file system")

    monkeypatch.setattr(Path, "rename", refuse)
    assert shelf.get(KEY) is None
    assert "Read-only file system" in shelf.set_aside[0]
    assert "notebook.ipynb is not what its digest says" in shelf.set_aside[0]


def full(*_: object, **__: object) -> None:
    raise OSError(errno.ENOSPC, "No space left on device")


@pytest.mark.parametrize(
    ("owner", "name"),
    [(os, "fsync"), (Path, "replace"), (Path, "rename"), (Path, "mkdir"), (tempfile, "mkstemp"), (tempfile, "mkdtemp")],
)
@pytest.mark.parametrize("before", ["nothing", "a result"])
def test_a_full_disk_leaves_nothing_half(
    owner: Any, name: str, before: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    shelf = Store(tmp_path / ".bandbook")
    if before == "a result":
        shelf.put(KEY, PARAMETERS, harvest())
    kept = everything(tmp_path)
    with monkeypatch.context() as patch:
        patch.setattr(owner, name, full)
        with pytest.raises(RunError, match=r"could not be written: No space left on device; .*; free space or check"):
            shelf.put(KEY, PARAMETERS, harvest(gap=2.0))
    left = everything(tmp_path)
    for path in (".bandbook/.gitignore", ".bandbook/lock"):
        left.pop(path, None)
        kept.pop(path, None)
    assert left == kept
    if before == "nothing":
        assert not list((tmp_path / ".bandbook").glob("store/*"))
    assert (shelf.get(KEY) is not None) == (before == "a result")
    assert shelf.set_aside == []
    assert shelf.put(KEY, PARAMETERS, harvest(gap=2.0)).quantities[0]["value"] == 2.0


def test_a_disk_that_fills_up_at_the_nth_write_leaves_nothing_half(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    sync = os.fsync
    for allowed in range(8):
        shelf = Store(tmp_path / str(allowed))
        calls = iter(range(100))

        def limited(handle: int, *, calls: Any = calls, allowed: int = allowed) -> None:
            if next(calls) >= allowed:
                full()
            sync(handle)

        with monkeypatch.context() as patch:
            patch.setattr(os, "fsync", limited)
            try:
                shelf.put(KEY, PARAMETERS, harvest())
            except RunError:
                assert not list((tmp_path / str(allowed)).glob("store/*"))
                assert not list((tmp_path / str(allowed)).glob("tmp/*"))
            else:
                assert allowed >= 6
        assert (shelf.get(KEY) is not None) == (allowed >= 6)


def test_an_interrupted_writer_leaves_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def stop(_: int) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(os, "fsync", stop)
    with pytest.raises(KeyboardInterrupt):
        Store(tmp_path).put(KEY, PARAMETERS, harvest())
    assert not [path for path in tmp_path.rglob("*") if path.is_file()]


def test_many_writers_and_readers_of_one_key(tmp_path: Path) -> None:
    def turn(number: int) -> bool:
        shelf = Store(tmp_path)
        if number % 2:
            return shelf.put(KEY, PARAMETERS, harvest(gap=float(number % 3))).key == KEY
        found = shelf.get(KEY)
        return (found is None or found.key == KEY) and shelf.set_aside == []

    with concurrent.futures.ThreadPoolExecutor(4) as pool:
        assert all(pool.map(turn, range(40)))
    assert not (tmp_path / "damaged").exists()
    assert not list((tmp_path / "tmp").iterdir())


def test_cases_remember_their_last_key(tmp_path: Path) -> None:
    shelf = Store(tmp_path / ".bandbook")
    assert shelf.latest("b") is None
    shelf.remember("b", "sha256:1")
    shelf.remember("a", "sha256:2")
    shelf.remember("b", "sha256:3")
    assert json.loads((tmp_path / ".bandbook/cases.json").read_text()) == {"a": "sha256:2", "b": "sha256:3"}
    assert shelf.latest("b") == "sha256:3"


@pytest.mark.parametrize("data", [b"", b"[]", b"{", b"\xff"])
def test_a_damaged_list_of_keys_is_begun_anew(data: bytes, tmp_path: Path) -> None:
    (tmp_path / "cases.json").write_bytes(data)
    shelf = Store(tmp_path)
    assert shelf.latest("a") is None
    shelf.remember("a", "sha256:1")
    assert shelf.latest("a") == "sha256:1"


def test_processes_that_remember_at_once_lose_nothing(tmp_path: Path) -> None:
    code = (
        "import sys\nfrom pathlib import Path\nfrom bandbook.store import Store\n"
        "for n in range(25):\n    Store(Path(sys.argv[1])).remember(f'{sys.argv[2]}{n}', 'sha256:1')\n"
    )
    command = [sys.executable, "-c", code, str(tmp_path)]
    running = [subprocess.Popen([*command, name], cwd=ROOT) for name in "abc"]
    assert [process.wait(60) for process in running] == [0, 0, 0]
    assert len(json.loads((tmp_path / "cases.json").read_bytes())) == 75


def test_without_locks_all_works(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(files, "fcntl", None)
    shelf = Store(tmp_path)
    shelf.put(KEY, PARAMETERS, harvest())
    shelf.remember("a", KEY)
    assert shelf.latest("a") == KEY


def test_a_failure_is_kept_until_the_next_outcome(tmp_path: Path) -> None:
    shelf = Store(tmp_path / ".bandbook")
    error = WorkingsError("ValueError: x", source="raise", traceback="Traceback")
    error.step, error.notebook = 2, b"{}\n"
    kept = shelf.keep_failure(error, case="a/b", key="sha256:1", file="content/cases/a/b.md", line=7)
    assert kept.message == str(kept) == "content/cases/a/b.md:7: ValueError: x"
    assert (kept.kind, kept.exit_status, kept.source, kept.traceback, kept.step) == (
        "WorkingsError",
        1,
        "raise",
        "Traceback",
        2,
    )
    assert shelf.failure("a/b") == kept
    assert shelf.failed_notebook("a/b") == b"{}\n"
    assert shelf.failure("a.b") is None
    again = shelf.keep_failure(PhysicsError("no"), case="a/b", key="sha256:1", file="f", line=0)
    assert again.message == "f:1: no"
    assert shelf.failed_notebook("a/b") is None
    shelf.forget_failure("a/b")
    assert shelf.failure("a/b") is None
    assert not list((tmp_path / ".bandbook").glob("store/*")), "a failure is no result"


def test_every_mistake_of_a_run_is_placed(tmp_path: Path) -> None:
    problems = [Problem("one", "a", "b"), Problem("two", "a", "b").at("other.md", 3)]
    kept = Store(tmp_path).keep_failure(AuthorError(problems), case="a", key="k", file="c.md", line=7)
    assert kept.message == "c.md:7: one; a; b\nother.md:3: two; a; b"
    kept = Store(tmp_path).keep_failure(RunError("x", reason="timed out"), case="a", key="k", file="c.md", line=7)
    assert (kept.reason, kept.exit_status) == ("timed out", 4)


def test_a_failure_on_a_full_disk_stops_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(os, "fsync", full)
    shelf = Store(tmp_path)
    assert shelf.keep_failure(RunError("x"), case="a", key="k", file="c.md", line=7).message == "c.md:7: x"
    assert shelf.failure("a") is None


def test_a_failure_with_a_long_name(tmp_path: Path) -> None:
    shelf = Store(tmp_path)
    case = "/".join(["a" * 100] * 5)
    shelf.keep_failure(RunError("x"), case=case, key="k", file="c.md", line=7)
    assert shelf.failure(case)


@pytest.mark.parametrize("content", [b"", b"[]", b"{}", b"\xff"])
def test_a_damaged_failure_is_none(content: bytes, tmp_path: Path) -> None:
    (tmp_path / "failed").mkdir()
    (tmp_path / "failed/a.json").write_bytes(content)
    assert Store(tmp_path).failure("a") is None


def test_a_failure_of_another_version_is_read(tmp_path: Path) -> None:
    (tmp_path / "failed").mkdir()
    content = {"case": "a", "key": "k", "kind": "RunError", "exit_status": 4, "message": "m", "more": 1}
    (tmp_path / "failed/a.json").write_text(json.dumps(content))
    assert Store(tmp_path).failure("a") == Failure("a", "k", "RunError", 4, "m")


def test_what_a_dead_process_left_is_cleared(tmp_path: Path) -> None:
    host = platform.node().replace("-", "_")[:60] or "host"
    dead = subprocess.run([sys.executable, "-c", "import os; print(os.getpid())"], capture_output=True, check=True)
    names = {f"{host}-{int(dead.stdout)}-x": False, f"{host}-{os.getpid()}-x": True, "elsewhere-1-x": True}
    for name in names:
        (tmp_path / "tmp" / name / "figures").mkdir(parents=True)
    old = tmp_path / "tmp" / "elsewhere-2-x"
    old.mkdir()
    os.utime(old, (1e9, 1e9))
    Store(tmp_path).remember("a", "sha256:1")
    assert {name: (tmp_path / "tmp" / name).exists() for name in names} == names
    assert not old.exists()


def test_the_fields_of_harvested_are_those_of_a_harvest() -> None:
    assert {name for name in vars(store.Harvested) if not name.startswith("_")} == set(Harvest.__dataclass_fields__)
