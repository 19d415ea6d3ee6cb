"""What an author writes is escaped, results stand where their block stands, and only what changed is written."""

import csv
import html
import json
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from bandbook import workflow
from bandbook.errors import AuthorError, WorkingsError
from bandbook.notebooks import Harvest
from bandbook.pages import package_templates
from bandbook.pages.highlight import highlighted
from bandbook.pages.sections import SECTIONS
from bandbook.settings import read_settings

MakeBook = Callable[..., Path]


def fake(parameters: dict[str, Any], key: str) -> Harvest:
    del key
    (study,) = parameters["studies"]
    row = {"kind": "level", "unit": "eV", "in_beta": 0.618034, "uncertainty": None, "meaning": "<b>"}
    words = {"alt": '"<', "caption": "c", "step": "step-1"}
    return Harvest(
        quantities=[{"name": f"{study}.homo", "value": -1.5, **row}],
        exhibits=[{"study": study, "kind": "figure", "name": "x", "file": "figures/x.svg", **words}],
        warnings=[{"study": study, "text": "mind <this>"}],
        files={"notebook.ipynb": b"{}", "figures/x.svg": b"<svg/>"},
    )


def write(root: Path) -> tuple[workflow.Finished, Path]:
    settings = read_settings(None, root)
    finished = workflow.run(settings, runner=fake)
    return finished, workflow.write_pages(settings, finished)


def page_of(tree: Path, name: str = "cases/a") -> str:
    return (tree / name / "index.md").read_text(encoding="utf-8")


def test_titles_and_words_are_escaped(make_book: MakeBook, case_text: str) -> None:
    text = case_text.replace("title: A chain", 'title: "<script>alert(1)</script> *x* _y_"\naim: "<i>"')
    finished, tree = write(make_book({"a": text}))
    assert finished.exit_status == 0
    for name in ("cases/a", "catalogue"):
        assert "<script>" not in page_of(tree, name)
        assert "<i>" not in page_of(tree, name)
    assert "mind &lt;this&gt;" in page_of(tree)
    assert 'alt="&#34;&lt;"' in page_of(tree)


def test_only_what_changed_is_written_and_what_is_gone_goes(make_book: MakeBook, case_text: str) -> None:
    root = make_book({"a": case_text, "b": case_text})
    _, tree = write(root)
    before = {path: path.stat().st_mtime_ns for path in tree.rglob("*") if path.is_file()}
    (root / "content/cases/b.md").unlink()
    _, tree = write(root)
    assert not (tree / "cases/b").exists()
    changed = {
        path.relative_to(tree).as_posix()
        for path, time in before.items()
        if path.exists() and path.stat().st_mtime_ns != time
    }
    # The first page of `a` said "executed", the list of the set's users named `b`, the front page counted it.
    assert changed == {
        "index.md", "catalogue/index.md", "catalogue/catalogue.csv", "catalogue/catalogue.json", "parameters/set/index.md", "cases/a/index.md",
    }  # fmt: skip


def test_disagreement_and_unknown_quantity(make_book: MakeBook, case_text: str) -> None:
    finished, tree = write(make_book({"a": case_text.replace("0.618034", "0.7")}))
    assert (finished.exit_status, finished.summary) == (1, "executed 1, fresh 0, failed 0")
    assert "✗ 1 of 1 reference values disagree" in page_of(tree)
    assert "✗ disagrees" in page_of(tree)
    finished, _ = write(make_book({"a": case_text.replace("levels.homo", "levels.energy_77")}, folder="other"))
    assert finished.exit_status == 2
    assert "content/cases/a.md:18: " in finished.messages[0]


def test_a_private_case_has_no_page_and_is_named_nowhere(make_book: MakeBook, case_text: str) -> None:
    private = case_text.replace("title: A chain", "title: Concealed chain\nprivate: true")
    public = case_text.replace("title: A chain", "title: A chain\nsee: [concealed]")
    finished, tree = write(make_book({"a": public, "concealed": private}))
    assert finished.exit_status == 0
    assert not (tree / "cases/concealed").exists()
    for path in tree.rglob("*"):
        assert not path.is_file() or b"oncealed" not in path.read_bytes(), path


def test_cases_that_belong_together_are_named(make_book: MakeBook, case_text: str) -> None:
    pair = {"a": case_text.replace("title: A chain", "title: A chain\nsee: [p/b]"), "p/b": case_text}
    _, tree = write(make_book(pair))
    assert '<a href="../../cases/p/b/index.html">A chain</a>' in page_of(tree)
    assert '<a href="../../../catalogue/index.html">' in page_of(tree, "cases/p/b")


def test_a_study_says_what_was_asked_and_what_it_rests_on(make_book: MakeBook, case_text: str) -> None:
    _, tree = write(make_book({"a": case_text}))
    asked = page_of(tree).partition('<p class="bb-asked">')[2].partition("</p>")[0]
    rests = 'parameters: <a href="../../parameters/set/index.html#beta">set.beta</a>'
    assert asked == "<strong>levels</strong> · cells 4"
    trail = page_of(tree).partition('<p class="bb-trail">')[2].partition("</p>")[0]
    assert rests in trail
    assert '<a href="quantities.csv" download>' in trail
    values = page_of(tree).partition("<caption>Reference values</caption>")[2]
    assert "<td data-number>0.618034</td> <td data-number>10⁻⁶</td> <td data-number>0.618034</td>" in values
    assert "✓ agrees" in values


def test_sites_and_couplings_are_a_table_with_their_parameters(make_book: MakeBook, case_text: str) -> None:
    written = (
        'sites = [{ name = "A" }, { name = "B", alpha = "@set.beta" }]\n'
        'couplings = [{ from = "A", to = "B", beta = -1.5 }]'
    )
    text = case_text.replace('lattice = "chain"\nbeta = "@set.beta"', written).replace("\ncells = 4", "")
    finished, tree = write(make_book({"a": text[: text.index("```toml reference")]}))
    assert finished.messages == ()
    assert '<th scope="col" data-number>alpha <small>eV</small></th>' in page_of(tree)
    assert '<a href="../../parameters/set/index.html#beta" title="set.beta">−2.5</a>' in page_of(tree)
    assert "<td data-number>−1.5</td>" in page_of(tree)


def test_mistakes_stand_on_top_and_at_their_block(make_book: MakeBook, case_text: str) -> None:
    text = case_text.replace("cells = 4", "cells = -4").replace("Words before.", "Words before, *kept*.")
    finished, tree = write(make_book({"a": text}))
    assert finished.exit_status == 2
    page = page_of(tree)
    assert page.count("content/cases/a.md:14: ") == 2
    assert page.index("1 mistake in the case file") < page.index("Words before, *kept*.") < page.rindex("a.md:14: ")
    assert "no result yet" in page


def test_a_block_that_cannot_be_read_is_shown_as_written(make_book: MakeBook, case_text: str) -> None:
    finished, tree = write(make_book({"a": case_text.replace("cells = 4", "cells = <4")}))
    assert finished.exit_status == 2
    assert "cells = &lt;4</pre>" in page_of(tree)
    assert '<th scope="row">lattice</th>' in page_of(tree), "the rest of the page is intact"


def test_a_failure_stands_at_its_block(make_book: MakeBook, case_text: str) -> None:
    def failing(parameters: dict[str, Any], key: str) -> Harvest:
        del parameters, key
        error = WorkingsError("it failed <here>", source="1 / 0", traceback="ZeroDivisionError: <b>")
        error.step = 2
        raise error

    text = case_text + "\n```python workings\n1 / 0\n```\n\nWords after.\n"
    settings = read_settings(None, make_book({"a": text}))
    finished = workflow.run(settings, runner=failing)
    page = page_of(workflow.write_pages(settings, finished))
    assert finished.exit_status == 1
    assert '<a href="#failure">' in page
    assert page.index("The run failed here:") > page.index('<span class="bb-number">1</span>')
    assert page.index("ZeroDivisionError: &lt;b&gt;") < page.index("Words after.")
    assert "it failed &lt;here&gt;" in page


def test_a_wrong_template_of_the_book_is_told_with_its_line(make_book: MakeBook) -> None:
    root = make_book()
    template = root / "site_templates/sections/head.html"
    template.parent.mkdir(parents=True)
    template.write_text("<p>\n{% if %}\n", encoding="utf-8")
    with pytest.raises(AuthorError, match=r"^site_templates/sections/head.html:2: the template cannot be filled"):
        write(root)


def test_what_a_link_brings_in_from_outside_is_not_published(make_book: MakeBook, tmp_path: Path) -> None:
    root = make_book()
    (tmp_path / "secret.txt").write_text("secret", encoding="utf-8")
    (root / "content/notes.txt").symlink_to(tmp_path / "secret.txt")
    (root / "content/kept.txt").write_text("kept", encoding="utf-8")
    _, tree = write(root)
    assert (tree / "kept.txt").is_file()
    assert not (tree / "notes.txt").exists()


def test_the_catalogue_as_csv_and_json(make_book: MakeBook, case_text: str) -> None:
    _, tree = write(make_book({"a": case_text.replace("A chain", '"A, chain"')}))
    rows = list(csv.reader((tree / "catalogue/catalogue.csv").read_text(encoding="utf-8").splitlines()))
    assert rows[1] == ["a", "A, chain", "active", "done", "1 reference value agrees", "levels.homo", "-1.5", "eV"]
    (row,) = json.loads((tree / "catalogue/catalogue.json").read_text(encoding="utf-8"))
    assert (row["case"], row["system"], row["quantities"][0]["value"]) == ("a", "chain, β −2.5 eV", -1.5)


def test_a_set_tells_who_uses_each_value(make_book: MakeBook) -> None:
    _, tree = write(make_book())
    used, unused = re.findall(r'<tr id="\w+">.*?</tr>', page_of(tree, "parameters/set"))
    assert "<td data-number>−2.5</td> <td data-number>0.1</td> <td>eV</td>" in used
    assert '<a href="../../cases/a/index.html">a</a>' in used
    assert "no case" in unused


def test_every_section_has_its_template() -> None:
    templates = {path.stem for path in (package_templates() / "sections").glob("*.html")}
    assert templates == {name for name, _ in SECTIONS}


def test_python_is_marked_and_what_is_none_is_left() -> None:
    assert highlighted("def f():  # <x>") == (
        '<span class="bb-keyword">def</span> f():  <span class="bb-comment"># &lt;x&gt;</span>'
    )
    assert highlighted("x = '''<") == "x = &#x27;&#x27;&#x27;&lt;"
    source = "a = 'α' + f'{b}'\nif a:\n\tpass\n\n"
    assert html.unescape(re.sub(r"</?span[^>]*>", "", highlighted(source))) == source
