"""What a question is, and what it is handed."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from bandbook.exhibits import KINDS, Figure, Quantity, QuantityName, Table, in_beta
from bandbook.model import Model
from bandbook.parameters import Field, Problem


@dataclass(frozen=True)
class Asked:
    """A question put to a model.

    Attributes:
        name: The study's name.
        study: Its checked parameters.
        model: The model.
    """

    name: str
    study: Mapping[str, Any]
    model: Model

    def quantity(self, name: str, kind: str, value: float | None, meaning: str, **more: Any) -> Quantity:
        """Return a quantity of this study, in β too where the model has one.

        Args:
            name: Its name without the study.
            kind: Its kind.
            value: In the kind's unit, or ``None``.
            meaning: One line.
            more: ``electrons`` that a total counts, ``unit`` other than the kind's.
        """
        electrons = more.get("electrons", 0.0)
        beta = in_beta(value, kind, beta=self.model.beta_unit, alpha=self.model.alpha_unit, electrons=electrons)
        return Quantity(f"{self.name}.{name}", kind, value, more.get("unit", KINDS[kind].unit), meaning, beta)


@dataclass(frozen=True)
class Analysis:
    """One question.

    Attributes:
        question: Its word.
        meaning: What it asks, one line without a full stop.
        example: A study block.
        fields: Its keys besides ``question``, ``name`` and ``system``.
        quantities: What it promises.
        inspect: What the fields cannot see: ``(study, model or None) → problems``.
        compute: The numbers, as an object of its own.
        report: Its quantities.
        tabulate: Its tables.
        draw: Its figures.
        warn: Its warnings, whole sentences.
    """

    question: str
    meaning: str
    example: str
    fields: tuple[Field, ...]
    quantities: tuple[QuantityName, ...]
    inspect: Callable[[Mapping[str, Any], Model | None], list[Problem]]
    compute: Callable[[Asked], Any]
    report: Callable[[Asked, Any], tuple[Quantity, ...]]
    tabulate: Callable[[Asked, Any], tuple[Table, ...]]
    draw: Callable[[Asked, Any], tuple[Figure, ...]]
    warn: Callable[[Asked, Any], tuple[str, ...]]


def counted(number: int, noun: str) -> str:
    """Return a number with its noun.

    >>> counted(1, "level"), counted(3, "gap level"), counted(0, "gap level")
    ('1 level', '3 gap levels', 'no gap levels')
    """
    return f"{number or 'no'} {noun}{'' if number == 1 else 's'}"


def drawable(values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return energies as figures draw them: rounded as they are stored, so that the last bits do not show.

    >>> drawable(np.array([-1e-16, 1.0000000001])).tolist()
    [0.0, 1.0]
    """
    rounded: NDArray[np.float64] = np.round(values, KINDS["level"].decimals) + 0.0
    return rounded
