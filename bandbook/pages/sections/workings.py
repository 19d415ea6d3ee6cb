"""An author's own code, and what it gave: numbers, figures, text."""

from typing import Any

from bandbook.cases import Block
from bandbook.pages.page import CaseView


def facts(view: CaseView, block: Block) -> dict[str, Any] | None:
    """Return the source and, after a run, what this block gave."""
    step = next((name for name, line in view.checked.blocks.items() if line == block.line), "")
    record = view.record
    exhibits = [exhibit for exhibit in record.exhibits if exhibit.get("step") == step] if record else []
    is_first = block is view.checked.case.of_kind("workings")[0]
    reported = [q for q in record.quantities if q["name"].startswith("workings.")] if record and is_first else []
    return {
        "source": block.source.rstrip("\n"),
        "figures": [exhibit for exhibit in exhibits if exhibit["kind"] == "figure"],
        "texts": [exhibit["text"] for exhibit in exhibits if exhibit["kind"] == "text"],
        "reported": [q for q in reported if not q["recorded"]],
    }
