"""From checked parameters to a notebook: the same parameters give the same bytes."""

import pprint
from collections.abc import Mapping
from typing import Any

#: The notebook's first words. The same for every case: its title and prose stand elsewhere, and may change.
ABOUT = (
    "This notebook was written from a checked case file of a calculation logbook. Its first code cell carries every\n"
    "parameter, each cell after it is one step of the case. It opens no other file and needs only `bandbook` to be\n"
    "run again. Running it runs its author's own Python, where the case has some."
)


def seed_of(key: str) -> int:
    """Return the seed of a key: its first 8 digits.

    >>> seed_of("sha256:0000000fabc")
    15
    """
    return int(key.removeprefix("sha256:")[:8], 16)


def compose(parameters: Mapping[str, Any], key: str, *, paper: Mapping[str, Any] | None = None) -> Any:
    """Return the notebook of checked parameters: a first cell that carries them, then a cell a step, in file order.

    Args:
        parameters: Checked parameters, plain JSON.
        key: Their key; seeds the random generator.
        paper: What its figures are drawn for, in place of a page.

    Returns:
        An nbformat 4.5 notebook, not executed.
    """
    import nbformat.v4

    cells = [
        nbformat.v4.new_markdown_cell(ABOUT, id="about"),
        _code(first_cell(parameters, key, paper=paper), "parameters"),
    ]
    for number, (kind, name) in enumerate(parameters["steps"], start=1):
        source = f"answer({name!r})" if kind == "study" else parameters["workings"][name]
        cells.append(_code(source, f"step-{number}"))
    metadata = {
        "kernelspec": {"name": "python3", "display_name": "Python 3", "language": "python"},
        "language_info": {"name": "python"},
    }
    return nbformat.v4.new_notebook(cells=cells, metadata=metadata)


def _code(source: str, name: str) -> Any:
    import nbformat.v4

    return nbformat.v4.new_code_cell(source, id=name)


def first_cell(parameters: Mapping[str, Any], key: str, *, paper: Mapping[str, Any] | None = None) -> str:
    """Return the source of the first code cell."""
    own = f", paper={dict(paper)}" if paper else ""
    literal = pprint.pformat(dict(parameters), width=100, sort_dicts=True)
    return (
        "from bandbook.cells import begin\n\n"
        f"parameters = {literal}\n"
        "systems, results, files, rng, report, answer = begin(\n"
        f"    parameters, seed={seed_of(key)}, namespace=globals(){own}\n"
        ")"
    )
