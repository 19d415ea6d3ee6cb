"""What every question must hold when it is asked through the registry."""

import json
import re
from typing import Any

import pytest

from bandbook import registry
from bandbook.analyses import ANALYSES, Analysis
from bandbook.exhibits import KINDS, answer_bundle

STUDIES: dict[str, dict[str, Any]] = {
    "levels": {"question": "levels", "cells": 4},
    "bands": {"question": "bands"},
    "length_series": {
        "question": "length_series",
        "cells": "1..8",
        "measured": {"lengths": [1, 2, 3, 4, 5], "gaps": [5, 4, 3, 3, 2.5]},
    },
}


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
        assert "eV" in figure.svg or figure.name == "orbitals"
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
