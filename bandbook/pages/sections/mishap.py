"""What is wrong with one block, said where it stands: its author's mistakes, or the run that failed in it."""

from typing import Any

from bandbook.cases import Block
from bandbook.pages.page import CaseView


def facts(view: CaseView, block: Block) -> dict[str, Any] | None:
    """Return the problems of a block and the failure in it, or nothing."""
    lines = range(block.line, block.line + block.source.count("\n") + 3)
    problems = [str(problem) for problem in view.problems if problem.line in lines]
    failure = view.failure if view.failure is not None and view.failure.line == block.line else None
    if not problems and failure is None:
        return None
    return {"problems": problems, "failure": failure, "has_own_code": block.kind == "workings"}
