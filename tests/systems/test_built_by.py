"""A system built by a function of the author's own workings."""

from typing import Any

import pytest

from bandbook import lattices, registry
from bandbook.errors import AuthorError, Problem, WorkingsError
from bandbook.model import Model


def wall(half: int = 1, *, beta: float = -2.5) -> Model:
    assert half
    return lattices.chain(beta=beta)


def checked(**more: Any) -> dict[str, Any]:
    found, problems = registry.check_system({"built_by": "wall", **more})
    assert problems == []
    assert found is not None
    return found


def told(builders: dict[str, Any], **more: Any) -> Problem:
    with pytest.raises(AuthorError) as caught:
        registry.build_system(checked(**more), builders)
    (problem,) = caught.value.problems
    return problem


def test_the_function_gets_its_arguments() -> None:
    model = registry.build_system(checked(**{"with": {"half": 40, "beta": -2.0}}), {"wall": wall})
    assert model == lattices.chain(beta=-2.0)


def test_without_arguments_it_takes_its_own_defaults() -> None:
    assert checked()["with"] is None
    assert registry.build_system(checked(), {"wall": wall}) == lattices.chain(beta=-2.5)


def test_common_keys_hold_for_what_it_builds() -> None:
    model = registry.build_system(checked(charge=1, beta_unit=-3.0), {"wall": wall})
    assert (model.n_electrons, model.beta_unit) == (0.0, -3.0)
    problem = told({"wall": wall}, charge=2)
    assert (problem.found, problem.key) == ("-1 electrons on 1 site, with the charge 2", ("charge",))


@pytest.mark.parametrize("builders", [{}, {"wal": wall, "_wall": wall}, {"wall": 5, "walls": wall}])
def test_a_function_that_is_missing(builders: dict[str, Any]) -> None:
    problem = told(builders)
    assert problem.key == ("built_by",)
    near = [name for name in builders if name in {"wal", "walls"}]
    assert problem.remedy == (
        f'did you mean "{near[0]}"?' if near else "define wall in a workings block above the study"
    )


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ({"half": 1, "length": 2}, "unexpected keyword argument 'length'"),
        ({"bta": -1}, "unexpected keyword argument 'bta'"),
    ],
)
def test_arguments_that_it_does_not_take(arguments: dict[str, Any], words: str) -> None:
    problem = told({"wall": wall}, **{"with": arguments})
    assert words in problem.found
    assert "half: int = 1" in problem.allowed
    assert problem.key == ("with",)


@pytest.mark.parametrize("returned", [None, 5, [lattices.chain(beta=-1.0)], Model])
def test_what_it_returns_is_a_model(returned: Any) -> None:
    problem = told({"wall": lambda: returned})
    assert problem.found.startswith('"wall" returned ')
    assert problem.remedy == "return a Model"


def test_an_error_of_the_authors_own_is_the_authors_own() -> None:
    def fails() -> Model:
        raise KeyError("mine")

    with pytest.raises(WorkingsError) as caught:
        registry.build_system(checked(**{"with": {"half": 3}}), {"wall": lambda half: fails() if half else None})
    assert str(caught.value) == (
        "\"wall\" called with half = 3 raised KeyError: 'mine'; it must return a Model; mend the function or the arguments"
    )
    assert isinstance(caught.value.__cause__, KeyError)


def test_a_builtin_without_a_signature_is_called() -> None:
    assert told({"wall": dict}, **{"with": {"a": 1}}).found == '"wall" returned dict'


@pytest.mark.parametrize("arguments", [{"a": float("nan")}, [1], 5, {"a": {"b": [10**400]}}])
def test_arguments_are_plain_values(arguments: Any) -> None:
    found, problems = registry.check_system({"built_by": "wall", "with": arguments})
    assert found is None
    assert problems[0].key[0] == "with"
