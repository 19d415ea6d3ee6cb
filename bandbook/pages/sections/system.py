"""A system's parameters, with units and where they come from."""

from typing import Any

from bandbook.cases import Block
from bandbook.exhibits import typeset
from bandbook.pages.page import CaseView

_UNITS = {"beta": "eV", "alpha": "eV", "period": "Å", "bond_length": "Å"}


def facts(view: CaseView, block: Block) -> dict[str, Any] | None:
    """Return a row for each key that the author wrote."""
    uses = {use.key: use for use in view.checked.uses if use.block == block.line}
    rows = []
    for key, value in block.table.items():
        use = uses.get(key)
        shown = use.value if use else value
        rows.append({"key": key, "value": _shown(shown), "unit": _unit(key, shown), "use": use})
    return {"name": block.name, "rows": rows, "up": "../" * (view.id.count("/") + 2)}


def _shown(value: Any) -> str:
    if isinstance(value, bool) or not isinstance(value, int | float):
        if isinstance(value, list):
            return f"{len(value)} rows" if value and isinstance(value[0], dict) else ", ".join(map(_shown, value))
        return (
            ", ".join(f"{key} = {_shown(entry)}" for key, entry in value.items())
            if isinstance(value, dict)
            else str(value)
        )
    return (
        str(value).replace("-", "−")
        if isinstance(value, int)
        else typeset(value, max(2, len(str(value).partition(".")[2])))
    )


def _unit(key: str, value: Any) -> str:
    is_number = isinstance(value, int | float) and not isinstance(value, bool)
    return _UNITS.get(key.split("_", maxsplit=1)[0] if key not in _UNITS else key, "") if is_number else ""
