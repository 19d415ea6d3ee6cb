"""What the numbers rest on: parameter sets, inputs, versions, key; and the files to take away."""

from typing import Any

from bandbook.pages.page import CaseView


def facts(view: CaseView) -> dict[str, Any] | None:
    """Return the provenance of a case that has a record."""
    record = view.record
    if record is None:
        return None
    files = [exhibit["file"] for exhibit in record.exhibits]
    return {
        "uses": view.checked.uses,
        "inputs": record.inputs,
        "environment": record.environment,
        "key": record.key,
        "files": ["record.json", "notebook.ipynb", *files],
        "source": view.checked.case.file,
        "warnings": record.warnings,
        "up": "../" * (view.id.count("/") + 2),
    }
