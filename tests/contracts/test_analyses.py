"""What every question must hold, whatever the system: promised names, units, words, fields that count, same bytes."""

import hashlib
import json
import os
import re
import subprocess
import sys
from collections.abc import Iterator, Mapping
from functools import cache
from pathlib import Path
from typing import Any
from xml.etree import ElementTree as ET

import pytest

from bandbook import lattices, registry
from bandbook.analyses import ANALYSES, Analysis, Asked
from bandbook.exhibits import KINDS, Answer, Column, answer_bundle, typeset
from bandbook.model import Model
from bandbook.parameters import KINDS as FIELD_KINDS
from bandbook.parameters import check

ROOT = Path(__file__).resolve().parents[2]
MODELS: dict[str, Model] = {
    "chain": lattices.chain(beta=-2.5, period=1.4),
    "alternating": lattices.alternating_chain(beta_inside=-2.85, beta_between=-2.15, period=2.46),
    "ended": lattices.alternating_chain(beta_inside=-2.15, beta_between=-2.85),
    "skeleton": lattices.polyacene(beta=-2.5),
    "gapped honeycomb": lattices.honeycomb(beta=-2.7, alpha_a=1.5, alpha_b=-1.5),
    "benzene": lattices.ring(beta=-2.5, sites=6),
}
#: Models whose answers are computed twice.
CHOSEN = (MODELS["alternating"], MODELS["benzene"])
CELLS: dict[str, Any] = {"gapped honeycomb": [2, 2]}
#: A number of each question that its captions must tell.
TOLD = {"levels": "gap", "bands": "total_width", "length_series": "band_gap"}
#: Numbers without a unit.
PLAIN = {"occupation", "w", "x", "factor", "chi2", "aicc", "weight"}
#: Columns that stay even where no row has an answer.
MAY_BE_BLANK = {"mass", "extended_gap", "window_error", "conjugation_length"}


def asked_of(analysis: Analysis, name: str) -> Asked | None:
    """Return the question put to a model of this page, or nothing where the check refuses it."""
    given: dict[str, Any] = {}
    if any(field.name == "cells" for field in analysis.fields):
        given["cells"] = "1..6" if analysis.question == "length_series" else CELLS.get(name, 4)
        if MODELS[name].dimension == 0:
            del given["cells"]
    if any(field.name == "measured" for field in analysis.fields):
        given["measured"] = {"lengths": [1, 2, 3, 4, 5, 6], "gaps": [5.0, 4.0, 3.5, 3.2, 3.1, 3.0]}
    study, problems = check(analysis.fields, given)
    if problems or analysis.inspect(study, MODELS[name]):
        return None
    return Asked("study", {"question": analysis.question, **study}, MODELS[name])


def answers() -> Iterator[Any]:
    for analysis in ANALYSES:
        for name in MODELS:
            asked = asked_of(analysis, name)
            if asked is not None:
                yield pytest.param(analysis, asked, id=f"{analysis.question} of {name}")


ANSWERS = list(answers())


@cache
def answer_to(number: int) -> Answer:
    """Return the answer to one of :data:`ANSWERS`."""
    asked = ANSWERS[number].values[1]
    return registry.answer(asked.name, asked.study, asked.model)


def digests() -> list[str]:
    """Return a digest of an answer to each question and of a molecule's, figures and tables included."""
    chosen = [number for number, param in enumerate(ANSWERS) if param.values[1].model in CHOSEN]
    bundles = [json.dumps(answer_bundle(answer_to(number))) for number in chosen]
    return [hashlib.sha256(bundle.encode()).hexdigest() for bundle in bundles]


@pytest.fixture
def answer(asked: Asked) -> Answer:
    return answer_to([param.values[1] for param in ANSWERS].index(asked))


@pytest.mark.parametrize(("analysis", "asked"), ANSWERS)
def test_quantities_are_the_promised_ones(analysis: Analysis, asked: Asked, answer: Answer) -> None:
    names = [quantity.name.removeprefix("study.") for quantity in answer.quantities]
    assert len(set(names)) == len(names)
    for name, quantity in zip(names, answer.quantities, strict=True):
        promised = [one for one in analysis.quantities if one.fits(name)]
        assert [one.kind for one in promised] == [quantity.kind], name
        assert quantity.unit == KINDS[quantity.kind].unit
        assert quantity.meaning
        assert quantity.uncertainty is None
    missing = [one.pattern for one in analysis.quantities if not any(one.fits(name) for name in names)]
    assert missing == []
    has_beta = asked.model.beta_unit is not None
    for quantity in answer.quantities:
        assert (quantity.in_beta is not None) == (
            has_beta and quantity.value is not None and bool(KINDS[quantity.kind].beta)
        )


@pytest.mark.parametrize(("analysis", "asked"), ANSWERS)
def test_every_column_has_its_words(analysis: Analysis, asked: Asked, answer: Answer) -> None:
    del analysis, asked
    for table in answer.tables:
        assert table.caption.endswith(".")
        assert table.rows
        names = [column.name for column in table.columns]
        assert len(set(names)) == len(names)
        for place, column in enumerate(table.columns):
            assert_a_column(column, [row[place] for row in table.rows])
    assert len({table.name for table in answer.tables}) == len(answer.tables)


def assert_a_column(column: Column, cells: list[Any]) -> None:
    assert re.fullmatch(r"[a-z][a-z0-9_]*", column.name)
    assert column.label
    assert column.meaning
    is_real = any(isinstance(cell, float) for cell in cells)
    assert not is_real or column.decimals is not None, f"{column.name} stores a number without fixed decimals"
    assert not is_real or bool(column.unit) == (column.name not in PLAIN), column.name
    assert any(cell is not None for cell in cells) or column.name in MAY_BE_BLANK


#: Figures that show what is solved, or its orbitals, and have no axes.
PICTURES = {"sketch", "orbitals"}


@pytest.mark.parametrize(("analysis", "asked"), ANSWERS)
def test_every_figure_says_what_it_shows(analysis: Analysis, asked: Asked, answer: Answer) -> None:
    del asked
    assert answer.figures
    told = typeset(answer.value(TOLD[analysis.question]), 3)
    assert any(told in figure.caption and told in figure.alt for figure in answer.figures)
    for figure in answer.figures:
        assert figure.caption.endswith(".")
        assert re.search(r"\d", figure.alt)
        assert re.search(r"\d", figure.caption)
        svg = ET.fromstring(figure.svg)  # noqa: S314 - our own figure
        texts = [text.text or "" for text in svg.iter("{http://www.w3.org/2000/svg}text")]
        if figure.name in PICTURES:
            assert texts, "what is drawn is named"
            continue
        vertical = [text for text in texts if text.endswith("/ eV")]
        assert vertical, "the vertical axis is an energy in eV"
    assert len({figure.name for figure in answer.figures}) == len(answer.figures)


@pytest.mark.parametrize(("analysis", "asked"), ANSWERS)
def test_an_answer_is_plain_json(analysis: Analysis, asked: Asked, answer: Answer) -> None:
    del analysis, asked
    bundle = answer_bundle(answer)
    assert json.loads(json.dumps(bundle, allow_nan=False)) == bundle
    assert "-0.0," not in json.dumps(bundle["quantities"])
    assert all(warning.endswith(".") for warning in answer.warnings)


def test_another_process_gives_the_same_bytes() -> None:
    """The chosen answers once more, under another hash seed."""
    code = f"import json, runpy; print(json.dumps(runpy.run_path({__file__!r})['digests']()))"
    environment = {**os.environ, "PYTHONHASHSEED": "12345", "PYTHONPATH": str(ROOT)}
    found = subprocess.run([sys.executable, "-c", code], capture_output=True, check=True, env=environment)
    assert len(digests()) == len(ANALYSES) + 1
    assert json.loads(found.stdout) == digests()


class Watched(Mapping[str, Any]):
    """Parameters that remember which of them were read."""

    def __init__(self, given: Mapping[str, Any]) -> None:
        self.given, self.read = given, set[str]()

    def __getitem__(self, key: str) -> Any:
        self.read.add(key)
        return self.given[key]

    def __iter__(self) -> Iterator[str]:
        return iter(self.given)

    def __len__(self) -> int:
        return len(self.given)


@pytest.mark.parametrize("analysis", ANALYSES, ids=lambda analysis: analysis.question)
def test_every_field_is_used(analysis: Analysis) -> None:
    asked = asked_of(analysis, "alternating")
    assert asked is not None
    watched = Watched(asked.study)
    watched_asked = Asked(asked.name, watched, asked.model)
    analysis.draw(watched_asked, analysis.compute(watched_asked))
    assert {field.name for field in analysis.fields} <= watched.read


@pytest.mark.parametrize("analysis", ANALYSES, ids=lambda analysis: analysis.question)
def test_a_question_is_described(analysis: Analysis) -> None:
    assert analysis.meaning
    assert not analysis.meaning.endswith(".")
    assert f'question = "{analysis.question}"' in analysis.example
    for field in analysis.fields:
        assert field.kind in FIELD_KINDS
        assert field.meaning
        assert not field.meaning.endswith(".")
        assert all(key.meaning for key in field.fields)
    names = [one.pattern for one in analysis.quantities]
    assert len(set(names)) == len(names)
    assert all(one.meaning and not one.meaning.endswith(".") for one in analysis.quantities)
