"""A built book in a browser: from disk and over http below a prefix, with no request to another host."""

import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

DOUBLE_IDS = "[...document.querySelectorAll('[id]')].map(e => e.id).filter((id, n, all) => all.indexOf(id) !== n)"
FIGURE_TEXT = "document.querySelector('figure svg text, figure svg g[id*=text] use, figure svg g[id*=text] path')"
CONTRAST = """() => {
  const light = colour => {
    const [r, g, b] = colour.match(/[0-9.]+/g).map(Number).map(c => c / 255).map(c => c <= .04045 ? c / 12.92 : ((c + .055) / 1.055) ** 2.4);
    return .2126 * r + .7152 * g + .0722 * b;
  };
  const ink = light(getComputedStyle(FIGURE).fill), paper = light(getComputedStyle(document.body).backgroundColor);
  return (Math.max(ink, paper) + .05) / (Math.min(ink, paper) + .05);
}""".replace("FIGURE", FIGURE_TEXT)
PAGES = [
    "index.html",
    "catalogue/index.html",
    "reading/index.html",
    "cases/butadiene/index.html",
    "parameters/hydrocarbon/index.html",
]
pytestmark = pytest.mark.journey


@pytest.fixture(scope="module")
def site(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the site of a new book whose path has a space and a letter beyond ASCII."""
    folder = tmp_path_factory.mktemp("größe of a book")
    for where, arguments in ((".", ["start", "book"]), ("book", ["bind", "--to", "../served/below/a/prefix"])):
        command = [sys.executable, "-c", "from bandbook.cli import main; main()", *arguments]
        subprocess.run(command, cwd=folder / where, check=True, capture_output=True, timeout=300)
    return folder / "served/below/a/prefix"


@pytest.fixture(scope="module")
def address(site: Path, serve: Callable[[Path], str]) -> str:
    return serve(site)


def test_pages_open_and_ask_no_other_host(site: Path, address: str, chromium: Any) -> None:
    found: list[str] = []
    for base in (address, site.as_uri() + "/"):
        page = chromium.new_page(viewport={"width": 360, "height": 900})
        page.on("console", lambda message: found.extend([message.text] if message.type == "error" else []))
        page.on("pageerror", lambda error: found.append(str(error)))
        page.on("request", lambda request: found.extend([request.url] if _is_foreign(request.url) else []))
        page.on("response", lambda response: found.extend([response.url] if response.status >= 400 else []))
        for name in PAGES:
            page.goto(base + name, wait_until="load")
            wide = page.evaluate("document.documentElement.scrollWidth - document.documentElement.clientWidth")
            assert wide <= 1, f"{name}: {wide} px wider than a phone"
        page.goto(base + "cases/butadiene/index.html")
        assert page.locator("svg[role=img]").count() == 6
        assert page.locator("figure img").count() == 0
        assert page.evaluate(DOUBLE_IDS) == []
        page.close()
    assert found == []


def test_figures_follow_light_and_dark(site: Path, chromium: Any) -> None:
    page = chromium.new_page(color_scheme="dark")
    page.goto((site / "cases/butadiene/index.html").as_uri())
    colours = []
    for _ in range(2):
        assert page.evaluate(CONTRAST) > 4.5
        colours.append(page.evaluate(f"getComputedStyle({FIGURE_TEXT}).fill"))
        page.locator("label.md-header__button[for^=__palette]:not([hidden])").click()
    assert len(set(colours)) == 2


def test_search_finds_a_case_over_http_and_is_not_offered_from_disk(site: Path, address: str, chromium: Any) -> None:
    page = chromium.new_page(viewport={"width": 1280, "height": 900})
    page.goto((site / "index.html").as_uri())
    assert not page.locator(".md-search").is_visible()
    page.goto(address + "index.html")
    page.locator(".md-search__input").click()
    page.locator(".md-search__input").press_sequentially("butadiene", delay=50)
    first = page.locator(".md-search-result__item a[href*='cases/butadiene/index.html']").first
    first.wait_for()
    first.click()
    page.wait_for_url("**/cases/butadiene/index.html*")


def test_the_downloads_of_a_case_are_there(address: str, chromium: Any) -> None:
    page = chromium.new_page()
    page.goto(address + "cases/butadiene/index.html")
    for link in page.locator("a[download]").all():
        assert page.request.get(link.evaluate("one => one.href")).ok, link.get_attribute("href")
    assert page.locator("a[download]").count() >= 5


def _is_foreign(url: str) -> bool:
    return not url.startswith(("http://127.0.0.1:", "file://", "data:", "blob:"))
