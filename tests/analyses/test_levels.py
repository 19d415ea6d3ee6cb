"""Levels as a study reports them: closed forms, published molecules, and what tables and figures show of them."""

import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from bandbook import lattices
from bandbook.analyses.levels_figures import margin_columns, side_by_side
from bandbook.exhibits import Answer, Figure
from bandbook.model import Coupling, Model, Site

Ask = Callable[..., Answer]
Column = Callable[[Answer, str, str], list[Any]]
Texts = Callable[[Answer, str], list[str]]

CHAIN = lattices.chain(beta=-2.5)
ALTERNATING = lattices.alternating_chain(beta_inside=-2.85, beta_between=-2.15)
ENDED = lattices.alternating_chain(beta_inside=-2.15, beta_between=-2.85)
POLYACENE = lattices.polyacene(beta=-2.5)


def figure(answer: Answer, name: str) -> Figure:
    return next(one for one in answer.figures if one.name == name)


def heads(answer: Answer) -> list[str]:
    return [head.name for head in answer.tables[0].columns]


@pytest.mark.parametrize("n", [2, 4, 6, 7])
def test_an_open_chain_has_both_labels(ask: Ask, column: Column, n: int) -> None:
    """E = 2β cos(jπ/(N + 1)), k = j/(N + 1) on the band with W = 1; node labels (j − 1)/(N − 1) beside it."""
    answer = ask(CHAIN, "levels", cells=n)
    for j in range(1, n + 1):
        assert answer.value(f"energy_{j}") == pytest.approx(-5.0 * math.cos(j * math.pi / (n + 1)), abs=1e-9)
        assert answer.value(f"k_{j}") == pytest.approx(j / (n + 1), abs=1e-10)
    assert column(answer, "levels", "w") == [1.0] * n
    assert column(answer, "levels", "node_label") == pytest.approx([j / (n - 1) for j in range(n)], abs=1e-6)


def test_four_atoms_show_both_labels_in_words(ask: Ask, texts: Texts) -> None:
    answer = ask(CHAIN, "levels", cells=4)
    caption = figure(answer, "on-bands").caption
    assert "k = 0.200, 0.400, 0.600, 0.800 π/a" in caption
    assert "node labels 0.000, 0.333, 0.667, 1.000 of π/spacing" in caption
    assert "no k" in caption
    assert "node label (no k)" in texts(answer, "on-bands")


def test_butadiene(ask: Ask) -> None:
    """Levels x = ±1.618, ±0.618 and Eπ = 4.472 |β| (Streitwieser 1961)."""
    answer = ask(CHAIN, "levels", cells=4)
    by_name = {quantity.name.removeprefix("levels."): quantity for quantity in answer.quantities}
    assert by_name["homo"].in_beta == pytest.approx((math.sqrt(5) - 1) / 2, abs=1e-9)
    assert by_name["lumo"].in_beta == pytest.approx(-(math.sqrt(5) - 1) / 2, abs=1e-9)
    assert by_name["gap"].in_beta == pytest.approx(math.sqrt(5) - 1, abs=1e-9)
    assert by_name["pi_energy"].in_beta == pytest.approx(2 * math.sqrt(5), abs=1e-9)
    assert (by_name["open_shell"].value, by_name["gap_levels"].value) == (0.0, 0.0)
    assert [figure.name for figure in answer.figures] == ["sketch", "diagram", "orbitals", "on-bands"]


def test_alpha_counts_once_an_electron(ask: Ask) -> None:
    """With α the total is 4α + 4.472 β, and x counts from α."""
    answer = ask(lattices.chain(beta=-2.5, alpha=-6.0), "levels", cells=4)
    total = next(quantity for quantity in answer.quantities if quantity.name == "levels.pi_energy")
    assert total.value == pytest.approx(-24 - 2.5 * 2 * math.sqrt(5), abs=1e-9)
    assert total.in_beta == pytest.approx(2 * math.sqrt(5), abs=1e-9)


def test_benzene_has_no_k(ask: Ask, column: Column) -> None:
    """Levels x = 2, 1, 1, −1, −1, −2, Eπ = 8β (print); a molecule has no parent, so columns of k do not apply."""
    answer = ask(lattices.ring(beta=-1.0, sites=6), "levels")
    assert column(answer, "levels", "x") == [2.0, 1.0, 1.0, -1.0, -1.0, -2.0]
    assert column(answer, "levels", "degeneracy") == [1, 2, 2, 2, 2, 1]
    assert answer.value("pi_energy") == pytest.approx(-8.0, abs=1e-9)
    assert answer.value("gap_levels") is None
    assert answer.value("k_1") is None
    assert not {"k", "w", "k_extended", "node_label", "place"} & set(heads(answer))
    assert [figure.name for figure in answer.figures] == ["diagram", "orbitals"]


def test_anthracene_is_a_finished_piece(ask: Ask) -> None:
    """Levels x = ±2.414, ±2, ±1.414 (×2), ±1 (×2), ±0.414; Eπ = 19.31β (Coulson & Streitwieser 1965)."""
    answer = ask(POLYACENE, "levels", cells=3, add=["A1", "B1"])
    root = math.sqrt(2)
    expected = [-1 - root, -2.0, -root, -root, -1.0, -1.0, 1 - root]
    expected += [-x for x in reversed(expected)]
    found = [answer.value(f"energy_{n}") for n in range(1, 15)]
    assert found == pytest.approx([2.5 * x for x in expected], abs=1e-9)
    assert answer.value("pi_energy") == pytest.approx(-2.5 * 19.31371, abs=2e-5)
    assert not any("one-coordinated" in text for text in answer.warnings)


def test_whole_cells_of_polyacene_are_no_acene(ask: Ask) -> None:
    (warning,) = ask(POLYACENE, "levels", cells=3).warnings
    assert warning == (
        "The cut leaves 2 one-coordinated sites (A2 of cell 2, B2 of cell 2); add or drop sites to finish it."
    )


@pytest.mark.parametrize("model", [CHAIN, ALTERNATING], ids=["chain", "alternating"])
def test_the_ends_of_a_chain_are_meant(ask: Ask, model: Model) -> None:
    assert ask(model, "levels", cells=4).warnings == ()


def test_end_levels_are_counted_and_placed(ask: Ask, column: Column, texts: Texts) -> None:
    """More than |β₂/β₁| cells: two levels ±E in the gap, one at each end."""
    answer = ask(ENDED, "levels", cells=8)
    assert answer.value("gap_levels") == 2
    assert answer.value("k_8") is None
    assert [place for place in column(answer, "levels", "place") if place] == ["both ends", "both ends"]
    assert "2 gap levels at the left margin" in figure(answer, "on-bands").caption
    assert {"gap level, occupied", "gap level, empty"} <= set(texts(answer, "on-bands"))
    assert ask(ALTERNATING, "levels", cells=8).value("gap_levels") == 0


def flat_band() -> Model:
    """A chain of A–B with a further C on every A: the states on B and C that A does not see make a flat band at 0."""
    sites = (Site("A"), Site("B"), Site("C"))
    bonds = (Coupling(0, 1, -1.0, (0,)), Coupling(0, 2, -1.0, (0,)), Coupling(1, 0, -1.0, (1,)))
    return Model(sites, bonds, dimension=1)


def test_a_flat_band_has_no_k(ask: Ask, column: Column) -> None:
    answer = ask(flat_band(), "levels", cells=4)
    reasons = column(answer, "levels", "reason")
    assert reasons.count("in a flat band") == 4
    assert all((k is None) == bool(why) for k, why in zip(column(answer, "levels", "k"), reasons, strict=True))
    assert "Levels in a flat band have no k." in answer.warnings
    assert "x" not in heads(answer), "no unit of β is known"


def test_an_open_shell_is_said(ask: Ask) -> None:
    answer = ask(CHAIN, "levels", cells=7)
    assert (answer.value("open_shell"), answer.value("gap")) == (1.0, 0.0)
    assert answer.value("homo") == answer.value("lumo") == 0.0
    assert answer.warnings[0].startswith("Open shell")


def test_nothing_filled_has_no_answer(ask: Ask) -> None:
    empty = Model((Site("A", electrons=0.0),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    answer = ask(empty, "levels", cells=3)
    assert (answer.value("homo"), answer.value("gap")) == (None, None)
    assert answer.value("lumo") == pytest.approx(-math.sqrt(2), abs=1e-9)
    assert "no gap" in figure(answer, "diagram").caption


def test_large_pieces_keep_true_numbers(ask: Ask) -> None:
    """Above 2,000 sites: 20 levels each side of the Fermi energy, numbered from the lowest of all."""
    answer = ask(CHAIN, "levels", cells=2500)
    numbers = [int(q.name.rpartition("_")[2]) for q in answer.quantities if q.name.startswith("levels.energy_")]
    assert numbers == list(range(1231, 1271))
    for n in (1231, 1250, 1270):
        assert answer.value(f"energy_{n}") == pytest.approx(-5 * math.cos(n * math.pi / 2501), abs=1e-9)
        assert answer.value(f"k_{n}") == pytest.approx(n / 2501, abs=1e-10)
    assert answer.value("pi_energy") is None
    assert answer.warnings == ("Only 40 of 2500 levels, those around the Fermi energy, were computed.",)


@pytest.mark.parametrize("cells", [4, 6, 20])
def test_every_electron_is_drawn(ask: Ask, cells: int) -> None:
    """As many dots as electrons, however the levels are filled."""
    answer = ask(CHAIN, "levels", cells=cells)
    dots = [line for line in figure(answer, "diagram").svg.splitlines() if "<use" in line and "--bb-series-1" in line]
    assert len(dots) == cells


def test_many_levels_are_thinned_and_said(ask: Ask) -> None:
    answer = ask(CHAIN, "levels", cells=400)
    assert "The 40 around the Fermi energy are drawn." in figure(answer, "diagram").caption
    assert "of them are drawn" in figure(answer, "on-bands").caption
    assert len(figure(answer, "on-bands").svg) < 100_000
    assert len(answer.tables[0].rows) == 400


def test_frontier_levels_are_named(ask: Ask, texts: Texts) -> None:
    assert {"HOMO", "LUMO", "energy E / eV", "x = (E − α)/β"} <= set(texts(ask(CHAIN, "levels", cells=6), "diagram"))
    assert "HOMO" not in texts(ask(CHAIN, "levels", cells=7), "diagram")


def test_a_plane_has_levels_without_k(ask: Ask, column: Column) -> None:
    """The ring of 4 × 4 cells of a square lattice: E = 2β(cos + cos), six levels at 0."""
    answer = ask(lattices.square(beta=-1.0), "levels", cells=[4, 4], ends="ring")
    assert column(answer, "levels", "degeneracy").count(6) == 6
    assert [figure.name for figure in answer.figures] == ["sketch", "diagram", "orbitals"]


def test_groups_stand_side_by_side() -> None:
    assert side_by_side(np.array([0, 0, 0, 1])).tolist() == [-1.25, 0.0, 1.25, 0.0]


def test_marks_at_one_energy_stand_apart() -> None:
    assert margin_columns(np.array([0.0, 0.0, 0.0, 5.0]), 10.0).tolist() == [0, 1, 2, 0]


def test_a_charge_counts_for_each_cell_and_is_said(ask: Ask) -> None:
    charged = replace(ALTERNATING, electrons=1.0)
    told = "Charge and electrons count for the cell: this piece has 4 electrons fewer than its sites bring."
    assert told in ask(charged, "levels", cells=4).warnings
    assert not any("count for the cell" in warning for warning in ask(charged, "levels", cells=1).warnings)
    assert not any("count for the cell" in warning for warning in ask(ALTERNATING, "levels", cells=4).warnings)


@pytest.mark.parametrize("dimension", [0, 1, 2, 3])
def test_sites_without_any_bond_are_drawn(ask: Ask, dimension: int) -> None:
    """Each level is the α of its site; there is a picture, with no line in it."""
    lonely = Model((Site("A"), Site("B", alpha=1.0)), (), dimension=dimension)
    cells = {0: {}, 1: {"cells": 2}}.get(dimension, {"cells": [2] * dimension})
    answer = ask(lonely, "levels", **cells)
    n_each = 2**dimension
    found = [answer.value(f"energy_{n}") for n in range(1, 2 * n_each + 1)]
    assert found == [0.0] * n_each + [1.0] * n_each
    assert figure(answer, "orbitals").svg
