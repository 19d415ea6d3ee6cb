"""A notebook carries its parameters, reads back to them, and is the same for the same parameters."""

import ast
import json
from typing import Any

import nbformat
import pytest
from hypothesis import given
from hypothesis import strategies as st

from bandbook.notebooks import compose, seed_of
from bandbook.notebooks.compose import ABOUT
from bandbook.notebooks.outputs import notebook_bytes

KEY = "sha256:" + "00000010" + "f" * 56
PARAMETERS: dict[str, Any] = {
    "format": 1,
    "systems": {"system": {"form": "named-lattice", "lattice": "chain", "beta": -2.5, "period": None}},
    "studies": {"levels": {"question": "levels", "system": "system", "cells": 4}},
    "workings": ["report('x', 1)\n# ä\n", "1 + 1\n"],
    "steps": [["workings", 0], ["study", "levels"], ["workings", 1]],
    "files": {"data/x.csv": "n,\"gap\"\n1,\\2.5'''\n"},
}


def literal(notebook: Any) -> Any:
    """Return the parameters that the first code cell holds, as Python reads them."""
    (first,) = [cell for cell in notebook.cells if cell.id == "parameters"]
    tree = ast.parse(first.source)
    (assigned,) = [node for node in tree.body if isinstance(node, ast.Assign) and isinstance(node.value, ast.Dict)]
    return ast.literal_eval(assigned.value)


def test_it_is_a_valid_notebook() -> None:
    notebook = compose(PARAMETERS, KEY)
    nbformat.validate(notebook)
    assert (notebook.nbformat, notebook.nbformat_minor) == (4, 5)
    assert notebook.metadata == {
        "kernelspec": {"name": "python3", "display_name": "Python 3", "language": "python"},
        "language_info": {"name": "python"},
    }


def test_a_cell_a_step_in_file_order() -> None:
    notebook = compose(PARAMETERS, KEY)
    assert [(cell.cell_type, cell.id) for cell in notebook.cells] == [
        ("markdown", "about"),
        ("code", "parameters"),
        ("code", "step-1"),
        ("code", "step-2"),
        ("code", "step-3"),
    ]
    assert [cell.source for cell in notebook.cells[2:]] == [
        PARAMETERS["workings"][0],
        "answer('levels')",
        PARAMETERS["workings"][1],
    ]


def test_the_first_words_say_what_running_it_means() -> None:
    for words in ("needs only", "bandbook", "author's own Python"):
        assert words in " ".join(ABOUT.split())


def test_the_parameters_read_back() -> None:
    assert literal(compose(PARAMETERS, KEY)) == PARAMETERS


@given(
    st.dictionaries(
        st.text(max_size=20),
        st.recursive(
            st.none() | st.booleans() | st.floats(allow_nan=False, allow_infinity=False) | st.text(max_size=300),
            lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3),
            max_leaves=10,
        ),
        max_size=5,
    )
)
def test_any_parameters_read_back(table: dict[str, Any]) -> None:
    whole = {**PARAMETERS, "systems": table}
    assert literal(compose(whole, KEY)) == whole


def test_the_same_parameters_give_the_same_bytes() -> None:
    turned = dict(reversed(PARAMETERS.items()))
    turned["systems"] = {"system": dict(reversed(PARAMETERS["systems"]["system"].items()))}
    assert notebook_bytes(compose(PARAMETERS, KEY)) == notebook_bytes(compose(turned, KEY))


def test_it_is_written_as_text() -> None:
    data = notebook_bytes(compose(PARAMETERS, KEY))
    assert "ä".encode() in data
    assert json.loads(data) == compose(PARAMETERS, KEY)


@pytest.mark.parametrize(("key", "seed"), [(KEY, 16), ("sha256:" + "f" * 64, 2**32 - 1), ("sha256:" + "0" * 64, 0)])
def test_the_seed_is_the_beginning_of_the_key(key: str, seed: int) -> None:
    assert seed_of(key) == seed
    assert f"seed={seed}," in compose(PARAMETERS, key).cells[1].source
