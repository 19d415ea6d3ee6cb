"""What went wrong, on top of the page: every mistake with its line, and why the run failed."""

from typing import Any

from bandbook.pages.page import CaseView


def facts(view: CaseView) -> dict[str, Any] | None:
    """Return the mistakes and the failure, or nothing.

    The code and traceback of a failure stand at its block; a failure without one is shown here in full.
    """
    if not view.problems and view.failure is None:
        return None
    lines = {block.line for block in view.checked.case.blocks}
    is_placed = view.failure is not None and view.failure.line in lines
    return {"problems": [str(problem) for problem in view.problems], "failure": view.failure, "is_placed": is_placed}
