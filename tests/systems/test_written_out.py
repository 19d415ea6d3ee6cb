"""A system written out: every mistake at its row, and the model that a right one is."""

import math
from typing import Any

import numpy as np
import pytest

from bandbook import lattices, registry
from bandbook.errors import Problem
from bandbook.model import Model
from bandbook.solver.hamiltonian import bloch

CELL: dict[str, Any] = {
    "vectors": [[2.46, 0, 0]],
    "sites": [{"name": "A"}, {"name": "B", "at": [1.36, 0, 0], "alpha": 0.5}],
    "couplings": [{"from": "A", "to": "B", "beta": -2.85}, {"from": "B", "to": "A", "cell": [1], "beta": -2.15}],
}


def built(**more: Any) -> Model:
    checked, problems = registry.check_system({**CELL, **more})
    assert problems == []
    assert checked is not None
    return registry.build_system(checked, {})


def told(**more: Any) -> list[Problem]:
    checked, problems = registry.check_system({**CELL, **more})
    assert checked is None
    return problems


def coupling(start: str, end: str, **more: Any) -> dict[str, Any]:
    return {"from": start, "to": end, "beta": -1.0, **more}


def test_the_alternating_chain_written_out_is_the_named_one() -> None:
    """Judge: the named lattice, whose E(k) has a closed form."""
    model = built(sites=[{"name": "A"}, {"name": "B"}])
    named = lattices.alternating_chain(beta_inside=-2.85, beta_between=-2.15)
    k = np.linspace(-1, 1, 7)[:, None]
    assert np.abs(bloch(model, k)[0] - bloch(named, k)[0]).max() == 0
    assert (model.dimension, model.vectors) == (1, ((2.46, 0.0, 0.0),))


def test_sites_keep_what_was_written() -> None:
    model = built()
    assert [(site.name, site.alpha, site.at) for site in model.sites] == [
        ("A", 0.0, None),
        ("B", 0.5, (1.36, 0.0, 0.0)),
    ]
    assert (model.n_electrons, model.beta_unit, model.alpha_unit) == (2.0, None, 0.0)


def test_a_molecule_has_no_vectors() -> None:
    model = built(vectors=[], couplings=[coupling("A", "B", overlap=0.25)])
    assert (model.dimension, model.vectors, model.couplings[0].cell) == (0, (), ())
    assert model.has_overlap


def test_overlap_gives_the_wheland_levels() -> None:
    """9.02, closed form: (α ± β)/(1 ± S) with S = 0.25: 0.8 and −1.3333 β."""
    checked, _ = registry.check_system({
        "sites": [{"name": "A"}, {"name": "B"}], "couplings": [coupling("A", "B", overlap=0.25)],
    })  # fmt: skip
    assert checked is not None
    h, s = bloch(registry.build_system(checked, {}), np.zeros((1, 0)))
    assert s is not None
    assert np.sort(np.linalg.eigvals(np.linalg.solve(s[0], h[0])).real) == pytest.approx([-0.8, 4 / 3], abs=1e-12)


@pytest.mark.parametrize("n_vectors", [0, 1, 2, 3])
def test_up_to_three_vectors(n_vectors: int) -> None:
    """Closed form: α + 2β Σ cos k_i for a site bonded to its images along each vector."""
    axes = np.eye(3)[:n_vectors]
    cells = [[int(part) for part in axis[:n_vectors]] for axis in axes]
    model = built(
        vectors=[[float(part) for part in 3 * axis] for axis in axes],
        sites=[{"name": "A", "alpha": 0.3}],
        couplings=[coupling("A", "A", cell=cell) for cell in cells],
    )
    k = np.array([[0.2, 0.5, -0.7][:n_vectors]])
    assert model.dimension == n_vectors
    assert bloch(model, k)[0][0, 0, 0].real == pytest.approx(0.3 - 2 * np.cos(np.pi * k).sum(), abs=1e-12)


def test_a_cell_left_out_is_the_home_cell() -> None:
    assert built().couplings[0].cell == (0,)


@pytest.mark.parametrize(
    ("more", "key", "words"),
    [
        ({"sites": []}, ("sites",), "give 1 to 5,000"),
        ({"sites": [{"name": "A"}, {"name": "B"}, {"name": "A"}]}, ("sites", 2, "name"), 'the name "A" stands twice'),
        ({"couplings": [coupling("A", "b")]}, ("couplings", 0, "to"), 'did you mean "B"?'),
        ({"couplings": [coupling("C", "B")]}, ("couplings", 0, "from"), 'sites are "A", "B"'),
        ({"couplings": [coupling("A", "B"), coupling("B", "A")]}, ("couplings", 1), "the bond B–A in cell [0] stands twice"),
        ({"couplings": [coupling("A", "B", cell=[1]), coupling("B", "A", cell=[-1])]}, ("couplings", 1), "its partner is added"),
        ({"couplings": [coupling("A", "A", cell=[1]), coupling("A", "A", cell=[-1])]}, ("couplings", 1), "stands twice"),
        ({"couplings": [coupling("A", "A")]}, ("couplings", 0), "site A is bonded to itself"),
        ({"couplings": [coupling("A", "A", cell=[0])]}, ("couplings", 0), "use alpha for its own energy"),
        ({"couplings": [coupling("A", "B", cell=[1, 0])]}, ("couplings", 0, "cell"), "found a list of 2; 1 whole number"),
        ({"couplings": [coupling("A", "B", cell=[])]}, ("couplings", 0, "cell"), "found a list of 0; 1 whole number"),
        ({"couplings": [coupling("A", "B", cell=1)]}, ("couplings", 0, "cell"), "write a list in brackets"),
        ({"couplings": [coupling("A", "B", cell=[0.5])]}, ("couplings", 0, "cell", 0), "a whole number"),
        ({"vectors": [], "couplings": [coupling("A", "B", cell=[1])]}, ("couplings", 0, "cell"), "a molecule has none"),
        ({"vectors": [[0, 0, 0]]}, ("vectors",), "span no cell"),
        ({"vectors": [[1, 0, 0], [2, 0, 0]], "couplings": []}, ("vectors",), "vectors that are independent"),
        ({"vectors": [[1, 0, 0], [0, 1, 0], [1, 1, 0]], "couplings": []}, ("vectors",), "span no cell"),
        ({"vectors": [[1, 0]]}, ("vectors", 0), "write three numbers in brackets"),
        ({"vectors": [[1, 0, 0]] * 4}, ("vectors",), "0 to 3"),
        ({"couplings": [coupling("A", "B", beta=True)]}, ("couplings", 0, "beta"), "the boolean true"),
        ({"couplings": [{"from": "A", "to": "B"}]}, ("couplings", 0), 'the key "beta" is missing'),
        ({"couplings": [coupling("A", "B", overlap=1.0)]}, ("couplings", 0, "overlap"), "0.999999 or less"),
        ({"couplings": [coupling("A", "B", between=1)]}, ("couplings", 0, "between"), 'unknown key "between"'),
        ({"electrons": 5}, ("electrons",), "5 electrons on 2 sites; 0 to 4 fit"),
        ({"charge": -3}, ("charge",), "5 electrons on 2 sites, with the charge -3; 0 to 4 fit"),
        ({"electrons": 4, "charge": -1}, ("electrons",), "5 electrons on 2 sites, with the charge -1"),
        ({"period": 2.4}, ("period",), 'unknown key "period"'),
    ],
)  # fmt: skip
def test_a_mistake_is_told_at_its_place_and_once(more: dict[str, Any], key: tuple[str | int, ...], words: str) -> None:
    (problem,) = told(**more)
    assert problem.key == key
    assert words in str(problem)


def test_all_mistakes_at_once() -> None:
    """Also those of rows when other rows are wrong in themselves."""
    problems = told(
        vectors=[[1, 0, 0], [2, 0, 0]],
        sites=[{"name": "A", "alpha": "0,5"}, {"name": "A"}, {"name": "B"}, 5],
        couplings=[
            coupling("A", "C", cell=[0, 1]), coupling("A", "B", beta=math.nan), coupling("B", "A"), coupling("B", "B", cell=[1]),
        ],
        electrons=9,
    )  # fmt: skip
    assert {problem.key for problem in problems} == {
        ("sites", 0, "alpha"), ("sites", 3), ("sites", 1, "name"), ("vectors",), ("couplings", 0, "to"),
        ("couplings", 1, "beta"), ("couplings", 2), ("couplings", 3, "cell"), ("electrons",),
    }  # fmt: skip


def test_a_site_whose_name_is_wrong_makes_no_further_mistakes() -> None:
    (problem,) = told(sites=[{"name": "A"}, {"name": "B 1"}], couplings=[coupling("A", "B_1")])
    assert problem.key == ("sites", 1, "name")


def test_many_sites_are_checked_quickly_and_told_briefly() -> None:
    import time

    sites = [{"name": f"A{number}"} for number in range(5000)]
    couplings = [coupling(f"A{number}", f"A{number + 1}") for number in range(5000)]
    began = time.perf_counter()
    (problem,) = told(vectors=[], sites=sites, couplings=couplings)
    assert time.perf_counter() - began < 5
    assert len(str(problem)) < 500
