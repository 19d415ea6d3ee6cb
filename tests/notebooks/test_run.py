"""The real thing: kernels that end well, fail, hang, or die; nothing of them is left."""

import contextlib
import os
import signal
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import nbformat
import nbformat.v4
import psutil
import pytest

from bandbook.errors import BandbookError, RunError, WorkingsError
from bandbook.notebooks import compose, harvest, local_runner, run_notebook
from bandbook.notebooks.kernels import LONGEST_BASE, kernel_environment, private_folder
from bandbook.notebooks.outputs import CUT

ROOT = Path(__file__).resolve().parents[2]
CHILD = "import subprocess, sys\np = subprocess.Popen([sys.executable, '-c', 'import time; time.sleep(300)'], start_new_session={})\n"
PARAMETERS: dict[str, Any] = {
    "format": 1,
    "systems": {"system": {"form": "named-lattice", "lattice": "chain", "beta": -2.5}},
    "studies": {},
    "workings": [
        "%matplotlib inline\nimport matplotlib.pyplot as plt, numpy as np, warnings\n"
        "fig, ax = plt.subplots()\nax.plot(rng.random(5))\nax.set_xlabel('energy (eV)')\nplt.show()\n"
        "print('before')\nwarnings.warn('mind')\nprint('after')\nnp.array([1.0]) / 0\n",
        "import os, pathlib, sys, tempfile\n"
        "for n in range(100_000):\n    print(n, tempfile.gettempdir(), sys.prefix)\n"
        "report('draw', rng.random(), 'eV', 'a draw')\nreport('secret', float('SECRET' in os.environ))\n"
        "report('empty', len(list(pathlib.Path.cwd().iterdir())))\nreport('text', len(files['data/x.csv']))\nobject()\n",
    ],
    "steps": [["workings", 0], ["workings", 1]],
    "files": {"data/x.csv": "n,gap\n"},
}


def notebook(*sources: str) -> Any:
    cells = [nbformat.v4.new_code_cell(one, id=f"step-{number}") for number, one in enumerate(sources, start=1)]
    return nbformat.v4.new_notebook(cells=cells)


@pytest.fixture
def place(monkeypatch: pytest.MonkeyPatch) -> Iterator[Path]:
    """Let kernels have a temporary folder of their own, and see that it and the processes are as they were."""
    with tempfile.TemporaryDirectory() as folder:
        monkeypatch.setattr(tempfile, "tempdir", folder)
        yield Path(folder)
        assert list(Path(folder).iterdir()) == [], "the kernel's private folder is left"
        assert not alive(folder), "a process of the kernel is left"


def alive(folder: str) -> list[int]:
    found = []
    for process in psutil.process_iter():
        with contextlib.suppress(psutil.Error, OSError):
            if process.environ().get("IPYTHONDIR", "").startswith(folder) and process.status() != psutil.STATUS_ZOMBIE:
                found.append(process.pid)
    return found


def fails(*sources: str, timeout: float = 60.0) -> BandbookError:
    with pytest.raises(BandbookError) as caught:
        run_notebook(notebook(*sources), timeout=timeout)
    partial = nbformat.reads(caught.value.notebook.decode(), as_version=4)
    nbformat.validate(partial)
    assert [cell.source for cell in partial.cells] == list(sources)
    assert "seen" in partial.cells[0].outputs[0].text
    return caught.value


@pytest.mark.journey
def test_workings_give_the_same_bytes_twice(place: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("SECRET", "1")
    monkeypatch.setenv("PYTHONHASHSEED", "7")
    key = "sha256:" + "1" * 64
    first, second = (local_runner(timeout=60)(PARAMETERS, key) for _ in range(2))
    assert first.files == second.files
    assert first.quantities == second.quantities
    values = {row["name"]: row["value"] for row in first.quantities}
    assert values == {**values, "workings.secret": 0.0, "workings.empty": 0.0, "workings.text": 6.0}
    assert [(row["kind"], row["file"], row["step"]) for row in first.exhibits] == [
        ("figure", "figures/workings-1.svg", "step-1"),
        ("text", "tables/workings-1.txt", "step-1"),
        ("text", "tables/workings-2.txt", "step-1"),
        ("text", "tables/workings-3.txt", "step-1"),
        ("text", "tables/workings-4.txt", "step-2"),
        ("text", "tables/workings-5.txt", "step-2"),
    ]
    assert "energy (eV)" in first.exhibits[0]["alt"]
    texts = [row.get("text", "") for row in first.exhibits]
    assert texts[1] == "before\nafter\n"
    assert "<cell>:8: UserWarning: mind" in texts[2]
    assert texts[3] == "array([inf])"
    assert texts[4].startswith("0 . .\n1 . .\n")
    assert texts[4].endswith(CUT)
    assert texts[5] == "<object at 0x…>"
    assert set(first.run) == {"began", "seconds", "host"}
    for data in first.files.values():
        for secret in (str(place), sys.prefix, tempfile.gettempdir()):
            assert secret.encode() not in data
    nbformat.validate(nbformat.reads(first.files["notebook.ipynb"].decode(), as_version=4))


@pytest.mark.journey
def test_a_block_that_raises_leaves_no_child(place: Path) -> None:
    deep = "import json, pathlib\ndef f(text):\n    return json.loads(text + str(pathlib.Path.cwd()))\n"
    error = fails(
        f"print('seen')\n{CHILD.format('True')}{CHILD.format('False')}{deep}", "x = 1\nf('{')", "print('never')"
    )
    assert isinstance(error, WorkingsError)
    assert (error.step, error.cell, error.source) == (2, 2, "x = 1\nf('{')")
    assert str(error).startswith("JSONDecodeError: Expecting property name")
    assert error.offset == 2
    assert "json/decoder.py" in error.traceback
    assert "\x1b" not in error.traceback
    for secret in (str(place), sys.prefix, sys.base_prefix):
        assert secret not in error.traceback
        assert secret.encode() not in error.notebook


@pytest.mark.journey
def test_a_block_that_hangs(place: Path) -> None:
    began = time.monotonic()
    error = fails(
        f"print('seen')\n{CHILD.format('True')}", "print('x' * 99)\nwhile True:\n    print('x' * 99)", "1", timeout=0.5
    )
    assert isinstance(error, RunError)
    assert (error.reason, error.step) == ("timed out", 2)
    assert "a cell ran longer than 0.5 s" in str(error)
    assert time.monotonic() - began < 60
    assert place.is_dir()


@pytest.mark.journey
@pytest.mark.parametrize(
    ("code", "reason"),
    [
        ("os._exit(0)", "kernel died"),
        ("os.kill(os.getpid(), 9)", "killed"),
        ("sys.exit()", "kernel died"),
        ("quit()", "kernel died"),
    ],
)
def test_a_kernel_that_ends_itself(code: str, reason: str, place: Path) -> None:
    error = fails(f"print('seen')\nimport os\n{CHILD.format('True')}", code)
    assert isinstance(error, RunError)
    assert (error.reason, error.step, error.exit_status) == (reason, 2, 4)
    assert place.is_dir()


@pytest.mark.journey
@pytest.mark.skipif(os.name == "nt", reason="Ctrl-C is another thing there")
def test_an_interrupted_command_ends_at_once(place: Path) -> None:
    code = (
        "import nbformat.v4 as v4\nfrom bandbook.notebooks import run_notebook\n"
        "cells = [v4.new_code_cell('import pathlib\\nwhile True: pass', id='step-1')]\n"
        "print('begun', flush=True)\nrun_notebook(v4.new_notebook(cells=cells), timeout=60)\n"
    )
    command = [sys.executable, "-c", code]
    environment = {**os.environ, "TMPDIR": str(place)}
    with subprocess.Popen(
        command, env=environment, cwd=ROOT, stdout=subprocess.PIPE, stderr=subprocess.PIPE
    ) as process:
        deadline = time.monotonic() + 30
        while not alive(str(place)) and time.monotonic() < deadline:
            time.sleep(0.1)
        assert alive(str(place))
        time.sleep(2)
        process.send_signal(signal.SIGINT)
        _, said = process.communicate(timeout=30)
    assert process.returncode == -signal.SIGINT
    assert b"KeyboardInterrupt" in said


def test_a_socket_has_a_short_path(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    deep = tmp_path / ("x" * 100)
    deep.mkdir()
    monkeypatch.setattr(tempfile, "tempdir", str(deep))
    with private_folder() as folder:
        assert len(os.fsencode(folder)) <= LONGEST_BASE + 20
        assert folder.stat().st_mode & 0o077 == 0
        (folder / "x").write_text("x")
    assert not folder.exists()


def test_a_kernel_sees_no_secrets(monkeypatch: pytest.MonkeyPatch) -> None:
    for name in ("API_TOKEN", "PYTHONSTARTUP", "JUPYTER_PATH", "OMP_NUM_THREADS"):
        monkeypatch.setenv(name, "secret")
    seen = kernel_environment(Path("/s"))
    assert "secret" not in seen.values()
    assert seen["OMP_NUM_THREADS"] == seen["OPENBLAS_NUM_THREADS"] == seen["MKL_NUM_THREADS"] == "1"
    assert (seen["PYTHONHASHSEED"], seen["SOURCE_DATE_EPOCH"]) == ("0", "315532800")
    assert all(seen[name].startswith("/s/") for name in ("IPYTHONDIR", "TMPDIR", "MATPLOTLIBRC"))


def test_composing_needs_no_kernel() -> None:
    assert harvest(compose(PARAMETERS, "sha256:" + "0" * 64)).quantities == []
