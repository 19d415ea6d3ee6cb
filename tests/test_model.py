"""A model keeps its invariants, and takes what an author's own code may hand it."""

import itertools
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from bandbook.errors import PhysicsError
from bandbook.model import Coupling, Model, Site, is_finite, spans_cell

A, B = Site("A"), Site("B")
BOND = Coupling(0, 1, -2.5)
X, Y, Z = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0)


def test_electrons_are_what_the_sites_bring() -> None:
    model = Model((A, Site("N", electrons=2.0), Site("O", electrons=0.0)), ())
    assert (model.electrons, model.n_electrons, model.n_sites) == (3.0, 3.0, 3)
    assert not model.has_overlap
    assert Model((A, B), (Coupling(0, 1, -1.0, overlap=0.1),), electrons=0).has_overlap


def test_lists_and_numbers_of_numpy_are_taken() -> None:
    """A model that workings build is often made of lists and arrays; it is hashable all the same."""
    model = Model(
        [Site("A", np.float64(0.5), at=np.zeros(3))],  # type: ignore[arg-type]
        [Coupling(np.int64(0), np.int64(0), -1.0, [np.int64(1)])],  # type: ignore[arg-type]
        dimension=1,
        vectors=[[2.0, 0.0, 0.0]],  # type: ignore[arg-type]
        points=[("X", [1.0])],  # type: ignore[arg-type]
    )
    same = Model(
        (Site("A", 0.5, (0.0, 0.0, 0.0)),),
        (Coupling(0, 0, -1.0, (1,)),),
        1,
        ((2.0, 0.0, 0.0),),
        points=(("X", (1.0,)),),
    )
    assert model == same
    assert hash(model) == hash(same)
    assert all(type(step) is int for step in model.couplings[0].cell)


WRONG: dict[str, tuple[dict[str, Any], str]] = {
    "no sites": ({"sites": (), "couplings": ()}, "the model has no sites"),
    "name twice": ({"sites": (A, A), "couplings": ()}, "site 'A' is named twice"),
    "name not allowed": ({"sites": (Site("β1"), B)}, "a site is named 'β1'"),
    "name no text": ({"sites": (Site(1), B)}, "a site is named 1"),  # type: ignore[arg-type]
    "alpha": ({"sites": (Site("A", float("nan")), B)}, "alpha of site 'A' is nan"),
    "alpha complex": ({"sites": (Site("A", 1j), B)}, "alpha of site 'A' is 1j"),  # type: ignore[arg-type]
    "three electrons": ({"sites": (Site("A", electrons=3), B)}, "site 'A' brings 3 electrons"),
    "index": ({"couplings": (Coupling(0, 2, -1.0),)}, "lies outside the model"),
    "negative index": ({"couplings": (Coupling(-1, 0, -1.0),)}, "lies outside the model"),
    "cell of a molecule": ({"couplings": (Coupling(0, 1, -1.0, (1,)),)}, "lies outside the model"),
    "no cell in a crystal": ({"dimension": 1}, "lies outside the model"),
    "bond to itself": ({"couplings": (Coupling(0, 0, -1.0),)}, "is bonded to itself"),
    "bond twice": ({"couplings": (BOND, BOND)}, "bond A–B [] is named twice"),
    "bond and its partner": ({"couplings": (BOND, Coupling(1, 0, -1.0))}, "bond B–A [] is named twice"),
    "beta": ({"couplings": (Coupling(0, 1, float("inf")),)}, "coupling A–B is not finite"),
    "beta a text": ({"couplings": (Coupling(0, 1, "-1"),)}, "coupling A–B is not finite"),  # type: ignore[arg-type]
    "overlap": ({"couplings": (Coupling(0, 1, -1.0, overlap=float("nan")),)}, "is not finite"),
    "dimension": ({"dimension": 4}, "dimension 4"),
    "vectors": ({"vectors": (X,)}, "1 lattice vectors in dimension 0"),
    "electrons": ({"electrons": 5}, "5 electrons; 0 to 4 fit on 2 sites"),
    "negative electrons": ({"electrons": -1}, "-1 electrons"),
    "electrons nan": ({"electrons": float("nan")}, "nan electrons"),
    "beta unit 0": ({"beta_unit": 0.0}, "beta_unit is 0"),
    "alpha unit": ({"alpha_unit": float("inf")}, "is not finite"),
    "points": ({"points": (("X", (1.0,)),)}, "point 'X'"),
}  # fmt: skip


@pytest.mark.parametrize("name", WRONG)
def test_what_breaks_an_invariant_is_told_in_three_clauses(name: str) -> None:
    arguments, words = WRONG[name]
    with pytest.raises(PhysicsError) as caught:
        Model(**{"sites": (A, B), "couplings": (BOND,), **arguments})
    assert words in str(caught.value)
    assert str(caught.value).count("; ") == 2


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: Site("A", at=(0.0, 0.0)), "the position of site 'A'"),  # type: ignore[arg-type]
        (lambda: Site("A", at=(0.0, 0.0, float("nan"))), "three finite numbers"),
        (lambda: Coupling(0, 1.0, -1.0), "whole numbers"),  # type: ignore[arg-type]
        (lambda: Coupling(0, 1, -1.0, (0.5,)), "whole numbers"),  # type: ignore[arg-type]
        (lambda: Model((A,), (), 1, ((1.0, 0.0),)), "a lattice vector"),  # type: ignore[arg-type]
    ],
)
def test_parts_check_themselves(make: Any, words: str) -> None:
    with pytest.raises(PhysicsError, match=words):
        make()


def test_the_partner_of_a_bond_into_another_cell_is_the_same_bond() -> None:
    for cell, back in itertools.product([(1,), (-1,)], repeat=2):
        couplings = (Coupling(0, 1, -1.0, cell), Coupling(1, 0, -1.0, back))
        if cell != back:
            with pytest.raises(PhysicsError, match="named twice"):
                Model((A, B), couplings, dimension=1)
        else:
            assert Model((A, B), couplings, dimension=1).couplings == couplings


@pytest.mark.parametrize(
    ("vectors", "does"),
    [
        ([], True),
        ([X], True),
        ([(0.0, 0.0, 0.0)], False),
        ([X, Y], True),
        ([X, (2.0, 0.0, 0.0)], False),
        ([(0.1, 0.2, 0.3), (0.3, 0.6, 0.9)], False),
        ([(1e-3, 0.0, 0.0), (0.0, 1e5, 0.0)], True),
        ([X, (-0.5, 3**0.5 / 2, 0.0)], True),
        ([X, Y, (1.0, 1.0, 0.0)], False),
        ([X, Y, Z], True),
        ([(0.0, 1.0, 1.0), (1.0, 0.0, 1.0), (1.0, 1.0, 0.0)], True),
        ([X, Y, (0.0, 0.0, float("inf"))], False),
    ],
)
def test_vectors_that_span_a_cell(vectors: list[tuple[float, float, float]], does: bool) -> None:  # noqa: FBT001 - a column of the table
    assert spans_cell(vectors) is does


@given(st.lists(st.tuples(*[st.floats(-10, 10)] * 3), min_size=1, max_size=3))
def test_the_span_is_the_rank(vectors: list[tuple[float, float, float]]) -> None:
    """Judge: the singular values of the directions."""
    lengths = np.linalg.norm(vectors, axis=1)
    if (lengths > 1e-100).all():
        smallest = np.linalg.svd(np.array(vectors) / lengths[:, None])[1].min()
        if smallest > 1e-2 or smallest < 1e-9:
            assert spans_cell(vectors) == (smallest > 1e-5)


def test_numbers_that_are_finite() -> None:
    assert all(is_finite(value) for value in (0, -1.5, True, np.float64(2), np.int64(3)))
    assert not any(is_finite(value) for value in (float("inf"), np.nan, 1j, "1", None, 10**400, [1]))
