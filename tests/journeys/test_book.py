"""The real thing: a book is started, checked, run, bound and looked at, with real kernels."""

import json
import re
import shutil
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from xml.etree import ElementTree as ET

import pytest

MakeBook = Callable[..., Path]
pytestmark = pytest.mark.journey

WORKINGS = """---
title: Workings
---

```toml system
lattice = "chain"
beta = -1.0
```

```toml study
question = "levels"
cells = 3
```

```python workings
%s
```
"""


def bandbook(*arguments: object, folder: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-c", "from bandbook.cli import main; main()", *map(str, arguments)]
    return subprocess.run(command, cwd=folder, capture_output=True, text=True, check=False, timeout=300)


def last(done: subprocess.CompletedProcess[str]) -> str:
    assert "Traceback (most recent call last)" not in done.stderr, done.stderr
    return done.stdout.strip().splitlines()[-1] if done.stdout.strip() else done.stderr


def test_from_nothing_to_a_page_in_a_folder_with_a_space_and_an_umlaut(tmp_path: Path) -> None:
    assert bandbook("start", "mein Büchlein", folder=tmp_path).returncode == 0
    book = tmp_path / "mein Büchlein"
    assert bandbook("start", "mein Büchlein", folder=tmp_path).returncode == 2
    assert bandbook("check", folder=book).returncode == 0
    done = bandbook("bind", folder=book)
    assert (done.returncode, last(done)) == (0, "executed 1, fresh 0, failed 0"), done.stderr
    page = (book / "site/cases/butadiene/index.html").read_text(encoding="utf-8")
    for words in ("node label", "0.3333", "0.2000", "✓ agrees", "<svg", "aria-label="):
        assert words in page, words
    assert "<img data-inline" not in page
    record = json.loads((book / "site/cases/butadiene/record.json").read_text(encoding="utf-8"))
    k = {row["name"]: row["value"] for row in record["quantities"] if ".k_" in row["name"]}
    assert list(k.values()) == pytest.approx([0.2, 0.4, 0.6, 0.8], abs=1e-10)
    assert last(bandbook("bind", folder=book)) == "executed 0, fresh 1, failed 0"
    assert "fresh" in bandbook("list", folder=book).stdout
    assert "levels.homo" in bandbook("show", "butadiene", folder=book).stdout


def test_what_is_executed_and_what_is_not(make_book: MakeBook, case_text: str) -> None:
    other = case_text.replace('"@set.beta"', "-2.0").replace("A chain", "Another")
    root = make_book({"a": case_text, "same": case_text.replace("A chain", "Same model"), "other": other})
    assert last(bandbook("run", folder=root)) == "executed 2, fresh 1, failed 0"
    results = list((root / ".bandbook/store").iterdir())
    assert len(results) == 2, "two cases with the same model share one result"
    case = root / "content/cases/a.md"

    prose = case_text.replace("Words before.", "Other words.").replace("A chain", "A title").replace("1e-6", "1e-5")
    case.write_text(prose.replace("title:", "tags: [x]\ntitle:"), encoding="utf-8")
    assert last(bandbook("run", folder=root)) == "executed 0, fresh 3, failed 0"
    case.write_text(case_text.replace("cells = 4", "cells = 6"), encoding="utf-8")
    done = bandbook("run", folder=root)
    assert last(done) == "executed 1, fresh 2, failed 0"
    assert done.returncode == 1, "six atoms have another HOMO than the reference value says"
    assert "the reference value is 0.618034" in done.stderr
    case.write_text(case_text, encoding="utf-8")
    parameters = root / "content/parameters/set.toml"
    parameters.write_text(parameters.read_text().replace("-2.5", "-2.6"), encoding="utf-8")
    assert last(bandbook("run", folder=root)) == "executed 1, fresh 2, failed 0"


def test_an_emptied_store_gives_the_same_bytes(make_book: MakeBook, case_text: str) -> None:
    text = (
        case_text
        + "\n"
        + WORKINGS.partition("```python")[2].join(["```python", ""])
        % (
            "import matplotlib.pyplot as plt\nplt.plot([0, 1], rng.random(2))\nplt.show()\n"
            "report('draw', rng.random())\nprint('text')"
        )
    )
    root = make_book({"a": text})

    def content() -> dict[str, bytes]:
        done = bandbook("run", folder=root)
        assert last(done) == "executed 1, fresh 0, failed 0", done.stderr
        store = root / ".bandbook/store"
        paths = [path for path in sorted(store.rglob("*")) if path.is_file() and path.name != "run.json"]
        return {path.relative_to(store).as_posix(): path.read_bytes() for path in paths}

    first = content()
    assert sum(name.endswith(".svg") for name in first) == 6
    shutil.rmtree(root / ".bandbook")
    assert content() == first


@pytest.mark.parametrize(
    ("code", "status", "words"),
    [
        ("1 / 0", 1, "ZeroDivisionError"),
        ("import os\nos._exit(0)", 4, "the kernel died"),
        ("while True:\n    pass", 4, "ran longer than"),
    ],
)
def test_a_failing_case_stops_no_other(code: str, status: int, words: str, make_book: MakeBook, case_text: str) -> None:
    root = make_book({"bad": WORKINGS % code, "good": case_text})
    settings = root / "mkdocs.yml"
    settings.write_text(settings.read_text().replace("- bandbook", "- bandbook:\n      timeout: 5"), encoding="utf-8")
    done = bandbook("bind", "--junit", "report.xml", folder=root)
    assert (done.returncode, last(done)) == (status, "executed 1, fresh 0, failed 1"), done.stderr
    report = ET.parse(root / "report.xml").getroot()  # noqa: S314 - our own report
    assert [report.get(name) for name in ("tests", "failures", "errors", "skipped")] == ["2", "0", "1", "0"]
    assert words in (report.findtext("testsuite/testcase/error") or "")
    assert f"content/cases/bad.md:{16 if status == 1 else 15}: " in done.stderr, (
        "the line that fails, where it is known"
    )
    assert words in done.stderr
    page = (root / "site/cases/bad/index.html").read_text(encoding="utf-8")
    assert "The run failed" in page
    assert (root / "site/cases/good/index.html").is_file()
    if status == 1:
        assert "1 / 0" in page
        assert "Traceback" in page or "ZeroDivisionError" in page


def test_a_mistake_is_shown_on_its_page(make_book: MakeBook, case_text: str) -> None:
    root = make_book({"bad": case_text.replace("cells = 4", "cells = -4"), "good": case_text})
    done = bandbook("bind", folder=root)
    assert (done.returncode, last(done)) == (2, "executed 1, fresh 0, failed 1"), done.stderr
    assert "content/cases/bad.md:14: " in (root / "site/cases/bad/index.html").read_text(encoding="utf-8")


def test_a_notebook_reruns_elsewhere(make_book: MakeBook, case_text: str, tmp_path: Path) -> None:
    root = make_book({"a": case_text})
    assert bandbook("run", folder=root).returncode == 0
    (folder,) = (root / ".bandbook/store").iterdir()
    code = (
        "import json, sys, nbformat\n"
        "from nbclient import NotebookClient\n"
        "nb = nbformat.read('notebook.ipynb', as_version=4)\n"
        "nbformat.validate(nb)\n"
        "NotebookClient(nb, timeout=120).execute()\n"
        "from bandbook.exhibits import MIME\n"
        "found = [o['data'][MIME]['quantities'] for c in nb.cells for o in c.get('outputs', []) if MIME in o.get('data', {})]\n"
        "print(json.dumps([q for one in found for q in one]))\n"
    )
    elsewhere = tmp_path / "elsewhere"
    elsewhere.mkdir()
    shutil.copy(folder / "notebook.ipynb", elsewhere)
    done = subprocess.run([sys.executable, "-c", code], cwd=elsewhere, capture_output=True, text=True, check=True)
    stored = json.loads((folder / "result.json").read_text(encoding="utf-8"))["quantities"]
    assert json.loads(done.stdout.splitlines()[-1]) == stored


@pytest.mark.parametrize("target", ["content", "no/report.xml"])
def test_a_report_that_cannot_be_written_is_refused_before_a_run(target: str, make_book: MakeBook) -> None:
    done = bandbook("bind", "--junit", target, folder=make_book())
    assert (done.returncode, done.stdout) == (2, "")
    assert "folder" in done.stderr


def test_figures_for_a_paper_are_the_same_twice_and_leave_the_store_alone(make_book: MakeBook, case_text: str) -> None:
    code = "import matplotlib.pyplot as plt\nplt.figure(figsize=(6, 2))\nplt.plot([0, 1], rng.random(2))\nplt.show()\n"
    root = make_book({"a": f"{case_text}\n```python workings\n{code}```\n"})
    for figure, ending in (("levels.on-bands", "pdf"), ("workings-1.svg", "svg"), ("levels.diagram", "png")):
        files = []
        for number in (1, 2):
            (root / str(number)).mkdir(exist_ok=True)
            done = bandbook("draw", "a", figure, "--to", f"{number}/x.{ending}", folder=root)
            assert done.returncode == 0, done.stderr
            assert done.stdout.splitlines()[0] == str(root / f"{number}/x.{ending}")
            files.append((root / f"{number}/x.{ending}").read_bytes())
        assert files[0] == files[1]
    assert (root / "1/x.csv").read_text(encoding="utf-8").count("\n") >= 5
    drawing = (root / "1/x.svg").read_text(encoding="utf-8")
    size = [float(word) for word in re.findall(r' (?:width|height)="([\d.]+)mm"', drawing)]
    assert size == pytest.approx([85.0, 85 / 3], abs=0.01), "the workings' own proportions at the width of a column"
    assert not (root / ".bandbook").exists()


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["levels.diagram", "--to", "no/x.pdf"], "a folder that exists"),
        (["levels.diagram", "--to", "content"], "is a folder"),
        (["levels.diagram", "--to", "x.jpg", "--width", "85"], "30 to 400 mm"),
        (["bands", "--to", "x.pdf"], 'the case has no study "bands"; its studies are levels'),
    ],
)
def test_a_drawing_that_is_refused(arguments: list[str], words: str, make_book: MakeBook) -> None:
    root = make_book()
    done = bandbook("draw", "a", *arguments, folder=root)
    assert (done.returncode, done.stdout) == (2, "")
    assert words in done.stderr
    assert not list(root.glob("x.*"))


def test_check_loads_nothing_heavy(make_book: MakeBook) -> None:
    code = (
        "import sys\nfrom bandbook.cli import main\n"
        "try:\n    main(['check'])\nexcept SystemExit as end:\n    assert not end.code\n"
        "print(sorted({'scipy', 'matplotlib', 'IPython', 'nbclient'} & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=make_book(), capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
