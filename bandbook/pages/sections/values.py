"""Reference values with what was found, or recorded values, which are not recomputed."""

from collections.abc import Mapping
from typing import Any

from bandbook.cases import Block, Reference
from bandbook.pages.numbers import as_written, compared, unit
from bandbook.pages.page import CaseView

VERDICTS = {True: "✓ agrees", False: "✗ disagrees", None: "◌ not compared"}


def facts(view: CaseView, block: Block) -> dict[str, Any] | None:
    """Return a row a value, or nothing where no value could be read."""
    is_reference = block.kind == "reference"
    stated = view.checked.references if is_reference else view.checked.recorded
    judged = {row["quantity"]: row for row in view.record.references} if view.record and is_reference else {}
    names = _names(block)
    rows = [_row(reference, judged.get(reference.quantity)) for reference in stated if reference.quantity in names]
    return {"is_reference": is_reference, "rows": rows, "up": view.up} if rows else None


def _names(block: Block) -> set[str]:
    """Return the quantities that a block names, quoted or as a table in a table."""
    names = set(block.table)
    for name, entry in block.table.items():
        if isinstance(entry, dict):
            names |= {f"{name}.{inner}" for inner in entry}
    return names


def _row(reference: Reference, judged: Mapping[str, Any] | None) -> dict[str, Any]:
    value, found = as_written(reference.value), "—"
    if judged is not None and reference.value is not None:
        within, agrees = judged["within"], judged["agrees"]
        value, found = compared(reference.value, judged["found"], within=within, agrees=agrees)
    return {
        "quantity": reference.quantity,
        "value": value,
        "within": as_written(reference.within),
        "found": found,
        "verdict": VERDICTS[judged["agrees"] if judged else None],
        "unit": unit(reference.unit or (judged["unit"] if judged else "")),
        "source": reference.source,
        "note": reference.note,
    }
