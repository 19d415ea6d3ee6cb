"""A block that could not be read: its text as the author wrote it."""

from typing import Any

from bandbook.cases import Block
from bandbook.pages.page import CaseView


def facts(view: CaseView, block: Block) -> dict[str, Any] | None:
    """Return the text of the block."""
    return {"kind": block.kind, "source": block.source.rstrip("\n"), "where": f"{view.checked.case.file}:{block.line}"}
