"""A study: what was asked, its figures, a strip of what it gave, its tables."""

from typing import Any

from bandbook.cases import Block, ParameterUse
from bandbook.pages.page import CaseView
from bandbook.pages.sections.system import words

#: Quantities of a strip; the rest stands in the tables and the record.
MOST_IN_STRIP = 8
#: Rows up to which a study's first table lies open.
MOST_OPEN_ROWS = 14
_NUMBERED = ("energy_", "k_", "gap_", "extended_gap_")
_SAID_APART = ("question", "name", "system")


def facts(view: CaseView, block: Block) -> dict[str, Any] | None:
    """Return the exhibits and the strip of a study."""
    question = str(block.table.get("question", "study"))
    study = block.name or question
    record = view.record
    exhibits = [exhibit for exhibit in record.exhibits if exhibit["study"] == study] if record else []
    warnings = record.warnings if record else ()
    return {
        "study": study,
        "question": question,
        "asked": [f"{key} {words(value)}" for key, value in block.table.items() if key not in _SAID_APART],
        "system": str(block.table.get("system", "")),
        "parameters": _parameters(view, block),
        "sources": _sources(view, block, study),
        "is_missing": record is None,
        "figures": [exhibit for exhibit in exhibits if exhibit["kind"] == "figure"],
        "tables": [_table(exhibit) for exhibit in exhibits if exhibit["kind"] == "table"],
        "quantities": _strip(view, study),
        "warnings": [warning.removeprefix(f"{study}: ") for warning in warnings if warning.startswith(f"{study}: ")],
        "up": view.up,
    }


def _uses(view: CaseView, block: Block) -> list[ParameterUse]:
    system = block.table.get("system")
    blocks = {one.line for one in view.checked.case.of_kind("system") if system is None or one.name == system}
    return [use for use in view.checked.uses if use.block in {*blocks, block.line}]


def _parameters(view: CaseView, block: Block) -> list[tuple[str, str]]:
    """Return the values of parameter sets, set and name, that a study and its system rest on."""
    return sorted({(use.set, use.name) for use in _uses(view, block)})


def _sources(view: CaseView, block: Block, study: str) -> list[str]:
    """Return the sources that a study's parameters and reference values name."""
    keys = {view.sources.get((use.set, use.name), "") for use in _uses(view, block)}
    references = view.record.references if view.record else ()
    keys |= {row["source"] or "" for row in references if row["quantity"].startswith(f"{study}.")}
    return sorted(keys - {""})


def _strip(view: CaseView, study: str) -> list[dict[str, Any]]:
    if view.record is None:
        return []
    own = [q for q in view.record.quantities if q["name"].startswith(f"{study}.") and not q["recorded"]]
    named = [{**q, "short": q["name"].partition(".")[2]} for q in own]
    first = [q for q in named if q["short"] == "gap_levels" or not q["short"].startswith(_NUMBERED)]
    judged = {reference["quantity"]: reference for reference in view.record.references}
    return [{**q, "reference": judged.get(q["name"])} for q in first[:MOST_IN_STRIP]]


def _table(exhibit: Any) -> dict[str, Any]:
    """Return a table with a class, which keeps the theme's own dress off it."""
    html = str(exhibit["html"])
    n_rows = html.count("<tr>") - 1
    return {
        "caption": exhibit["caption"],
        "file": exhibit["file"],
        "html": html.replace("<table data-table>", '<table class="bb-data" data-table>', 1),
        "is_short": n_rows <= MOST_OPEN_ROWS,
    }
