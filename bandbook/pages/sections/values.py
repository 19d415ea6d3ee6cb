"""Reference values with what was found, or recorded values, which are not recomputed."""

from typing import Any

from bandbook.cases import Block
from bandbook.pages.page import CaseView


def facts(view: CaseView, block: Block) -> dict[str, Any] | None:
    """Return a row a value."""
    stated = view.checked.references if block.kind == "reference" else view.checked.recorded
    judged = {row["quantity"]: row for row in view.record.references} if view.record else {}
    rows = [
        {"stated": reference, "judged": judged.get(reference.quantity) if block.kind == "reference" else None}
        for reference in stated
        if reference.quantity in _names(block)
    ]
    return {"kind": block.kind, "rows": rows, "up": "../" * (view.id.count("/") + 2)} if rows else None


def _names(block: Block) -> set[str]:
    names = set(block.table)
    for name, entry in block.table.items():
        if isinstance(entry, dict):
            names |= {f"{name}.{inner}" for inner in entry}
    return names
