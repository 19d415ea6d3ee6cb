"""A built book in a browser: from disk and over http below a prefix, with no request to another host."""

import functools
import http.server
import shutil
import subprocess
import sys
import threading
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

CHROMIUM = shutil.which("chromium")
FLAGS = ["--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-background-networking", "--disable-sync"]
PAGES = ["index.html", "catalogue/index.html", "reading/index.html", "cases/a/index.html", "parameters/set/index.html"]
pytestmark = [
    pytest.mark.journey,
    pytest.mark.skipif(CHROMIUM is None, reason="not run: there is no chromium; CI installs it"),
]


class Quiet(http.server.SimpleHTTPRequestHandler):
    def log_message(self, *_: object) -> None:
        """Say nothing."""


@pytest.fixture
def site(make_book: Callable[..., Path], tmp_path: Path) -> Path:
    root = make_book()
    command = [sys.executable, "-c", "from bandbook.cli import main; main()", "bind"]
    subprocess.run(command, cwd=root, check=True, capture_output=True, timeout=300)
    target = tmp_path / "served/below/a/prefix"
    target.parent.mkdir(parents=True)
    shutil.copytree(root / "site", target)
    return target


@pytest.fixture
def address(site: Path) -> Iterator[str]:
    handler = functools.partial(Quiet, directory=str(site.parents[2]))
    with http.server.ThreadingHTTPServer(("127.0.0.1", 0), handler) as server:
        threading.Thread(target=server.serve_forever, daemon=True).start()
        yield f"http://127.0.0.1:{server.server_port}/below/a/prefix/"
        server.shutdown()


def test_pages_open_and_ask_no_other_host(site: Path, address: str) -> None:
    from playwright.sync_api import sync_playwright

    found: list[str] = []
    with sync_playwright() as play:
        browser = play.chromium.launch(executable_path=CHROMIUM, args=FLAGS)
        for base in (address, site.as_uri() + "/"):
            page = browser.new_page(viewport={"width": 360, "height": 900})
            page.on("console", lambda message: found.extend([message.text] if message.type == "error" else []))
            page.on("request", lambda request: found.extend([request.url] if _is_foreign(request.url) else []))
            for name in PAGES:
                page.goto(base + name, wait_until="load")
                wide = page.evaluate("document.documentElement.scrollWidth - document.documentElement.clientWidth")
                assert wide <= 1, f"{name}: {wide} px wider than a phone"
            page.goto(base + "cases/a/index.html")
            assert page.locator("svg[role=img]").count() == 2
            assert page.locator("figure img").count() == 0
            page.close()
        browser.close()
    assert found == []


def _is_foreign(url: str) -> bool:
    return not url.startswith(("http://127.0.0.1:", "file://", "data:", "blob:"))
