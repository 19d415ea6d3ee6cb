"""What the numbers rest on: parameter sets, inputs, versions, key; and the files to take away."""

from typing import Any

from bandbook.pages.page import CaseView


def facts(view: CaseView) -> dict[str, Any] | None:
    """Return the provenance of a case that has a record."""
    record = view.record
    if record is None:
        return None
    return {
        "uses": sorted({(use.set, use.name) for use in view.checked.uses}),
        "inputs": record.inputs,
        "environment": record.environment,
        "key": record.key,
        "case": view.id,
        "files": [
            "record.json",
            "notebook.ipynb",
            "quantities.csv",
            *dict.fromkeys(exhibit["file"] for exhibit in record.exhibits),
        ],
        "source": view.checked.case.file,
        "up": view.up,
    }
