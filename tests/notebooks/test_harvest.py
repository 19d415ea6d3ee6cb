"""What an executed notebook gave is collected, whole, in its order, or refused."""

import json
import math
from typing import Any

import nbformat
import nbformat.v4
import pytest

from bandbook.errors import AuthorError, RunError
from bandbook.exhibits import MIME, Answer, Column, Figure, Quantity, Table, answer_bundle
from bandbook.notebooks import harvest

ANSWER = Answer(
    "levels",
    (Quantity("levels.homo", "level", -1.5, "eV", "highest filled", 0.6), Quantity("levels.n", "count", None)),
    (Table("levels", "Two levels.", (Column("n", "n", "number"),), ((1,), (2,))),),
    (Figure("diagram", "<svg>1</svg>", "two levels", "Levels."), Figure("levels", "<svg>2</svg>", "a", "b")),
    ("Mind the end.",),
)


def displayed(answer: Answer, *, pictures: bool = True) -> list[dict[str, Any]]:
    """Return the outputs by which a cell displays an answer."""
    bundle = answer_bundle(answer)
    for figure in bundle["figures"]:
        del figure["svg"]
    outputs = [shown({MIME: bundle, "text/plain": "text", "text/html": "<p>"})]
    for figure in answer.figures if pictures else ():
        mark = {"bandbook": {"study": answer.study, "figure": figure.name}}
        outputs.append(shown({"image/svg+xml": figure.svg, "text/plain": figure.caption}, mark))
    return outputs


def shown(data: dict[str, Any], metadata: dict[str, Any] | None = None) -> dict[str, Any]:
    return {"output_type": "display_data", "data": data, "metadata": metadata or {}}


def reported(name: str, value: float) -> dict[str, Any]:
    return displayed(Answer("workings", (Quantity(f"workings.{name}", "number", value),)))[0]


def notebook(*cells: list[dict[str, Any]]) -> Any:
    made = [
        nbformat.v4.new_code_cell("x", id=f"step-{number}", outputs=[nbformat.from_dict(one) for one in outputs])
        for number, outputs in enumerate(cells, start=1)
    ]
    return nbformat.v4.new_notebook(cells=[nbformat.v4.new_markdown_cell("words", id="about"), *made])


def test_a_study() -> None:
    found = harvest(notebook(displayed(ANSWER)), run={"seconds": 1.0})
    assert found.quantities == [quantity.as_dict() for quantity in ANSWER.quantities]
    assert found.warnings == [{"study": "levels", "text": "Mind the end."}]
    assert found.run == {"seconds": 1.0}
    assert [(row["kind"], row["file"], row["alt"], row["caption"], row["step"]) for row in found.exhibits] == [
        ("table", "tables/levels.csv", "", "Two levels.", "step-1"),
        ("figure", "figures/levels-diagram.svg", "two levels", "Levels.", "step-1"),
        ("figure", "figures/levels.svg", "a", "b", "step-1"),
    ]
    assert found.exhibits[0]["html"] == ANSWER.tables[0].to_html()
    assert {name: data for name, data in found.files.items() if name != "notebook.ipynb"} == {
        "tables/levels.csv": b"n\n1\n2\n",
        "figures/levels-diagram.svg": b"<svg>1</svg>",
        "figures/levels.svg": b"<svg>2</svg>",
    }
    nbformat.validate(nbformat.reads(found.files["notebook.ipynb"].decode(), as_version=4))


def test_a_bundle_that_is_text_reads_the_same() -> None:
    outputs = displayed(ANSWER)
    outputs[0]["data"][MIME] = json.dumps(outputs[0]["data"][MIME])
    assert harvest(notebook(outputs)).quantities == harvest(notebook(displayed(ANSWER))).quantities


def test_workings() -> None:
    svg = "<svg><!-- 0.5 --><!-- gap (eV) --></svg>"
    table = shown({"text/html": "<table>", "text/plain": "a  b"})
    result = {"output_type": "execute_result", "data": {"text/plain": "42"}, "metadata": {}, "execution_count": 1}
    found = harvest(
        notebook(
            [{"output_type": "stream", "name": "stdout", "text": "printed\n"}, reported("x", 1.5), result],
            displayed(ANSWER),
            [shown({"image/svg+xml": svg, "text/plain": "<Figure>"}), table, shown({"text/plain": "  \n"})],
        )
    )
    assert found.quantities[0] == {**found.quantities[0], "name": "workings.x", "value": 1.5}
    own = [row for row in found.exhibits if row["study"] == "workings"]
    assert [(row["kind"], row["name"], row["file"], row["step"], row.get("text")) for row in own] == [
        ("text", "workings-1", "tables/workings-1.txt", "step-1", "printed\n"),
        ("text", "workings-2", "tables/workings-2.txt", "step-1", "42"),
        ("figure", "workings-1", "figures/workings-1.svg", "step-3", None),
        ("text", "workings-3", "tables/workings-3.txt", "step-3", "a  b"),
    ]
    assert own[2]["alt"] == "A figure drawn by the workings of this case, with the words: gap (eV)"
    assert found.files["figures/workings-1.svg"].decode() == svg
    assert found.files["tables/workings-1.txt"] == b"printed\n"
    assert {row["file"] for row in found.exhibits} | {"notebook.ipynb"} == set(found.files)


def test_timings_change_nothing() -> None:
    one, other = notebook(displayed(ANSWER)), notebook(displayed(ANSWER))
    other.cells[1].metadata["execution"] = {"iopub.status.busy": "2026-01-01"}
    other.metadata["language_info"] = {"name": "python", "version": "3.11.99"}
    assert harvest(one, run={"seconds": 1}).files == harvest(other, run={"seconds": 2}).files


def test_a_picture_that_did_not_arrive() -> None:
    with pytest.raises(RunError, match=r"figures/levels-diagram.svg did not arrive; .*; run again"):
        harvest(notebook(displayed(ANSWER, pictures=False)))


def test_a_study_asked_once_more_by_workings_is_one() -> None:
    assert (
        harvest(notebook(displayed(ANSWER), displayed(ANSWER))).quantities
        == harvest(notebook(displayed(ANSWER))).quantities
    )


def test_a_number_reported_twice() -> None:
    assert len(harvest(notebook([reported("x", 1.0)], [reported("y", 1.0)])).quantities) == 2
    with pytest.raises(AuthorError, match=r'"workings.x" is given twice; .*; report it once') as caught:
        harvest(notebook(displayed(ANSWER), [reported("x", 1.0), reported("x", 1.0)]))
    assert (caught.value.step, caught.value.exit_status) == (2, 2)
    assert json.loads(caught.value.notebook)["nbformat"] == 4


@pytest.mark.parametrize(
    "data",
    [
        {},
        [],
        "no json",
        {"study": "levels"},
        {**answer_bundle(Answer("../x")), "figures": [{"name": "a", "alt": "", "caption": ""}]},
        {**answer_bundle(Answer("x")), "figures": [{"name": "../a", "alt": "", "caption": ""}]},
        {**answer_bundle(Answer("x")), "tables": [{"name": "/a", "csv": "", "html": "", "caption": ""}]},
        {**answer_bundle(Answer("x")), "quantities": [{**Quantity("x.a", "number", 1.0).as_dict(), "value": math.nan}]},
        {**answer_bundle(Answer("x")), "quantities": [{**Quantity("x.a", "number", 1.0).as_dict(), "value": "1"}]},
        {**answer_bundle(Answer("x")), "quantities": [{**Quantity("x.a", "number", 1.0).as_dict(), "kind": "new"}]},
    ],
)
def test_what_no_study_gave(data: Any) -> None:
    with pytest.raises(AuthorError, match="that no study gave; workings report numbers with report"):
        harvest(notebook([shown({MIME: data})]))


def test_a_picture_marked_as_a_study_that_gave_none_is_a_drawing_of_the_workings() -> None:
    mark = {"bandbook": {"study": "other", "figure": "../x"}}
    found = harvest(notebook([shown({"image/svg+xml": "<svg/>"}, mark)]))
    assert [row["file"] for row in found.exhibits] == ["figures/workings-1.svg"]
