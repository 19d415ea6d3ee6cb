"""Every number on a page can be followed to its CSV, its parameters and its source."""

import csv
import json
import re
from collections.abc import Callable
from pathlib import Path

from bandbook import workflow
from bandbook.pages.described import called, described, dimension_of
from bandbook.settings import read_settings

MakeBook = Callable[..., Path]


def with_source(case_text: str) -> str:
    return re.sub(r'note = "[^"]*"', 'source = "known1961"', case_text)


def tree_of(root: Path) -> Path:
    settings = read_settings(root / "mkdocs.yml", root)
    return workflow.write_pages(settings, workflow.run(settings))


def test_each_quantity_of_a_strip_stands_in_the_csv_with_its_reference(make_book: MakeBook, case_text: str) -> None:
    tree = tree_of(make_book({"a": with_source(case_text)}))
    page = (tree / "cases/a/index.md").read_text(encoding="utf-8")
    rows = {
        row["quantity"]: row
        for row in csv.DictReader((tree / "cases/a/quantities.csv").read_text(encoding="utf-8").splitlines())
    }
    record = json.loads((tree / "cases/a/record.json").read_text(encoding="utf-8"))
    assert list(rows) == [row["name"] for row in record["quantities"]]
    entry = page.partition('id="study-levels"')[2]
    strip = re.findall(r"<dt title=\"[^\"]+\">(\w+)</dt><dd>([^ <]+)", entry.partition("</dl>")[0])
    assert strip
    for name, shown in strip:
        value = rows[f"levels.{name}"]["value"]
        if shown != "—":
            assert abs(float(shown.replace("−", "-")) - float(value)) <= 0.5001e-4
    homo = rows["levels.homo"]
    assert (homo["agrees"], homo["source"]) == ("yes", "known1961")
    assert float(homo["value"]) == next(row["value"] for row in record["quantities"] if row["name"] == "levels.homo")


def test_the_way_leads_to_parameter_and_source(make_book: MakeBook, case_text: str) -> None:
    tree = tree_of(make_book({"a": with_source(case_text)}))
    page = (tree / "cases/a/index.md").read_text(encoding="utf-8")
    trail = page.partition('<p class="bb-trail">')[2].partition("</p>")[0]
    ways = re.findall(r'href="([^"]+)"', trail)
    assert ways == ["quantities.csv", "../../parameters/set/index.html#beta", "../../sources/index.html#known1961"]
    parameters = (tree / "parameters/set/index.md").read_text(encoding="utf-8")
    assert '<tr id="beta">' in parameters
    assert 'id="known1961"' in (tree / "sources/index.md").read_text(encoding="utf-8")


def test_the_first_screen_answers_four_questions(make_book: MakeBook, case_text: str) -> None:
    tree = tree_of(make_book({"a": case_text}))
    head = (
        (tree / "cases/a/index.md")
        .read_text(encoding="utf-8")
        .partition('<div class="bb-head">')[2]
        .partition("</div>\n\n")[0]
    )
    assert re.findall(r"<dt>([^<]+)</dt>", head)[:4] == ["What it is", "What came out", "Can it be trusted", "Built on"]
    assert "chain, β −2.5 eV" in head
    assert 'href="#study-levels">HOMO (levels)</a>' in head
    assert '<img data-inline src="figures/system.svg" alt="Sketch of the system: ' in head


def test_the_front_page_counts(make_book: MakeBook, case_text: str) -> None:
    wrong = case_text.replace("value = 0.618034", "value = 0.7")
    root = make_book({"a": case_text, "b": wrong, "c": "# no case\n"})
    front = (tree_of(root) / "index.md").read_text(encoding="utf-8")
    counts = dict(re.findall(r"<dt>([^<]+)</dt><dd>([^<]+)</dd>", front))
    assert counts == {"cases": "3", "reference values that agree": "1 of 2", "active": "3", "failed": "1"}
    assert front.startswith(("---", "# Test book"))


def test_the_catalogue_can_be_narrowed(make_book: MakeBook, case_text: str) -> None:
    tree = tree_of(
        make_book({"a": case_text.replace("title: A chain", "title: A chain\ntags: [one, two]"), "b": case_text})
    )
    page = (tree / "catalogue/index.md").read_text(encoding="utf-8")
    assert '<option value="one">one (1)</option>' in page
    assert 'data-tag="one|two"' in page
    assert 'data-dimension="1D"' in page
    assert 'src="../cases/a/figures/levels-on-bands.svg"' in page


def test_systems_in_words() -> None:
    ribbon = {
        "form": "named-lattice",
        "lattice": "armchair-ribbon",
        "lines": 7,
        "beta": -2.7,
        "alpha": 0.0,
        "bond_length": 1.42,
    }
    assert described("system", ribbon) == "armchair ribbon, 7 lines, β −2.7 eV, bond length 1.42 Å"
    assert (
        described("two", {"form": "built-by", "built_by": "wall", "with": {"half": 2}})
        == "two: built by wall(half = 2)"
    )
    assert (
        described("system", {"form": "written-out", "sites": [1], "vectors": []}) == "molecule of 1 site, written out"
    )
    assert [dimension_of({"form": "named-lattice", "lattice": name}) for name in ("ring", "chain", "square", "fcc")] == [
        "molecule", "1D", "2D", "3D"
    ]  # fmt: skip
    assert called("series.band_gap") == "gap of the infinite system (series)"
