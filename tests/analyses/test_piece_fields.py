"""The keys that cut a piece: every way to be wrong is found by the check, and a right one by none."""

from collections.abc import Callable
from typing import Any

import pytest

from bandbook import lattices
from bandbook.model import Model
from bandbook.parameters import Problem

Inspect = Callable[..., list[Problem]]

CHAIN = lattices.chain(beta=-1.0)
PAIR = lattices.alternating_chain(beta_inside=-1.0, beta_between=-0.8)
SQUARE = lattices.square(beta=-1.0)
RING = lattices.ring(beta=-1.0, sites=6)
NAME = RING.sites[0].name

WRONG: dict[str, tuple[Model, dict[str, Any], tuple[str | int, ...], str]] = {
    "no cells": (CHAIN, {}, (), 'the key "cells" is missing; the system is periodic: a whole number; add cells = 4'),
    "no cells in a plane": (SQUARE, {}, (), "a list of 2 whole numbers; add cells = [4, 4]"),
    "one number in a plane": (SQUARE, {"cells": 4}, ("cells",), "found 4; the system is periodic: a list of 2 whole numbers"),
    "two numbers on a line": (CHAIN, {"cells": [3, 4]}, ("cells",), "found [3, 4]; the system is periodic: a whole number"),
    "too many": (SQUARE, {"cells": [10_000, 10_000]}, ("cells",), "100000000 cells in all; at most 10000000; take fewer"),
    "cells on a molecule": (RING, {"cells": 4}, ("cells",), "a molecule takes none; remove it"),
    "ends on a molecule": (RING, {"ends": "ring"}, ("ends",), "a molecule takes none"),
    "add on a molecule": (RING, {"add": [NAME]}, ("add",), "a molecule takes none"),
    "add on a ring": (PAIR, {"cells": 3, "ends": "ring", "add": ["A"]}, ("add",), "a ring has no end; remove one of them"),
    "drop in a plane": (SQUARE, {"cells": [3, 3], "drop": ["A"]}, ("drop",), '"drop" in 2 dimensions'),
    "unknown site": (PAIR, {"cells": 3, "drop": ["a1"]}, ("drop", 0), 'unknown site "a1"; sites are "A", "B"'),
    "unknown site of a change": (
        PAIR, {"cells": 3, "changes": [{"cell": 0, "site": "C", "alpha": 1.0}]}, ("changes", 0, "site"), 'unknown site "C"',
    ),
    "unknown end of a bond": (
        PAIR, {"cells": 3, "changes": [{"cell": 0, "from": "A", "to": "X", "beta": -1.0}]}, ("changes", 0, "to"), 'unknown site "X"',
    ),
    "no kind": (PAIR, {"cells": 3, "changes": [{"cell": 0, "site": "A"}]}, ("changes", 0), "a change of neither or both kinds"),
    "remove = false": (PAIR, {"cells": 3, "changes": [{"cell": 0, "site": "A", "remove": False}]}, ("changes", 0), "neither"),
    "changed and removed": (
        PAIR, {"cells": 3, "changes": [{"cell": 0, "site": "A", "alpha": 1.0, "remove": True}]}, ("changes", 0), "both kinds",
    ),
    "site and bond": (
        PAIR, {"cells": 3, "changes": [{"cell": 0, "site": "A", "alpha": 1.0, "from": "A", "to": "B", "beta": -1.0}]}, ("changes", 0), "both",
    ),
    "half a bond": (PAIR, {"cells": 3, "changes": [{"cell": 0, "from": "A", "beta": -1.0}]}, ("changes", 0), "from with to and beta"),
    "a far cell of a site": (
        PAIR, {"cells": 3, "changes": [{"cell": 0, "site": "A", "alpha": 1.0, "to_cell": 1}]}, ("changes", 0), "a change of neither",
    ),
    "no cell": (PAIR, {"cells": 3, "changes": [{"site": "A", "alpha": 1.0}]}, ("changes", 0), "a change without a cell; cells count from 0; add cell = 0"),
    "a cell on a molecule": (
        RING, {"changes": [{"cell": 0, "site": NAME, "alpha": 1.0}]}, ("changes", 0, "cell"), "a cell on a molecule",
    ),
    "outside": (
        PAIR, {"cells": 3, "changes": [{"cell": 3, "site": "A", "alpha": 1.0}]}, ("changes", 0, "cell"),
        "there is no cell 3 in the piece; its cells count 0 to 2; correct it",
    ),
    "outside at the far end of a bond": (
        PAIR, {"cells": 3, "changes": [{"cell": 2, "from": "B", "to": "A", "to_cell": 3, "beta": -1.0}]}, ("changes", 0, "to_cell"), "no cell 3",
    ),
    "a number in a plane": (
        SQUARE, {"cells": [3, 3], "changes": [{"cell": 1, "site": "A", "alpha": 1.0}]}, ("changes", 0, "cell"), "0 to 2 and 0 to 2",
    ),
}  # fmt: skip

RIGHT: dict[str, tuple[Model, dict[str, Any]]] = {
    "a piece": (PAIR, {"cells": 3}),
    "finished": (PAIR, {"cells": 3, "add": ["A"], "drop": ["B"]}),
    "a ring": (PAIR, {"cells": 3, "ends": "ring"}),
    "a plane": (SQUARE, {"cells": [3, 4], "changes": [{"cell": [2, 3], "site": "A", "remove": True}]}),
    "a wall": (PAIR, {"cells": 3, "changes": [{"cell": 1, "from": "B", "to": "A", "to_cell": 2, "beta": -2.0}]}),
    "a change of the site that finishes": (PAIR, {"cells": 3, "add": ["A"], "changes": [{"cell": 3, "site": "A", "alpha": 1.0}]}),
    "a molecule": (RING, {"changes": [{"site": NAME, "alpha": 1.0}]}),
    "the largest": (CHAIN, {"cells": 10**7}),
}  # fmt: skip


@pytest.mark.parametrize("name", WRONG)
def test_a_mistake_is_found_at_its_key(inspect: Inspect, name: str) -> None:
    model, keys, key, text = WRONG[name]
    (problem,) = inspect(model, "levels", **keys)
    assert problem.key == key
    assert text in str(problem)
    assert all(part.strip() for part in (problem.found, problem.allowed, problem.remedy))


@pytest.mark.parametrize("name", RIGHT)
def test_a_right_piece_is_let_through(inspect: Inspect, name: str) -> None:
    model, keys = RIGHT[name]
    assert inspect(model, "levels", **keys) == []


def test_three_mistakes_are_three_problems(inspect: Inspect) -> None:
    changes = [{"cell": 9, "site": "A", "alpha": 1.0}, {"cell": 0, "site": "Z", "remove": True}]
    problems = inspect(PAIR, "levels", cells=3, drop=["Q"], changes=changes)
    assert [problem.key for problem in problems] == [("drop", 0), ("changes", 1, "site"), ("changes", 0, "cell")]


def test_a_model_that_is_not_known_is_not_judged(inspect: Inspect) -> None:
    assert inspect(None, "levels") == []


@pytest.mark.parametrize("name", [name for name in RIGHT if name != "the largest"])
def test_what_the_check_lets_through_is_cut(name: str) -> None:
    from bandbook import registry
    from bandbook.parameters import check
    from bandbook.solver import cut_piece

    model, keys = RIGHT[name]
    study, _ = check(registry.analysis_of("levels").fields, keys)
    assert cut_piece(model, **study).n_sites > 0
