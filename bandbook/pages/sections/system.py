"""A system's parameters, with units and where they come from."""

from collections.abc import Mapping, Sequence
from typing import Any

from bandbook.cases import Block, ParameterUse
from bandbook.pages.numbers import as_written
from bandbook.pages.page import MOST_SKETCHES, CaseView

#: Rows of a list of sites or couplings that a page shows; all of them stand in the notebook.
MOST_ROWS = 40
_UNITS = {"period": "Å", "bond_length": "Å", "alpha": "eV", "beta": "eV", "at": "Å", "vectors": "Å"}


def facts(view: CaseView, block: Block) -> dict[str, Any] | None:
    """Return a row for each key that the author wrote, and a table for each list of sites or couplings."""
    uses = {use.key: use for use in view.checked.uses if use.block == block.line}
    single = {key: value for key, value in block.table.items() if key != "name" and not _is_list(value)}
    return {
        "name": block.name,
        "rows": [_row(key, value, uses.get(key)) for key, value in single.items()],
        "lists": [_list(key, value, uses) for key, value in block.table.items() if _is_list(value)],
        "sketch": _sketch(view, block.name or "system"),
        "up": view.up,
    }


def _sketch(view: CaseView, name: str) -> Mapping[str, Any] | None:
    """Return the sketch of a system; nothing of those that stand in the first screen already."""
    exhibits = view.record.exhibits if view.record else ()
    found = [one for one in exhibits if one["study"] == "system" and one["kind"] == "figure"]
    return next((one for one in found[MOST_SKETCHES:] if one["file"] == f"figures/{_file_of(name)}"), None)


def _file_of(name: str) -> str:
    return "system.svg" if name == "system" else f"system-{name}.svg"


def unit_of(key: str) -> str:
    """Return the unit of a key of a system.

    >>> unit_of("beta_inside"), unit_of("period"), unit_of("lattice")
    ('eV', 'Å', '')
    """
    return _UNITS.get(key, _UNITS.get(key.split("_", maxsplit=1)[0], ""))


def words(value: Any) -> str:
    """Return a value as a page shows it.

    >>> words([1, -0.5]), words([{"cell": 1}]), words({"half": 10}), words(True)
    ('1, −0.5', '(cell = 1)', 'half = 10', 'yes')
    """
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, int | float):
        return as_written(value)
    if isinstance(value, Mapping):
        return ", ".join(f"{key} = {words(entry)}" for key, entry in value.items())
    if isinstance(value, Sequence) and not isinstance(value, str):
        return ", ".join(f"({words(entry)})" if isinstance(entry, list | Mapping) else words(entry) for entry in value)
    return str(value)


def _is_list(value: Any) -> bool:
    return isinstance(value, list) and bool(value) and all(isinstance(row, Mapping) for row in value)


def _cell(value: Any, use: ParameterUse | None) -> dict[str, Any]:
    shown = value if use is None else use.value
    is_number = isinstance(shown, int | float) and not isinstance(shown, bool)
    return {"text": words(shown), "is_number": is_number, "use": use}


def _row(key: str, value: Any, use: ParameterUse | None) -> dict[str, Any]:
    return {"key": key, "unit": unit_of(key), "cell": _cell(value, use)}


def _list(key: str, rows: Sequence[Mapping[str, Any]], uses: Mapping[str, ParameterUse]) -> dict[str, Any]:
    columns = list(dict.fromkeys(column for row in rows for column in row))
    cells = [
        [_cell(row.get(column, ""), uses.get(f"{key}[{number}].{column}")) for column in columns]
        for number, row in enumerate(rows[:MOST_ROWS])
    ]
    heads = [
        {"name": column, "unit": unit_of(column), "is_number": any(row[place]["is_number"] for row in cells)}
        for place, column in enumerate(columns)
    ]
    return {"key": key, "heads": heads, "rows": cells, "n_more": max(0, len(rows) - MOST_ROWS)}
