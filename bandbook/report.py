"""The reference values of a run as a test report in JUnit's XML, which build servers read."""

import xml.etree.ElementTree as ET  # only writes here; nothing foreign is parsed
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from bandbook.errors import printable
from bandbook.records import Record


@dataclass(frozen=True)
class Entry:
    """One case in the report.

    Attributes:
        case: Its id.
        file: Its file, relative to the book.
        record: Its record; ``None`` when it could not be read or did not finish.
        messages: Why there is no record, or what was wrong besides.
    """

    case: str
    file: str
    record: Record | None
    messages: tuple[str, ...] = ()


def report_bytes(title: str, entries: Sequence[Entry]) -> bytes:
    """Return the report: a suite a case, a test case a reference value.

    A value that disagrees is a failure; a case that could not be read or did not finish is one error; a case without
    reference values is skipped. Nothing of time or place stands in it: the same run gives the same bytes.

    Args:
        title: The book's title.
        entries: Every case of the run.
    """
    root = ET.Element("testsuites", name=_clean(title))
    for entry in entries:
        _suite(root, entry)
    for name in ("tests", "failures", "errors", "skipped"):
        root.set(name, str(sum(int(suite.get(name, "0")) for suite in root)))
    ET.indent(root, " ")
    text = ET.tostring(root, encoding="unicode")
    return f'<?xml version="1.0" encoding="utf-8"?>\n{text}\n'.encode()


def _suite(root: ET.Element, entry: Entry) -> None:
    suite = ET.SubElement(root, "testsuite", name=_clean(entry.case))
    for row in entry.record.references if entry.record else ():
        case = _test(suite, entry, row["quantity"])
        if not row["agrees"]:
            _verdict(case, "failure", _short(row), _whole(row))
    if entry.record is None or entry.messages:
        text = "\n".join(entry.messages) or "it was not run; a report needs a finished run; run it"
        _verdict(_test(suite, entry, "run"), "error", text.splitlines()[0], text)
    elif not entry.record.references:
        _verdict(_test(suite, entry, "run"), "skipped", "the case has no reference value", "")
    for name, tag in (("tests", "testcase"), ("failures", "failure"), ("errors", "error"), ("skipped", "skipped")):
        suite.set(name, str(sum(1 for _ in suite.iter(tag))))


def _test(suite: ET.Element, entry: Entry, name: str) -> ET.Element:
    words = {"classname": entry.case, "name": name, "file": entry.file}
    return ET.SubElement(suite, "testcase", {key: _clean(word) for key, word in words.items()})


def _verdict(case: ET.Element, tag: str, message: str, text: str) -> None:
    verdict = ET.SubElement(case, tag, message=_clean(message))
    if tag != "skipped":
        verdict.set("type", tag)
        verdict.text = "\n".join(_clean(line) for line in text.split("\n"))


def _short(row: Mapping[str, Any]) -> str:
    found = "no answer" if row["found"] is None else f"found {row['found']}"
    return f"{found}, reference value {row['value']} within {row['within']}"


def _whole(row: Mapping[str, Any]) -> str:
    unit = "β" if row["unit"] == "beta" else row["unit"]
    basis = ("source", row["source"]) if row["source"] else ("note", row["note"])
    lines = {
        "found": "no answer" if row["found"] is None else f"{row['found']} {unit}".rstrip(),
        "value": f"{row['value']} {unit}".rstrip(),
        "within": row["within"],
        basis[0]: basis[1],
    }
    return "\n".join(f"{name}: {value}" for name, value in lines.items())


def _clean(text: object) -> str:
    r"""Return a text without signs that XML cannot hold.

    >>> _clean("a\x00b"), _clean("β & <x>")
    ('a\\x00b', 'β & <x>')
    """
    return printable(str(text))
