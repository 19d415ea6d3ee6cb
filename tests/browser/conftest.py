"""Sites that are judged: the demonstration book, and a book in which things went wrong; each built once per run."""

import fcntl
import functools
import http.server
import os
import shutil
import subprocess
import sys
import threading
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

ROOT = Path(__file__).parents[2]
CHROMIUM = shutil.which("chromium")
FLAGS = ["--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-background-networking", "--disable-sync"]
SETTINGS = """site_name: Troubled book
docs_dir: content
use_directory_urls: false
theme:
  name: material
  font: false
plugins:
  - search
  - bandbook
"""
CASE = """---
title: {title}
tags: [one, two]
aim: what this is for
---

Words with a formula $E = \\alpha + 2\\beta\\cos ka$ and `code`.

{before}
```toml system
lattice = "chain"
beta = {beta}
```

```toml study
question = "levels"
cells = 4
```

```toml reference
"levels.homo" = {{ value = {homo}, within = 1e-6, unit = "beta", source = "known1961" }}
```

```toml recorded
"levels.lumo" = {{ value = 1.5, note = "an old value" }}
```
"""
FAILING = "```python workings\nprint('seen')\n1 / 0\n```\n"
DRAWING = (
    "```python workings\nimport matplotlib.pyplot as plt\nplt.plot([1, 2], [3, 4])\nplt.show()\nreport('x', 1.0)\n```\n"
)
TROUBLED = {
    "good": CASE.format(title="Good", before=DRAWING, beta='"@set.beta"', homo=0.618034),
    "wrong": CASE.format(title="Disagrees", before="", beta=-2.5, homo=0.7),
    "broken": CASE.format(title="Broken", before="", beta='"-2,5"', homo=0.618034).replace("cells", "cels"),
    "failed": CASE.format(title="Failed", before=FAILING, beta=-2.5, homo=0.618034),
}
SET = 'title = "a set"\nnote = "made up"\n[values]\nbeta = { value = -2.5, u = 0.1, unit = "eV", meaning = "resonance integral" }\n'


def not_run(reason: str) -> None:
    """Skip a test that lacks a tool, except in CI, which must have it."""
    if os.environ.get("CI"):
        pytest.fail(f"not run: {reason}")
    pytest.skip(f"not run: {reason}")


def bandbook(*arguments: str, folder: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-c", "from bandbook.cli import main; main()", *arguments]
    return subprocess.run(command, cwd=folder, capture_output=True, text=True, check=False, timeout=600)


def write_demonstration(folder: Path) -> None:
    shutil.copytree(ROOT / "content", folder / "content")
    shutil.copy(ROOT / "mkdocs.yml", folder)


def write_troubled(folder: Path) -> None:
    files = {
        "mkdocs.yml": SETTINGS,
        "content/index.md": "# Troubled book\n\nWords.\n",
        "content/parameters/set.toml": SET,
        "content/sources.bib": "@book{known1961, author={A. Author}, title={A book}, year={1961}}\n",
        **{f"content/cases/{name}.md": text for name, text in TROUBLED.items()},
    }
    for name, text in files.items():
        (folder / name).parent.mkdir(parents=True, exist_ok=True)
        (folder / name).write_text(text, encoding="utf-8")


def built_once(root: Path, name: str, write: Callable[[Path], None]) -> Path:
    """Return a site below a prefix; the first worker of a run builds it, the others wait."""
    folder = root / name
    with (root / f"{name}.lock").open("w") as lock:
        fcntl.flock(lock, fcntl.LOCK_EX)
        site = folder / "served/below/a/prefix"
        if not (folder / "done").is_file():
            (folder / "book").mkdir(parents=True)
            write(folder / "book")
            done = bandbook("bind", "--to", str(site), folder=folder / "book")
            (folder / "done").write_text(f"{done.returncode}\n{done.stderr}", encoding="utf-8")
    assert (site / "index.html").is_file(), (folder / "done").read_text(encoding="utf-8")
    return site


@pytest.fixture(scope="session")
def shared(tmp_path_factory: pytest.TempPathFactory, worker_id: str) -> Path:
    """Return a folder that all workers of a run share."""
    base = tmp_path_factory.getbasetemp()
    folder = (base if worker_id == "master" else base.parent) / "judged"
    folder.mkdir(exist_ok=True)
    return folder


@pytest.fixture(scope="session")
def demonstration(shared: Path) -> Path:
    """Return the site of the demonstration book."""
    return built_once(shared, "demonstration", write_demonstration)


@pytest.fixture(scope="session")
def troubled(shared: Path) -> Path:
    """Return the site of a book with a good, a disagreeing, a broken and a failed case."""
    return built_once(shared, "troubled", write_troubled)


class Quiet(http.server.SimpleHTTPRequestHandler):
    def log_message(self, *_: object) -> None:
        """Say nothing."""

    def translate_path(self, path: str) -> str:
        """Find what a page outside the prefix asks of the root."""
        own = super().translate_path(path)
        return own if Path(own).exists() else super().translate_path(f"/below/a/prefix{path}")


@pytest.fixture(scope="session")
def serve() -> Iterator[Callable[[Path], str]]:
    """Return what serves a site below a prefix and gives its address."""
    servers: dict[Path, http.server.ThreadingHTTPServer] = {}

    def address(site: Path) -> str:
        if site not in servers:
            handler = functools.partial(Quiet, directory=str(site.parents[2]))
            servers[site] = http.server.ThreadingHTTPServer(("127.0.0.1", 0), handler)
            threading.Thread(target=servers[site].serve_forever, daemon=True).start()
        return f"http://127.0.0.1:{servers[site].server_port}/below/a/prefix/"

    yield address
    for server in servers.values():
        server.shutdown()
        server.server_close()


@pytest.fixture(scope="session")
def chromium() -> Iterator[Any]:
    """Return a browser."""
    if CHROMIUM is None:
        not_run("there is no chromium")
    from playwright.sync_api import sync_playwright

    with sync_playwright() as play:
        browser = play.chromium.launch(executable_path=CHROMIUM, args=FLAGS)
        yield browser
        browser.close()
