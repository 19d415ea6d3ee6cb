"""A system built by a function of an earlier workings block."""

import inspect as signatures
from collections.abc import Callable, Mapping
from typing import Any

from bandbook.errors import AuthorError, BandbookError, WorkingsError
from bandbook.model import Model
from bandbook.parameters import Field, Problem, near
from bandbook.systems.form import COMMON, Builders, Checked, Form, with_common

FIELDS = (
    Field("built_by", "name", "function of an earlier workings block that returns a Model"),
    Field("with", "table", "its arguments, by name", default=None),
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
        AuthorError: There is no such function, it does not take these arguments, it returns something else, or the
            electrons do not fit.
        WorkingsError: The function raised an exception.
    """
    name, arguments = checked["built_by"], checked["with"] or {}
    function = builders.get(name)
    if not callable(function):
        raise AuthorError([_missing(name, builders)])
    refusal = _refusal(function, arguments)
    if refusal:
        allowed = f"it takes {signatures.signature(function)}"
        raise AuthorError([Problem(f'"{name}": {refusal}', allowed, "correct the table", ("with",))])
    try:
        model = function(**arguments)
    except BandbookError:
        raise
    except Exception as error:
        given = ", ".join(f"{key} = {value!r}" for key, value in arguments.items())
        found = f'"{name}" called with {given or "no arguments"} raised {type(error).__name__}: {error}'
        raise WorkingsError(f"{found}; it must return a Model; mend the function or the arguments") from error
    if not isinstance(model, Model):
        found = f'"{name}" returned {type(model).__name__}'
        raise AuthorError([Problem(found, "it returns a bandbook.model.Model", "return a Model", ("built_by",))])
    return with_common(model, checked)


def _missing(name: str, builders: Builders) -> Problem:
    functions = sorted(key for key, value in builders.items() if signatures.isfunction(value) and key[:1] != "_")
    remedy = near(name, functions) or f"define {name} in a workings block above the study"
    found = f'"{name}" is no function' if name in builders else f'no function "{name}"'
    return Problem(found, "a function of an earlier workings block", remedy, ("built_by",))


def _refusal(function: Callable[..., Any], arguments: Mapping[str, Any]) -> str:
    """Return why a function does not take these arguments, or nothing."""
    try:
        signatures.signature(function).bind(**arguments)
    except TypeError as error:
        return str(error)
    except ValueError:  # a builtin without a signature says so itself when it is called
        return ""
    return ""


BUILT_BY = Form("built-by", "built_by", "built by a function of an earlier workings block", fields, inspect, build)
