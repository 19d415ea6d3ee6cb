"""An author's own code, and what it gave: numbers, figures, text."""

from collections.abc import Mapping
from typing import Any

from bandbook.cases import Block
from bandbook.pages.highlight import highlighted
from bandbook.pages.page import CaseView


def facts(view: CaseView, block: Block) -> dict[str, Any] | None:
    """Return the source and, after a run, what this block gave.

    A number that was reported stands below the first block that names it.
    """
    step = next((name for name, line in view.checked.blocks.items() if line == block.line), "")
    record = view.record
    exhibits = [exhibit for exhibit in record.exhibits if exhibit.get("step") == step] if record else []
    return {
        "source": highlighted(block.source.rstrip("\n")),
        "line": block.line,
        "figures": [exhibit for exhibit in exhibits if exhibit["kind"] == "figure"],
        "texts": [exhibit["text"] for exhibit in exhibits if exhibit["kind"] == "text"],
        "reported": _reported(view, block),
        "up": view.up,
    }


def _reported(view: CaseView, block: Block) -> list[dict[str, Any]]:
    if view.record is None:
        return []
    judged = {reference["quantity"]: reference for reference in view.record.references}
    named = [{**q, "short": q["name"].partition(".")[2]} for q in view.record.quantities if _is_reported(q)]
    own = [q for q in named if _owner(view, q["short"]) is block]
    return [{**q, "reference": judged.get(q["name"])} for q in own]


def _is_reported(quantity: Mapping[str, Any]) -> bool:
    return bool(quantity["name"].startswith("workings.") and not quantity["recorded"])


def _owner(view: CaseView, name: str) -> Block:
    """Return the first block that names a quantity, otherwise the last one."""
    blocks = view.checked.case.of_kind("workings")
    return next((one for one in blocks if f'"{name}"' in one.source or f"'{name}'" in one.source), blocks[-1])
