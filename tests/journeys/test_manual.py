"""The manual is followed as a reader would: its files are written, its commands run, what it promises is seen."""

import re
import shlex
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

import pytest

pytestmark = pytest.mark.journey

MANUAL = Path(__file__).parents[2] / "content/manual"
FENCE = re.compile(r"^(?P<mark>`{3,})(?P<kind>\w+)\n(?P<text>.*?)^(?P=mark)$", flags=re.MULTILINE | re.DOTALL)
NAMED = re.compile(r"`(content/[^`<>*]+\.\w+)`")


@dataclass
class Reader:
    """Someone who follows a page.

    Attributes:
        folder: Where the next command is called.
        book: The book that files go to.
        latest: The file that was written last.
    """

    folder: Path
    book: Path
    latest: Path

    def follow(self, page: str) -> list[str]:
        """Do what a page says, top to bottom; return the kinds of what was done."""
        text = (MANUAL / page).read_text(encoding="utf-8")
        done = []
        for fence in FENCE.finditer(text):
            named = NAMED.findall(text[: fence.start()].rsplit("\n\n", 2)[-2])
            if fence["kind"] in {"markdown", "toml", "text"} and named:
                self.write(named[-1], fence["text"])
            elif fence["kind"] == "diff":
                self.edit(fence["text"])
            elif fence["kind"] == "console":
                self.call(fence["text"])
            else:
                continue
            done.append(fence["kind"])
        return done

    def write(self, name: str, text: str) -> None:
        self.latest = self.book / name
        self.latest.parent.mkdir(parents=True, exist_ok=True)
        self.latest.write_text(text, encoding="utf-8")

    def edit(self, difference: str) -> None:
        text = self.latest.read_text(encoding="utf-8")
        old, new = (
            "".join(line[1:] + "\n" for line in difference.splitlines() if line[:1] == sign) for sign in ("-", "+")
        )
        assert text.count(old) == 1, old
        self.latest.write_text(text.replace(old, new), encoding="utf-8")

    def call(self, console: str) -> None:
        for step in console.split("$ ")[1:]:
            command, _, promised = step.partition("\n")
            program, *arguments = shlex.split(command)
            if program == "cd":
                self.folder = self.folder / arguments[0]
                continue
            assert program == "bandbook", command
            shown(bandbook(*arguments, folder=self.folder), promised)


def bandbook(*arguments: str, folder: Path) -> str:
    command = [sys.executable, "-c", "from bandbook.cli import main; main()", *arguments]
    done = subprocess.run(command, cwd=folder, capture_output=True, text=True, check=False, timeout=300)
    return done.stderr + done.stdout


def shown(found: str, promised: str) -> None:
    """Fail where promised lines are not found in their order; ``…`` stands for anything."""
    place = 0
    for line in promised.splitlines():
        pattern = ".*?".join(re.escape(part) for part in line.split("…"))
        match = re.compile(f"^{pattern}$" if line != "…" else "", flags=re.MULTILINE).search(found, place)
        assert match, f"the manual promises {line!r}, found was:\n{found}"
        place = match.end()


@pytest.fixture
def reader(tmp_path: Path) -> Reader:
    return Reader(tmp_path, tmp_path / "my-book", tmp_path)


def test_ten_minutes(reader: Reader) -> None:
    done = reader.follow("index.md")
    assert done.count("console") >= 6
    assert (reader.book / "site/index.html").is_file()
    assert (reader.book / "site/cases/hexatriene/index.html").is_file()


def test_what_is_said_of_running_is_seen(reader: Reader) -> None:
    bandbook("start", "my-book", folder=reader.folder)
    reader.folder = reader.book
    assert reader.follow("running.md").count("console") >= 2
    assert {"on-bands.pdf", "on-bands.csv", "report.xml"} <= {path.name for path in reader.book.iterdir()}
    assert not (reader.book / "levels.png").exists()


@pytest.mark.parametrize(("page", "cases"), [("writing-a-case.md", 7), ("book.md", 1)])
def test_every_example_runs_and_agrees(page: str, cases: int, reader: Reader) -> None:
    bandbook("start", "my-book", folder=reader.folder)
    assert reader.follow(page).count("markdown") == cases
    shown(bandbook("run", folder=reader.book), f"executed {cases + 1}, fresh 0, failed 0\n")
    listed = bandbook("list", folder=reader.book).splitlines()
    assert len(listed) == cases + 1
    assert all(" fresh " in line for line in listed), listed
    shown(bandbook("check", folder=reader.book), f"{cases + 1} cases, no mistake")
