"""What the tests of the questions share: a question put to a model, its fields checked as a case's are."""

import re
from collections.abc import Callable
from typing import Any

import pytest

from bandbook import registry
from bandbook.exhibits import Answer
from bandbook.model import Model
from bandbook.parameters import Problem, check

Ask = Callable[..., Answer]
Inspect = Callable[..., list[Problem]]


def _checked(question: str, keys: dict[str, Any]) -> dict[str, Any]:
    checked, problems = check(registry.analysis_of(question).fields, keys)
    assert problems == []
    return {"question": question, **checked}


@pytest.fixture(scope="session")
def ask() -> Ask:
    """Return what asks: ``ask(model, "levels", cells=4)`` → answer of the study ``levels``."""

    def answer(model: Model, question: str, study: str = "", **keys: Any) -> Answer:
        return registry.answer(study or question, _checked(question, keys), model)

    return answer


@pytest.fixture(scope="session")
def inspect() -> Inspect:
    """Return what checks: ``inspect(model, "levels", cells=4)`` → problems."""

    def problems(model: Model | None, question: str, **keys: Any) -> list[Problem]:
        return registry.analysis_of(question).inspect(_checked(question, keys), model)

    return problems


@pytest.fixture(scope="session")
def column() -> Callable[[Answer, str, str], list[Any]]:
    """Return what reads a column: ``column(answer, table, name)``."""

    def values(answer: Answer, table: str, name: str) -> list[Any]:
        found = next(one for one in answer.tables if one.name == table)
        place = [head.name for head in found.columns].index(name)
        return [row[place] for row in found.rows]

    return values


@pytest.fixture(scope="session")
def texts() -> Callable[[Answer, str], list[str]]:
    """Return what reads the words written in a figure: ``texts(answer, figure)``."""

    def words(answer: Answer, figure: str) -> list[str]:
        svg = next(one.svg for one in answer.figures if one.name == figure)
        return re.findall(r"<text[^>]*>([^<]*)</text>", svg)

    return words
