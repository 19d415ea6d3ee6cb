"""What every member of a family must hold: lattices, forms, questions."""

import inspect
import json
import re
from typing import Any

import numpy as np
import pytest

from bandbook import registry
from bandbook.analyses import ANALYSES, Analysis
from bandbook.exhibits import KINDS, answer_bundle
from bandbook.lattices import LATTICES, Lattice
from bandbook.parameters import KINDS as FIELD_KINDS
from bandbook.solver.hamiltonian import bloch
from bandbook.systems import FORMS

VALUES = {
    "beta": -2.5, "beta_inside": -2.85, "beta_between": -2.15, "alpha": 0.3, "alpha_a": 0.5, "alpha_b": -0.5, "period": 2.4,
    "bond_length": 1.42, "lines": 5, "sites": 7,
}  # fmt: skip
STUDIES: dict[str, dict[str, Any]] = {
    "levels": {"question": "levels", "cells": 4},
    "bands": {"question": "bands"},
    "length_series": {"question": "length_series", "cells": "1..8"},
}


def built(lattice: Lattice, **more: float) -> Any:
    return lattice.build(**{**{field.name: VALUES[field.name] for field in lattice.fields}, **more})


@pytest.mark.parametrize("lattice", LATTICES, ids=lambda lattice: lattice.name)
def test_a_lattice_keeps_its_word(lattice: Lattice) -> None:
    signature = inspect.signature(lattice.build)
    assert set(signature.parameters) == {field.name for field in lattice.fields}
    for field in lattice.fields:
        assert field.kind in FIELD_KINDS
        assert field.meaning
        assert not field.meaning.endswith(".")
        default = signature.parameters[field.name].default
        assert field.is_required == (default is inspect.Parameter.empty)
        if not field.is_required:
            assert field.default == default
    model = built(lattice)
    assert model.dimension == lattice.dimension
    if model.dimension:
        h, _ = bloch(model, np.random.default_rng(1).uniform(-1, 1, (5, model.dimension)))
        assert np.allclose(h, h.conj().swapaxes(1, 2), atol=1e-12)


@pytest.mark.parametrize("lattice", LATTICES, ids=lambda lattice: lattice.name)
def test_alpha_shifts_every_level(lattice: Lattice) -> None:
    own = {"alpha_a": None, "alpha_b": None} if "alpha_a" in {field.name for field in lattice.fields} else {}
    k = np.full((1, lattice.dimension), 0.37)
    low = np.linalg.eigvalsh(bloch(built(lattice, alpha=0.0, **own), k)[0])  # type: ignore[arg-type]
    high = np.linalg.eigvalsh(bloch(built(lattice, alpha=1.25, **own), k)[0])  # type: ignore[arg-type]
    assert high == pytest.approx(low + 1.25, abs=1e-10)


@pytest.mark.parametrize("lattice", LATTICES, ids=lambda lattice: lattice.name)
def test_bonds_have_one_length(lattice: Lattice) -> None:
    """Positions are sensible: all bonds of a lattice of equal bonds are equally long."""
    model = built(lattice)
    at = np.array([site.at for site in model.sites])
    vectors = np.array(model.vectors or np.zeros((0, 3)))
    steps = [at[c.end] + (np.array(c.cell) @ vectors if c.cell else 0) - at[c.start] for c in model.couplings]
    lengths = np.linalg.norm(steps, axis=1)
    assert lengths == pytest.approx(np.full(len(lengths), lengths[0]), abs=1e-9)


def test_forms_have_keys_of_their_own() -> None:
    keys = [form.key for form in FORMS]
    assert len(set(keys)) == len(keys)


@pytest.mark.parametrize("analysis", ANALYSES, ids=lambda analysis: analysis.question)
def test_a_question_keeps_its_word(analysis: Analysis) -> None:
    system, problems = registry.check_system(
        {"lattice": "alternating-chain", "beta_inside": -2.85, "beta_between": -2.15, "period": 2.46, "beta_unit": -2.7}
    )
    assert system is not None, problems
    study, problems = registry.check_study(STUDIES[analysis.question], {"system": system})
    assert study is not None, problems
    model = registry.build_system(system, {})
    answer = registry.answer("study", study, model)
    names = [quantity.name.removeprefix("study.") for quantity in answer.quantities]
    assert len(set(names)) == len(names)
    for name in names:
        assert any(promised.fits(name) for promised in analysis.quantities), name
    for promised in analysis.quantities:
        assert promised.kind in KINDS
        assert any(promised.fits(name) for name in names), promised.pattern
    for figure in answer.figures:
        assert figure.alt.strip()
        assert re.search(r"\d", figure.caption)
        assert "eV" in figure.svg
        assert "var(--bb-" in figure.svg
        assert "<metadata" not in figure.svg
    for table in answer.tables:
        assert all(column.meaning for column in table.columns)
        assert all(column.unit for column in table.columns if "energy" in column.name or column.name == "gap")
    bundle = answer_bundle(answer)
    assert json.loads(json.dumps(bundle, allow_nan=False)) == bundle
    assert answer_bundle(registry.answer("study", study, model)) == bundle, "the same question gives the same bytes"


def test_every_example_checks() -> None:
    import tomllib

    system, _ = registry.check_system({"lattice": "chain", "beta": -1.0})
    for analysis in ANALYSES:
        _, problems = registry.check_study(tomllib.loads(analysis.example), {"system": system})
        assert problems == []
