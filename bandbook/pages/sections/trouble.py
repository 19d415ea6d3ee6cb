"""What went wrong: mistakes at their line, or why the run failed, with code, source and traceback."""

from typing import Any

from bandbook.pages.page import CaseView


def facts(view: CaseView) -> dict[str, Any] | None:
    """Return the mistakes and the failure, or nothing."""
    if not view.problems and view.failure is None:
        return None
    return {"problems": [str(problem) for problem in view.problems], "failure": view.failure}
