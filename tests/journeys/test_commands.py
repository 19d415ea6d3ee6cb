"""The commands as a person calls them: what they refuse, what they print, and their exit status."""

import json
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

pytestmark = pytest.mark.journey
MakeBook = Callable[..., Path]

MOLECULE = """---
title: A star
---

```python workings
from bandbook.model import Coupling, Model, Site

def star(arm):
    return Model((Site("A"), Site("B")), (Coupling(0, 1, -2.5 * arm),))
```

```toml system
built_by = "star"
with = {{ arm = {arm} }}
```

```toml study
question = "levels"
{key}
```
"""


def bandbook(*arguments: str, folder: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-c", "from bandbook.cli import main; main()", *arguments]
    return subprocess.run(command, cwd=folder, capture_output=True, text=True, check=False, timeout=300)


def test_pages_replace_nothing_but_pages(make_book: MakeBook, case_text: str, tmp_path: Path) -> None:
    root = make_book({"one": case_text})
    other = tmp_path / "papers"
    other.mkdir()
    (other / "thesis.txt").write_text("years", encoding="utf-8")
    done = bandbook("bind", "--to", str(other), folder=root)
    assert (done.returncode, done.stdout) == (2, "")
    assert "holds what is no site of a book" in done.stderr
    assert [path.name for path in other.iterdir()] == ["thesis.txt"]
    assert not (root / ".bandbook").exists(), "refused before anything runs"
    for _ in range(2):
        done = bandbook("bind", "--to", str(tmp_path / "new"), folder=root)
        assert done.returncode == 0, done.stderr
    assert (tmp_path / "new/index.html").is_file()


def test_a_damaged_result_is_told_whoever_meets_it(make_book: MakeBook, case_text: str) -> None:
    for command in (["list"], ["show", "one"]):
        root = make_book({"one": case_text})
        bandbook("run", folder=root)
        (result,) = (root / ".bandbook/store").glob("*/result.json")
        result.write_bytes(result.read_bytes()[:-5])
        done = bandbook(*command, folder=root)
        assert done.returncode == 5, command
        assert "set aside" in done.stderr
        assert "Traceback" not in done.stderr


def test_a_system_of_workings_is_told_at_its_own_block(make_book: MakeBook) -> None:
    root = make_book({
        "cells": MOLECULE.format(arm=1, key="cells = 3"),
        "wrong": MOLECULE.format(arm='"x"', key=""),
        "right": MOLECULE.format(arm=1, key=""),
    })  # fmt: skip
    done = bandbook("run", folder=root)
    assert done.returncode == 2
    assert 'cells.md:17: cells: "cells" cuts a piece, and this system is a molecule' in done.stderr
    assert "wrong.md:12: \"star\" called with arm = 'x' raised TypeError" in done.stderr
    assert done.stdout == "executed 1, fresh 0, failed 2\n"
    shown = bandbook("show", "wrong", folder=root)
    assert shown.returncode == 2
    assert "failed at its last run" in shown.stderr


def test_a_case_is_known_by_its_file_too(make_book: MakeBook, case_text: str) -> None:
    done = bandbook("run", "content/cases/one.md", folder=make_book({"one": case_text}))
    assert done.returncode == 2
    assert done.stderr.rstrip().endswith('write "one"')


def test_a_list_says_what_disagrees(make_book: MakeBook, case_text: str) -> None:
    wrong = case_text + '\n```toml reference\n"levels.lumo" = { value = 9, within = 0.1, note = "made up" }\n```\n'
    root = make_book({"one": case_text, "two": wrong})
    assert bandbook("run", folder=root).returncode == 1
    rows = json.loads(bandbook("list", "--json", folder=root).stdout)
    assert [row["agrees"] for row in rows][1] is False
    assert "disagrees" in bandbook("list", folder=root).stdout.splitlines()[1]


@pytest.mark.parametrize("command", ["start", "check", "run", "bind", "list", "show"])
def test_help_shows_an_example_as_it_is_typed(command: str, tmp_path: Path) -> None:
    lines = bandbook(command, "--help", folder=tmp_path).stdout.splitlines()
    first = lines.index("  Example:") + 1
    assert lines[first].startswith(f"    bandbook {command}")
    assert not any("\\b" in line for line in lines)
