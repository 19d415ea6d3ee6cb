"""The plugin hands the page tree over: pictures inlined, titles escaped, nothing asked of another host."""

import logging
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from bandbook import workflow
from bandbook.notebooks import Harvest
from bandbook.settings import read_settings
from bandbook.website import build_site

MakeBook = Callable[..., Path]
PICTURE = '<svg role="img" aria-label="a"><circle id="p-{}" r="1"/></svg>'


def fake(parameters: dict[str, Any], key: str) -> Harvest:
    del key
    (study,) = parameters["studies"]
    row = {"kind": "level", "unit": "eV", "in_beta": 0.618034, "uncertainty": None, "meaning": "highest"}
    return Harvest(
        quantities=[{"name": f"{study}.homo", "value": -1.5, **row}],
        exhibits=[
            {
                "study": study,
                "kind": "figure",
                "name": n,
                "file": f"figures/{n}.svg",
                "alt": 'it\'s > "a"',
                "caption": "c",
                "step": "step-1",
            }
            for n in ("x", "y")
        ],
        files={"notebook.ipynb": b"{}", **{f"figures/{n}.svg": PICTURE.format(n).encode() for n in ("x", "y")}},
    )


def built(root: Path) -> Path:
    settings = read_settings(None, root)
    finished = workflow.run(settings, runner=fake)
    return build_site(settings, workflow.write_pages(settings, finished))


def test_pictures_stand_in_the_page_and_files_beside_it(make_book: MakeBook) -> None:
    site = built(make_book())
    page = (site / "cases/a/index.html").read_text(encoding="utf-8")
    assert all(PICTURE.format(n) in page for n in ("x", "y"))
    assert "data-inline" not in page
    for name in ("record.json", "notebook.ipynb", "figures/x.svg"):
        assert (site / "cases/a" / name).is_file()
    assert not any(site.rglob("*.toml"))
    assert not any(site.rglob("*.md"))


def test_a_picture_outside_the_tree_is_not_read(make_book: MakeBook, case_text: str) -> None:
    words = '<img data-inline src="../../../../../secret.svg" alt="">'
    root = make_book({"a": case_text.replace("Words before.", words)})
    (root / "secret.svg").write_text("<svg>secret</svg>", encoding="utf-8")
    assert "<svg>secret" not in (built(root) / "cases/a/index.html").read_text(encoding="utf-8")


@pytest.mark.parametrize(
    "title", ["<script>alert(1)</script>", "</title><b>x", 'a "b" & c', "*x* _y_ `z` [l](m) {: #i }", "μ: $E_F$ | 2"]
)
def test_a_title_is_shown_as_written(title: str, make_book: MakeBook, case_text: str) -> None:
    quoted = "'" + title.replace("'", "''") + "'"
    site = built(make_book({"a": case_text.replace("title: A chain", f"title: {quoted}")}))
    page = (site / "cases/a/index.html").read_text(encoding="utf-8")
    escaped = title.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;")
    shown = re.search(r"<h1[^>]*>(.*?)</h1>", page)
    assert shown
    assert shown[1].replace("&#58;", ":").replace("&#36;", "$").replace("&#124;", "|").replace("&quot;", '"') == escaped
    assert f"<title>{escaped} - Test book</title>" in page
    assert "<script>alert" not in page
    assert "<script>alert" not in (site / "catalogue/index.html").read_text(encoding="utf-8")


def test_cases_stay_out_of_the_navigation(make_book: MakeBook) -> None:
    front = (built(make_book()) / "index.html").read_text(encoding="utf-8")
    links = re.findall(r'<a href="([^"]+)" class="md-nav__link', front)
    assert list(dict.fromkeys(links)) == [
        "index.html", "catalogue/index.html", "parameters/index.html", "sources/index.html", "reading/index.html",
    ]  # fmt: skip


def test_a_book_that_sets_nothing_has_our_mark_both_palettes_and_no_foreign_font(make_book: MakeBook) -> None:
    root = make_book()
    settings = root / "mkdocs.yml"
    text = settings.read_text(encoding="utf-8")
    bare = text.replace("use_directory_urls: false\n", "").replace("  font: false\n", "")
    settings.write_text(bare, encoding="utf-8")
    site = built(root)
    page = (site / "cases/a/index.html").read_text(encoding="utf-8")
    assert 'href="../../assets/bandbook/mark.svg"' in page
    assert page.count('data-md-color-scheme="slate"') == 1
    loaded = re.findall(r'(?:src|href)="(https?://[^"]+)"', re.sub(r"<a [^>]*>", "", page))
    assert [address for address in loaded if "fonts." in address or "unpkg" in address] == []


def test_a_book_replaces_a_template_and_a_style(make_book: MakeBook) -> None:
    root = make_book()
    for name, text in {
        "sections/trouble.html": "",
        "assets/book.css": "/* own */",
        "theme/partials/logo.html": "<b>own logo</b>",
    }.items():
        path = root / "site_templates" / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, encoding="utf-8")
    site = built(root)
    assert (site / "assets/bandbook/book.css").read_text(encoding="utf-8") == "/* own */"
    assert "own logo" in (site / "index.html").read_text(encoding="utf-8")


def test_a_bad_case_is_a_warning_and_stops_only_strict_builds(
    make_book: MakeBook, case_text: str, monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture
) -> None:
    from mkdocs.commands.build import build
    from mkdocs.config import load_config
    from mkdocs.exceptions import Abort

    root = make_book({"good": case_text, "bad": case_text.replace("cells = 4", "cells = -4")})
    run = workflow.run
    monkeypatch.setattr(workflow, "run", lambda settings: run(settings, runner=fake))
    with caplog.at_level(logging.WARNING, logger="mkdocs"):
        build(load_config(str(root / "mkdocs.yml")))
    assert [record.message for record in caplog.records if "content/cases/bad.md:14: " in record.message]
    assert "✗ agrees" not in (root / "site/cases/good/index.html").read_text(encoding="utf-8")
    assert "content/cases/bad.md:14: " in (root / "site/cases/bad/index.html").read_text(encoding="utf-8")
    with pytest.raises(Abort):
        build(load_config(str(root / "mkdocs.yml"), strict=True))


def test_wrong_settings_are_told_as_such(make_book: MakeBook) -> None:
    from bandbook.errors import AuthorError

    root = make_book()
    settings = read_settings(None, root)
    tree = workflow.write_pages(settings, workflow.run(settings, runner=fake))
    text = (root / "mkdocs.yml").read_text(encoding="utf-8")
    (root / "mkdocs.yml").write_text(text.replace("name: material", "name: no-such-theme"), encoding="utf-8")
    with pytest.raises(AuthorError, match=r"mkdocs.yml:1: the pages could not be built"):
        build_site(settings, tree)
    (root / "mkdocs.yml").write_text(text.replace("  - bandbook\n", ""), encoding="utf-8")
    with pytest.raises(AuthorError, match=r"^mkdocs.yml:7: plugins: the plugin bandbook is missing; "):
        build_site(settings, tree)
