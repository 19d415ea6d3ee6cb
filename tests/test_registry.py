"""From names to members, and a study checked against the systems of its case."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import pytest

from bandbook import lattices, registry
from bandbook.analyses import ANALYSES, Analysis, Asked
from bandbook.errors import AuthorError, PhysicsError, Problem
from bandbook.exhibits import Quantity, QuantityName
from bandbook.lattices import LATTICES
from bandbook.model import Model
from bandbook.parameters import Field

CHAIN, _ = registry.check_system({"lattice": "chain", "beta": -2.5})
RING, _ = registry.check_system({"lattice": "ring", "beta": -2.5, "sites": 6})
BUILT, _ = registry.check_system({"built_by": "wall"})


def keys(problems: list[Problem]) -> list[tuple[str | int, ...]]:
    return [problem.key for problem in problems]


@dataclass
class Seen:
    """What the question under test was given."""

    models: list[Model | None]
    asked: list[Asked]


@pytest.fixture
def seen(monkeypatch: pytest.MonkeyPatch) -> Seen:
    """Return what is seen by a question ``width`` that joins the real ones."""
    seen = Seen([], [])

    def inspect(study: Mapping[str, Any], model: Model | None) -> list[Problem]:
        seen.models.append(model)
        is_wrong = study["cells"] == 13
        return [Problem("found 13", "other numbers", "take another", ("cells",))] if is_wrong else []

    def compute(asked: Asked) -> float:
        seen.asked.append(asked)
        if asked.model.n_sites > 100:
            raise PhysicsError("too many; fewer; take fewer")
        return 10.0

    width = Analysis(
        question="width",
        meaning="the width",
        example='question = "width"',
        fields=(Field("cells", "integer", "number of cells", default=4, least=1),),
        quantities=(QuantityName("width", "difference", "the width"),),
        inspect=inspect,
        compute=compute,
        report=lambda asked, found: (
            Quantity("width", "difference", found, "eV"),
            Quantity(f"{asked.name}.half", "difference", found / 2, "eV"),
        ),
        tabulate=lambda *_: (),
        draw=lambda *_: (),
        warn=lambda *_: ("A warning.",),
    )
    monkeypatch.setattr(registry, "ANALYSES", (*ANALYSES, width))
    monkeypatch.setattr(registry, "QUESTION_NAMES", (*registry.QUESTION_NAMES, "width"))
    return seen


def test_names_are_those_of_the_families() -> None:
    assert len(registry.LATTICE_NAMES) == len(set(registry.LATTICE_NAMES)) == len(LATTICES)
    assert tuple(analysis.question for analysis in ANALYSES) == registry.QUESTION_NAMES
    assert registry.FORM_NAMES == ("named-lattice", "written-out", "built-by")


def test_a_member_is_found_by_its_name() -> None:
    assert registry.find("square", LATTICES, "lattice").build is lattices.square
    with pytest.raises(AuthorError) as caught:
        registry.find("sqare", LATTICES, "lattice")
    assert caught.value.problems[0].remedy == 'did you mean "square"?'
    with pytest.raises(AuthorError, match='unknown question "level"'):
        registry.analysis_of("level")


def test_quantities_are_those_that_a_question_promises() -> None:
    assert any(name.fits("energy_12") for name in registry.quantity_names("levels"))
    assert registry.quantity_names("no such question") == ()


@pytest.mark.parametrize(
    ("given", "key", "words"),
    [
        ({}, (), "an empty system; one of"),
        ({"latice": "chain", "beta": -1.0}, ("latice",), 'did you mean "lattice"?'),
        ({"builtby": "f"}, ("builtby",), 'did you mean "built_by"?'),
        ({"beta": -1.0}, (), 'a system of no known form; one of "lattice" (a named lattice with its fields)'),
        ({"couplings": [], "vectors": []}, (), 'add "sites"'),
        ({"with": {}}, (), 'add "built_by"'),
        ({"lattice": "chain", "sites": [{"name": "A"}]}, ("sites",), 'a system of two forms at once: "lattice" and "sites"'),
        ({"lattice": "chain", "built_by": "f"}, ("built_by",), "keep one of them"),
        ({"lattice": "ring", "sites": 6, "built_by": "f"}, ("built_by",), "two forms at once"),
        ({"sites": [], "built_by": "f", "lattice": "chain"}, ("built_by",), "a system of several forms at once"),
        ({"lattice": "chian", "beta": -1.0}, ("lattice",), 'did you mean "chain"?'),
        ({"lattice": "molecule"}, ("lattice",), 'unknown lattice "molecule"; lattices are "chain"'),
    ],
)  # fmt: skip
def test_a_system_of_no_one_form_is_one_problem(given: dict[str, Any], key: tuple[str | int, ...], words: str) -> None:
    checked, problems = registry.check_system(given)
    assert checked is None
    assert keys(problems) == [key]
    assert words in str(problems[0])


def test_several_mistakes_of_a_system_are_told_together() -> None:
    _, problems = registry.check_system({"lattice": "chain", "beta": True, "bata": 1, "charge": 0.5})
    assert keys(problems) == [("beta",), ("bata",), ("charge",)]


@pytest.mark.parametrize(
    ("given", "expected"),
    [
        ({"lattice": "chian", "bata": -2.0, "alpha": "2,5"}, [("bata",), ("alpha",), ("lattice",)]),
        ({"lattice": "chian", "charge": 3}, [(), ("lattice",)]),
        ({"lattice": "chian", "beta": -2.0, "charge": 3}, [("lattice",), ("charge",)]),
        ({"lattice": "no such", "bata": -2.0, "electrons": "two"}, [("electrons",), ("lattice",)]),
        ({"lattice": 5, "bata": -2.0}, [("lattice",)]),
        ({"lattice": "ring", "bta": -2.0, "site": 2}, [("bta",), ("site",), ("site",)]),
        ({"latice": "chian", "bata": True}, [("latice",), ("bata",), ("bata",), ("latice",)]),
        ({"lattice": "chain", "built_by": "f", "electrons": -1}, [("built_by",), ("electrons",)]),
        ({"site": [{"nme": "A"}], "coupling": [{"from": "A", "to": "B", "beta": -1.0}]}, [("site",), ("site", 0, "nme"), ("coupling",), ("coupling", 0, "to")]),
    ],
)  # fmt: skip
def test_a_misspelt_name_hides_no_other_mistake(given: dict[str, Any], expected: list[tuple[str | int, ...]]) -> None:
    """The other keys are held to the nearest lattice or form; a misspelt key is one problem and read as it is meant."""
    checked, problems = registry.check_system(given)
    assert checked is None
    assert keys(problems) == expected


@pytest.mark.parametrize(
    ("given", "expected"),
    [
        ({"question": "levls", "cels": 4, "ends": "opn"}, [("question",), ("cels",), ("ends",)]),
        ({"questoin": "levels", "cells": "x"}, [("questoin",), ("cells",)]),
        ({"questoin": "levls", "cells": "x"}, [("questoin",), ("questoin",), ("cells",)]),
        ({"question": "length_serie", "cels": "1-40", "fits": ["invers"]}, [("question",), ("cels",), ("cels",), ("fits", 0)]),
        ({"question": "no such", "cells": "x", "name": "1"}, [("question",), ("name",)]),
        ({"question": 5, "cells": "x", "name": "1"}, [("question",), ("name",)]),
        ({"question": "levels", "cels": 4, "ad": ["B"]}, [("cels",), ("ad",), ("ad", 0)]),
        ({"question": "levls", "cells": 4, "drop": ["B"]}, [("question",), ("drop", 0)]),
    ],
)  # fmt: skip
def test_a_misspelt_question_hides_no_other_mistake(
    given: dict[str, Any], expected: list[tuple[str | int, ...]]
) -> None:
    checked, problems = registry.check_study(given, {"system": CHAIN})
    assert checked is None
    assert keys(problems) == expected


def test_a_study_gets_its_defaults_and_its_system(seen: Seen) -> None:
    checked, problems = registry.check_study({"question": "width"}, {"system": CHAIN})
    assert problems == []
    assert checked == {"question": "width", "system": "system", "cells": 4}
    assert seen.models == [lattices.chain(beta=-2.5)]


@pytest.mark.parametrize(
    ("given", "systems", "expected"),
    [
        ({}, {"system": CHAIN}, [((), 'the key "question" is missing')]),
        ({"question": 5}, {"system": CHAIN}, [(("question",), "found 5; questions are")]),
        ({"question": "widht"}, {"system": CHAIN}, [(("question",), 'did you mean "width"?')]),
        ({"question": "width"}, {"a": CHAIN, "b": RING}, [((), 'the case has 2 systems and the study names none; systems are "a", "b"')]),
        ({"question": "width", "system": "aa"}, {"a": CHAIN, "b": RING}, [(("system",), 'unknown system "aa"')]),
        ({"question": "width", "system": "one"}, {"system": CHAIN}, [(("system",), 'systems are "system"')]),
        ({"question": "width", "system": 5}, {"system": CHAIN}, [(("system",), "found 5")]),
        ({"question": "widht", "system": "aa"}, {"a": CHAIN}, [(("question",), "unknown"), (("system",), "unknown")]),
        ({"system": "aa"}, {"a": CHAIN}, [((), "is missing"), (("system",), "unknown")]),
        ({"question": "width", "cells": 0, "cell": 1, "system": "aa"}, {"a": CHAIN}, [(("cells",), "1 or more"), (("cell",), "cells"), (("system",), "unknown")]),
        ({"question": "width", "cells": 13}, {"a": CHAIN}, [(("cells",), "found 13")]),
        ({"question": "width"}, {}, []),
    ],
)  # fmt: skip
def test_mistakes_of_a_study(
    given: dict[str, Any], systems: dict[str, Any], expected: list[tuple[tuple[str, ...], str]], seen: Seen
) -> None:
    checked, problems = registry.check_study(given, systems)
    assert checked is None
    assert keys(problems) == [key for key, _ in expected]
    assert all(words in str(problem) for problem, (_, words) in zip(problems, expected, strict=True))
    can_be_read = given.get("cells") == 13 or (given.get("question") == "widht" and "system" not in given)
    assert len(seen.models) == (1 if can_be_read else 0)


def test_a_study_of_several_systems_names_one(seen: Seen) -> None:
    checked, _ = registry.check_study({"question": "width", "system": "b"}, {"a": CHAIN, "b": RING})
    assert checked is not None
    assert checked["system"] == "b"
    assert seen.models[0] is not None
    assert seen.models[0].n_sites == 6


def test_a_model_that_a_check_cannot_know_is_none(seen: Seen) -> None:
    """Built by workings; wrong in itself; or so large that building it would take longer than it is worth."""
    large, problems = registry.check_system({"lattice": "ring", "beta": -1.0, "sites": 90_000})
    assert problems == []
    for system in (BUILT, None, large):
        checked, problems = registry.check_study({"question": "width"}, {"system": system})
        assert problems == []
        assert checked is not None
    assert seen.models == [None, None, None]


def test_an_answer_carries_the_name_of_its_study(seen: Seen) -> None:
    checked, _ = registry.check_study({"question": "width"}, {"system": CHAIN})
    assert checked is not None
    assert CHAIN is not None
    model = registry.build_system(CHAIN, {})
    answer = registry.answer("mine", checked, model)
    assert [quantity.name for quantity in answer.quantities] == ["mine.width", "mine.half"]
    assert (answer.value("width"), answer.warnings, answer.result) == (10.0, ("A warning.",), 10.0)
    assert seen.asked == [Asked("mine", checked, model)]


def test_what_numbers_cannot_do_is_raised(seen: Seen) -> None:
    checked, _ = registry.check_study({"question": "width"}, {"system": CHAIN})
    assert checked is not None
    with pytest.raises(PhysicsError, match="too many"):
        registry.answer("mine", checked, lattices.ring(beta=-1.0, sites=101))
    assert len(seen.asked) == 1


def test_a_form_that_no_one_knows_is_refused() -> None:
    with pytest.raises(AuthorError, match='unknown form "molecule"'):
        registry.build_system({"form": "molecule"}, {})
