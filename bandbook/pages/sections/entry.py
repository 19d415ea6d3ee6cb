"""A study: its figures, a strip of what it gave, its tables."""

from typing import Any

from bandbook.cases import Block
from bandbook.pages.page import CaseView

#: Quantities of a strip; the rest stands in the tables and the record.
MOST_IN_STRIP = 8
_NUMBERED = ("energy_", "k_", "gap_", "extended_gap_")


def facts(view: CaseView, block: Block) -> dict[str, Any] | None:
    """Return the exhibits and the strip of a study."""
    study = block.name or str(block.table.get("question", "study"))
    record = view.record
    if record is None:
        return {
            "study": study,
            "missing": True,
            "figures": [],
            "tables": [],
            "strip": [],
            "warnings": [],
            "question": "",
        }
    exhibits = [exhibit for exhibit in record.exhibits if exhibit["study"] == study]
    own = [q for q in record.quantities if q["name"].startswith(f"{study}.") and not q["recorded"]]
    first = [q for q in own if q["name"].partition(".")[2] == "gap_levels" or not _is_numbered(q["name"])]
    judged = {reference["quantity"]: reference for reference in record.references}
    strip = [
        {**q, "short": q["name"].partition(".")[2], "reference": judged.get(q["name"])} for q in first[:MOST_IN_STRIP]
    ]
    return {
        "study": study,
        "question": str(block.table.get("question", "")),
        "missing": False,
        "figures": [exhibit for exhibit in exhibits if exhibit["kind"] == "figure"],
        "tables": [exhibit for exhibit in exhibits if exhibit["kind"] == "table"],
        "strip": strip,
        "warnings": [warning.partition(": ")[2] for warning in record.warnings if warning.startswith(f"{study}: ")],
    }


def _is_numbered(name: str) -> bool:
    return name.partition(".")[2].startswith(_NUMBERED)
