"""What a notebook cell imports: in plain Python, and under a notebook's shell."""

from typing import Any

import numpy as np
import pytest

from bandbook import cells
from bandbook.errors import AuthorError
from bandbook.exhibits import MIME
from bandbook.model import Coupling, Model, Site
from bandbook.registry import check_study, check_system


def parameters(**more: Any) -> dict[str, Any]:
    system, problems = check_system({"lattice": "chain", "beta": -2.5})
    assert problems == []
    studies = {}
    for name, given in {"levels": {"question": "levels", "cells": 4}, "bands": {"question": "bands"}, **more}.items():
        studies[name], problems = check_study(given, {"system": system})
        assert problems == []
    return {"format": 1, "systems": {"system": system}, "studies": studies, "workings": [], "steps": [], "files": {"data/x.csv": "1,2\n"}}  # fmt: skip


@pytest.fixture
def shown(monkeypatch: pytest.MonkeyPatch) -> list[tuple[dict[str, Any], dict[str, Any]]]:
    """Return what a notebook's shell would be handed: data and metadata of each display."""
    import IPython.display

    displays: list[tuple[dict[str, Any], dict[str, Any]]] = []

    def display(data: dict[str, Any], *, raw: bool, metadata: dict[str, Any] | None = None) -> None:
        assert raw
        displays.append((data, metadata or {}))

    monkeypatch.setattr(cells, "_shell", object)
    monkeypatch.setattr(cells, "_prepare_figures", lambda: None)
    monkeypatch.setattr(IPython.display, "display", display)
    return displays


def test_plain_python_prints(capsys: pytest.CaptureFixture[str]) -> None:
    systems, results, files, _, _, answer = cells.begin(parameters(), seed=1, namespace={})
    answer("levels")
    printed = capsys.readouterr().out
    assert "levels.homo = −1.545085 eV" in printed
    assert results["levels"].value("gap") == pytest.approx(3.090169944, abs=1e-9)
    assert list(systems) == ["system"]
    assert files == {"data/x.csv": "1,2\n"}


def test_a_system_is_built_when_it_is_asked_for() -> None:
    calls = []

    def wall(half: int) -> Model:
        calls.append(half)
        bonds = tuple(Coupling(site, site + 1, -1.0) for site in range(2 * half))
        return Model(tuple(Site(f"C{number + 1}") for number in range(2 * half + 1)), bonds)

    built, problems = check_system({"built_by": "wall", "with": {"half": 2}})
    assert problems == []
    given = {**parameters(), "systems": {"system": built}}
    namespace: dict[str, Any] = {}
    systems, *_ = cells.begin(given, seed=1, namespace=namespace)
    assert calls == []
    namespace["wall"] = wall
    assert systems["system"].n_sites == 5
    assert systems["system"] is systems["system"]
    assert calls == [2]
    assert len(systems) == 1


def test_random_numbers_come_from_the_seed() -> None:
    draws = [cells.begin(parameters(), seed=seed, namespace={})[3].random(4) for seed in (7, 7, 8)]
    assert np.array_equal(draws[0], draws[1])
    assert not np.array_equal(draws[0], draws[2])


def test_an_answer_is_one_display_and_one_for_each_figure(shown: list[tuple[dict[str, Any], dict[str, Any]]]) -> None:
    *_, answer = cells.begin(parameters(), seed=1, namespace={})
    answer("levels")
    (system, _), sketch, (data, _), *figures = shown
    assert (system[MIME]["study"], sketch[1]["bandbook"]) == ("system", {"study": "system", "figure": "system"})
    assert set(data) == {MIME, "text/plain", "text/html"}
    assert data[MIME]["study"] == "levels"
    assert all("svg" not in figure for figure in data[MIME]["figures"]), "the picture stands in its own display"
    assert "<table" in data["text/html"]
    assert [one["bandbook"] for _, one in figures] == [
        {"study": "levels", "figure": name} for name in ("sketch", "diagram", "orbitals", "on-bands")
    ]
    assert all(one["image/svg+xml"].startswith("<svg") and one["text/plain"] for one, _ in figures)


def test_what_is_shown_is_harvested(shown: list[tuple[dict[str, Any], dict[str, Any]]]) -> None:
    """Every figure that a bundle announces has its picture, under the name that the host looks for."""
    nbformat = pytest.importorskip("nbformat.v4")
    from bandbook.notebooks.harvest import harvest

    *_, answer = cells.begin(parameters(wide={"question": "bands", "name": "wide"}), seed=1, namespace={})
    for study in ("levels", "bands", "wide"):
        answer(study)
    outputs = [nbformat.new_output("display_data", data=data, metadata=metadata) for data, metadata in shown]
    found = harvest(nbformat.new_notebook(cells=[nbformat.new_code_cell("", id="one", outputs=outputs)]))
    figures = [exhibit["file"] for exhibit in found.exhibits if exhibit["kind"] == "figure"]
    assert figures == [
        "figures/system.svg",
        *(f"figures/levels-{name}.svg" for name in ("sketch", "diagram", "orbitals", "on-bands")),
        "figures/bands.svg", "figures/wide-bands.svg",
    ], "a system is sketched once"  # fmt: skip
    assert set(figures) <= set(found.files)
    assert all(exhibit["study"] != "workings" for exhibit in found.exhibits)


def test_text_is_escaped(shown: list[tuple[dict[str, Any], dict[str, Any]]]) -> None:
    cells.report("x", 1.0, unit="<b>")
    assert "&lt;b&gt;" in shown[0][0]["text/html"]


def test_a_report_is_a_quantity(shown: list[tuple[dict[str, Any], dict[str, Any]]]) -> None:
    cells.report("ratio", np.float64(0.1234567891234), meaning="a ratio")
    cells.report("missing", None)
    first, second = (data[MIME]["quantities"][0] for data, _ in shown)
    assert (first["name"], first["kind"], first["value"]) == ("workings.ratio", "number", 0.123456789)
    assert first["meaning"] == "a ratio"
    assert second["value"] is None


@pytest.mark.parametrize(
    ("name", "value", "text"),
    [
        ("1st", 1.0, "report was given the name '1st'; letters, digits and _, a letter first; rename it"),
        ("a.b", 1.0, "report was given the name 'a.b'; letters, digits and _, a letter first; rename it"),
        ("x", float("nan"), "report was given nan for x; a finite number, or None; correct it"),
        ("x", float("-inf"), "report was given -inf for x; a finite number, or None; correct it"),
    ],
)
def test_a_bad_report_is_refused(name: str, value: float, text: str) -> None:
    with pytest.raises(AuthorError) as caught:
        cells.report(name, value)
    assert str(caught.value) == text


def test_a_question_without_sense_leaves_no_result() -> None:
    ring = Model((Site("A"), Site("B")), (Coupling(0, 1, -1.0),))
    built, _ = check_system({"built_by": "ring"})
    given = {**parameters(), "systems": {"system": built}}
    _, results, *_, answer = cells.begin(given, seed=1, namespace={"ring": lambda: ring})
    with pytest.raises(AuthorError, match="the system is a molecule; bands need a periodic system"):
        answer("bands")
    assert results == {}
