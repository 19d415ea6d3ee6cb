"""Bands as a study reports them: closed forms, and what tables and figures show of them."""

import itertools
import math
from collections.abc import Callable
from typing import Any

import pytest
from scipy import constants

from bandbook import lattices
from bandbook.exhibits import Answer
from bandbook.model import Coupling, Model, Site

Ask = Callable[..., Answer]
Column = Callable[[Answer, str, str], list[Any]]
Texts = Callable[[Answer, str], list[str]]

ALTERNATING = lattices.alternating_chain(beta_inside=-2.85, beta_between=-2.15, period=2.46)
#: ħ²/m_e, eV Å².
HBAR_SQUARED = constants.hbar**2 / constants.m_e / constants.e * 1e20


def test_alternating_chain(ask: Ask) -> None:
    """Gap 2||β₁| − |β₂|| at X, width 2(|β₁| + |β₂|), m* = ħ²|β₁ − β₂|/(β₁β₂a²) (closed forms)."""
    answer = ask(ALTERNATING, "bands")
    mass = HBAR_SQUARED * 0.70 / (2.85 * 2.15 * 2.46**2)
    assert answer.value("gap") == pytest.approx(1.40, abs=1e-9)
    assert answer.value("direct_gap") == pytest.approx(1.40, abs=1e-9)
    assert answer.value("total_width") == pytest.approx(10.0, abs=1e-9)
    assert answer.value("fermi_energy") == pytest.approx(0.0, abs=1e-9)
    assert (answer.value("valence_top"), answer.value("conduction_bottom")) == pytest.approx((-0.7, 0.7), abs=1e-9)
    assert answer.value("mass_hole") == pytest.approx(mass, rel=2e-5), "differences, not derivatives"
    assert answer.value("mass_electron") == answer.value("mass_hole")
    assert [answer.value(f"energy_{p}_{n}") for p in ("Gamma", "X") for n in (1, 2)] == pytest.approx(
        [-5.0, 5.0, -0.7, 0.7], abs=1e-9
    )
    assert answer.warnings == ()


def test_words_say_where_the_gap_is(ask: Ask, texts: Texts) -> None:
    answer = ask(ALTERNATING, "bands")
    assert "insulator with a direct gap of 1.400 eV at X, k = 1.000 π/a; total width 10.000 eV" in answer.figures[0].alt
    words = texts(answer, "bands")
    assert "gap 1.400 eV, Fermi energy 0.000 eV" in words
    assert {"Γ  0", "1/2", "X  1", "k / (π/a)", "energy E / eV"} <= set(words)


def test_edges_are_marked_on_the_path(ask: Ask, column: Column) -> None:
    answer = ask(ALTERNATING, "bands")
    assert column(answer, "edges", "k") == [1.0, 1.0]
    marks = [line for line in answer.figures[0].svg.splitlines() if "<use" in line and "--bb-series-1" in line]
    assert len(marks) == 2
    assert "Filled: highest filled state, ring: lowest empty state." in answer.figures[0].caption


def test_graphene_touches(ask: Ask, texts: Texts) -> None:
    """±3t at Γ, ±t at M, 0 at K; no gap, no mass (Wallace 1947, memory)."""
    answer = ask(lattices.honeycomb(beta=-2.7), "bands")
    found = [answer.value(f"energy_{point}_2") for point in ("Gamma", "K", "M")]
    assert found == pytest.approx([8.1, 0.0, 2.7], abs=1e-9)
    assert (answer.value("gap"), answer.value("mass_hole")) == (0.0, None)
    assert answer.warnings == ("The gap is 0: bands touch. There is no effective mass.",)
    assert [word for word in texts(answer, "bands") if word in {"Γ", "K", "M"}] == ["Γ", "K", "M", "Γ"]


def test_gapped_honeycomb_has_an_isotropic_tensor(ask: Ask, column: Column) -> None:
    """Gap |α_A − α_B| at K; there E² = (Δ/2)² + (3td/2)²q², so m* = ħ²(Δ/2)/(3td/2)² in every direction."""
    answer = ask(lattices.honeycomb(beta=-2.7, bond_length=1.42, alpha_a=1.5, alpha_b=-1.5), "bands")
    mass = HBAR_SQUARED * 1.5 / (1.5 * 2.7 * 1.42) ** 2
    assert answer.value("gap") == pytest.approx(3.0, abs=1e-9)
    assert answer.value("mass_electron") == pytest.approx(mass, rel=1e-5)
    assert column(answer, "masses", "mass_1") == pytest.approx([mass] * 2, rel=1e-5)
    assert column(answer, "masses", "mass_2") == pytest.approx([mass] * 2, rel=1e-5)
    assert "direct gap of 3.000 eV at K" in answer.figures[0].caption


def test_an_indirect_gap_names_both_ends(ask: Ask) -> None:
    """Two chains side by side: E = −2 − 2·0.5 cos k tops at X with −1, E = 3 − 2 cos k is lowest at Γ with 1."""
    bonds = (Coupling(0, 0, -0.5, (1,)), Coupling(1, 1, -1.0, (1,)))
    answer = ask(Model((Site("A", alpha=-2.0), Site("B", alpha=3.0)), bonds, dimension=1), "bands")
    assert answer.value("gap") == pytest.approx(2.0, abs=1e-9)
    assert answer.value("direct_gap") == pytest.approx(4.0, abs=1e-9)
    assert "an indirect gap of 2.000 eV from X, k = 1.000 π/a to Γ, k = 0.000 π/a" in answer.figures[0].caption


def test_an_odd_electron_count_is_no_insulator(ask: Ask) -> None:
    answer = ask(lattices.chain(beta=-2.5), "bands")
    assert answer.value("gap") == 0.0
    assert answer.value("energy_per_cell") == pytest.approx(-2.5 * 4 / math.pi, abs=1e-9)
    assert answer.warnings == ("The gap is 0: band partly filled. There is no effective mass.",)
    assert [table.name for table in answer.tables] == ["path"]


def test_no_electrons_have_no_gap(ask: Ask) -> None:
    empty = Model((Site("A", electrons=0.0),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    answer = ask(empty, "bands")
    assert (answer.value("gap"), answer.value("valence_top")) == (None, None)
    assert answer.value("conduction_bottom") == pytest.approx(-2.0, abs=1e-9)
    assert "no gap" in answer.figures[0].caption


def test_an_unknown_repeat_has_no_mass(ask: Ask, column: Column) -> None:
    answer = ask(lattices.alternating_chain(beta_inside=-2.85, beta_between=-2.15), "bands")
    assert answer.value("mass_hole") is None
    assert column(answer, "edges", "remark") == ["the repeat is unknown"] * 2


def test_the_path_ascends(ask: Ask, column: Column) -> None:
    answer = ask(lattices.armchair_ribbon(lines=3, beta=-2.7), "bands")
    bands = [column(answer, "path", f"band_{n}") for n in range(1, 7)]
    assert all(low <= high for one, two in itertools.pairwise(bands) for low, high in zip(one, two, strict=True))


def test_a_molecule_has_none() -> None:
    from bandbook.analyses import ANALYSES

    bands = next(analysis for analysis in ANALYSES if analysis.question == "bands")
    (problem,) = bands.inspect({}, lattices.ring(beta=-1.0, sites=6))
    assert str(problem) == ('question: the system is a molecule; bands need a periodic system; ask question = "levels"')
