"""The wheel carries the templates: a book is started and bound by the package from the wheel alone."""

import os
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
pytestmark = pytest.mark.journey


def test_a_book_from_the_wheel(tmp_path: Path) -> None:
    build = [sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", str(tmp_path / "dist")]
    subprocess.run(build, cwd=ROOT, check=True, capture_output=True, timeout=120)
    (wheel,) = (tmp_path / "dist").glob("*.whl")
    with zipfile.ZipFile(wheel) as archive:
        archive.extractall(tmp_path / "unpacked")
    assert (tmp_path / "unpacked/bandbook/py.typed").is_file()
    environment = {**os.environ, "PYTHONPATH": str(tmp_path / "unpacked")}

    def bandbook(*arguments: str, folder: Path) -> str:
        code = "import bandbook, sys; print(bandbook.__file__, file=sys.stderr); from bandbook.cli import main; main()"
        command = [sys.executable, "-c", code, *arguments]
        done = subprocess.run(
            command, cwd=folder, env=environment, capture_output=True, text=True, check=True, timeout=300
        )
        assert str(tmp_path / "unpacked") in done.stderr
        return done.stdout.strip().splitlines()[-1]

    bandbook("start", "book", folder=tmp_path)
    assert bandbook("bind", folder=tmp_path / "book") == "executed 1, fresh 0, failed 0"
    assert "--bb-ink" in (tmp_path / "book/site/assets/bandbook/book.css").read_text(encoding="utf-8")
