"""Progress and messages: lines of their own in a file, one line that is overwritten on a terminal."""

import sys

import pytest

from bandbook.cli.door import CLEAR, progress, tell


@pytest.mark.parametrize(
    ("place", "seen"),
    [("file", "one\ntwo\nmessage\n"), ("terminal", f"{CLEAR}one{CLEAR}two{CLEAR}{CLEAR}message\n")],
)
def test_progress_leaves_no_half_line(
    place: str, seen: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(sys.stderr, "isatty", lambda: place == "terminal")
    told = progress()
    for line in ("one", "two", ""):
        told(line)
    tell("message")
    found = capsys.readouterr()
    assert found.out == ""
    # click takes the signs that steer a terminal out where the stream is none after all.
    assert found.err in {seen, seen.replace(CLEAR, "")}
