"""The test report: its counts add up, every verdict is told, and any text is held."""

from xml.etree import ElementTree as ET

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bandbook.records import Record
from bandbook.report import Entry, report_bytes

COUNTS = {"tests": "testcase", "failures": "failure", "errors": "error", "skipped": "skipped"}


def row(name: str, *, agrees: bool = True, found: float | None = 1.4, note: str = "closed form") -> dict[str, object]:
    basis = {"source": None, "note": note}
    return {"quantity": name, "value": 1.5, "within": 0.01, "found": found, "unit": "eV", "agrees": agrees, **basis}


def record(*rows: dict[str, object]) -> Record:
    return Record("a", "A", "sha256:0", (), rows, (), (), {}, {})


def parsed(*entries: Entry, title: str = "Book") -> ET.Element:
    return ET.fromstring(report_bytes(title, entries))  # noqa: S314 - our own report


def test_a_suite_a_case_and_a_test_case_a_value() -> None:
    rows = (row("bands.gap"), row("bands.total_width", agrees=False), row("levels.gap", agrees=False, found=None))
    root = parsed(
        Entry("a/b", "content/cases/a/b.md", record(*rows)),
        Entry("broken", "content/cases/broken.md", None, ("broken.md:3: first", "broken.md:4: second")),
        Entry("bare", "content/cases/bare.md", record()),
    )
    assert [suite.get("name") for suite in root] == ["a/b", "broken", "bare"]
    assert [root.get(name) for name in COUNTS] == ["5", "2", "1", "1"]
    for level in (root, *root):
        assert {name: level.get(name) for name in COUNTS} == {
            name: str(len(list(level.iter(tag)))) for name, tag in COUNTS.items()
        }
    width = root[0][1]
    assert (width.get("classname"), width.get("name")) == ("a/b", "bands.total_width")
    assert width[0].get("message") == "found 1.4, reference value 1.5 within 0.01"
    assert width[0].text == "found: 1.4 eV\nvalue: 1.5 eV\nwithin: 0.01\nnote: closed form"
    assert root[0][2][0].get("message") == "no answer, reference value 1.5 within 0.01"
    assert root[1][0][0].text == "broken.md:3: first\nbroken.md:4: second"


def test_a_value_that_agrees_carries_nothing() -> None:
    assert list(parsed(Entry("a", "a.md", record(row("bands.gap"))))[0][0]) == []


def test_a_mistake_found_after_the_run_is_an_error_beside_the_values() -> None:
    (suite,) = parsed(Entry("a", "a.md", record(row("bands.gap")), ("a.md:9: unknown quantity",)))
    assert [suite.get(name) for name in COUNTS] == ["2", "0", "1", "0"]


@given(st.text(), st.text(alphabet=st.characters(codec="utf-8"), min_size=1))
def test_any_text_is_held(note: str, title: str) -> None:
    root = parsed(Entry("a", "a.md", record(row("x.y", agrees=False, note=note)), (note,)), title=title)
    assert root.tag == "testsuites"


@pytest.mark.parametrize("sign", ["\x00", "\x1b", "\ufffe", "\ud800", "]]>", '"&<'])
def test_signs_that_xml_cannot_hold_are_written_out(sign: str) -> None:
    text = parsed(Entry("a", "a.md", record(row("x.y", agrees=False, note=f"a{sign}b"))))[0][0][0].text or ""
    assert text.endswith(f"a{sign}b" if sign.isprintable() else f"a{sign.encode('unicode_escape').decode()}b")


def test_the_same_run_gives_the_same_bytes() -> None:
    entries = [Entry("a", "a.md", record(row("x.y")))]
    assert report_bytes("Book", entries) == report_bytes("Book", entries)
