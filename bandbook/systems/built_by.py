"""A system built by a function of an earlier workings block."""

from collections.abc import Mapping
from typing import Any

from bandbook.errors import AuthorError
from bandbook.model import Model
from bandbook.parameters import Field, Problem, near
from bandbook.systems.form import COMMON, Builders, Checked, Form, with_common

FIELDS = (
    Field("built_by", "name", "function of an earlier workings block that returns a Model"),
    Field("with", "table", "its arguments", default=None),
    *COMMON,
)


def fields(given: Mapping[str, Any]) -> tuple[Field, ...]:  # noqa: ARG001 - one signature for every form
    """Return the fields."""
    return FIELDS


def inspect(checked: Checked) -> list[Problem]:  # noqa: ARG001 - one signature for every form
    """Return nothing: what the function builds is seen when it runs."""
    return []


def build(checked: Checked, builders: Builders) -> Model:
    """Return the Model that the author's function returns.

    Raises:
        AuthorError: There is no such function, it does not take these arguments, or it returns something else.
    """
    name = checked["built_by"]
    function = builders.get(name)
    if not callable(function):
        functions = sorted(key for key, value in builders.items() if callable(value) and not key.startswith("_"))
        remedy = near(name, functions) or f"define {name} in a workings block above the study"
        raise AuthorError(
            [Problem(f'no function "{name}"', "a function of an earlier workings block", remedy, ("built_by",))]
        )
    model = function(**(checked["with"] or {}))
    if not isinstance(model, Model):
        found = f'"{name}" returned {type(model).__name__}'
        raise AuthorError([Problem(found, "it returns a bandbook.model.Model", "return a Model", ("built_by",))])
    return with_common(model, checked)


BUILT_BY = Form("built-by", "built_by", "built by a function of an earlier workings block", fields, inspect, build)
