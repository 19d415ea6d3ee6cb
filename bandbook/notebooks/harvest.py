"""From an executed notebook to quantities, exhibits, warnings and files."""

import html
import json
import math
import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Final

from bandbook.errors import AuthorError, Problem, RunError
from bandbook.exhibits import KINDS, MIME
from bandbook.notebooks.outputs import notebook_bytes, text_of, tidied

SVG: Final = "image/svg+xml"
#: Most words of a drawing that its alternative text repeats.
_MOST_WORDS: Final = 8
_NAME = re.compile(r"[A-Za-z0-9][A-Za-z0-9_.-]*")
_WORDS = re.compile(r"<!--\s*(.*?)\s*-->|<text[^>]*>([^<]+)</text>", re.DOTALL)


@dataclass
class Harvest:
    """What an executed notebook gave.

    Attributes:
        quantities: As a result has them.
        exhibits: Figures, tables and texts in the order of the notebook, each with the ``step`` that gave it.
        warnings: ``{"study", "text"}`` each.
        files: Relative path → bytes: notebook, figures, tables.
        run: Times and host; kept beside the result, never published.
    """

    quantities: list[dict[str, Any]] = field(default_factory=list)
    exhibits: list[dict[str, Any]] = field(default_factory=list)
    warnings: list[dict[str, str]] = field(default_factory=list)
    files: dict[str, bytes] = field(default_factory=dict)
    run: Mapping[str, Any] = field(default_factory=dict)


def harvest(notebook: Any, *, run: Mapping[str, Any] | None = None) -> Harvest:
    """Collect what an executed notebook gave; two runs of the same notebook give the same harvest.

    Args:
        notebook: Executed to its end.
        run: Times and host, kept beside the result.

    Raises:
        AuthorError: Workings report a name twice, or display what only a study may. It carries the step.
        RunError: A picture that a study announced is missing.
    """
    clean = tidied(notebook)
    basket = _Basket(Harvest(run=dict(run or {})))
    for cell in clean["cells"]:
        try:
            for output in cell.get("outputs", []):
                basket.take(cell["id"], output)
        except AuthorError as error:
            name, _, number = cell["id"].partition("-")
            error.step, error.notebook = int(number) if name == "step" else 0, notebook_bytes(clean)
            raise
    found = basket.found
    lost = [exhibit["file"] for exhibit in found.exhibits if exhibit["file"] not in found.files]
    if lost:
        raise RunError(f"{lost[0]} did not arrive; a run is kept only when all of it is; run again")
    found.files["notebook.ipynb"] = notebook_bytes(clean)
    return found


class _Basket:
    """What was collected so far."""

    def __init__(self, found: Harvest) -> None:
        self.found = found
        self._answers: dict[str, Any] = {}
        self._numbers = {"figure": 0, "text": 0}

    def take(self, step: str, output: Any) -> None:
        """Take one output of a cell."""
        data = output.get("data", {})
        if MIME in data:
            self._take_answer(data[MIME], step)
        elif SVG in data:
            self._take_figure(output, step)
        elif output["output_type"] == "stream":
            self._take_text(text_of(output["text"]), step)
        elif output["output_type"] in {"execute_result", "display_data"}:
            self._take_text(text_of(data.get("text/plain", "")), step)

    def _take_answer(self, data: Any, step: str) -> None:
        try:
            answer = json.loads(data) if isinstance(data, str) else data
            study, quantities = str(answer["study"]), [_checked(row) for row in answer["quantities"]]
            if self._answers.get(study) == answer and study != "workings":
                return  # asked once more by workings
            self._refuse_twice(study, quantities)
            self._answers[study] = answer
            self.found.quantities += quantities
            self.found.warnings += [{"study": study, "text": str(text)} for text in answer["warnings"]]
            for table in answer["tables"]:
                self._take_table(study, table, step)
            for figure in answer["figures"]:
                path = _path(study, figure["name"], "figures", "svg")
                self._add(study, "figure", figure, step=step, file=path)
        except (KeyError, TypeError, ValueError) as error:
            found = f"an output under the book's own type {MIME} that no study gave"
            raise AuthorError([Problem(found, "workings report numbers with report(…)", "take it out")]) from error

    def _refuse_twice(self, study: str, quantities: list[dict[str, Any]]) -> None:
        names = [row["name"] for row in [*self.found.quantities, *quantities]]
        twice = [name for number, name in enumerate(names) if name in names[:number]]
        if twice:
            found = f'the quantity "{twice[0]}" is given twice'
            remedy = "report it once, under one name" if study == "workings" else "ask the study once"
            raise AuthorError([Problem(found, "every quantity of a case has a name of its own", remedy)])

    def _take_table(self, study: str, table: Mapping[str, Any], step: str) -> None:
        path = _path(study, table["name"], "tables", "csv")
        self.found.files[path] = table["csv"].encode()
        self._add(study, "table", {"alt": "", **table}, step=step, file=path)
        self.found.exhibits[-1]["html"] = str(table["html"])

    def _take_figure(self, output: Any, step: str) -> None:
        """Take the picture of a figure that an answer announced, or one that workings drew."""
        mark, svg = output.get("metadata", {}).get("bandbook"), text_of(output["data"][SVG])
        if isinstance(mark, Mapping) and mark.get("study") in self._answers:
            self.found.files[_path(mark["study"], mark["figure"], "figures", "svg")] = svg.encode()
            return
        path, number = self._next("figure", "figures", "svg")
        self.found.files[path] = svg.encode()
        words = {"name": f"workings-{number}", "alt": drawing_alt(svg), "caption": ""}
        self._add("workings", "figure", words, step=step, file=path)

    def _take_text(self, text: str, step: str) -> None:
        if not text.strip():
            return
        path, number = self._next("text", "tables", "txt")
        self.found.files[path] = text.encode()
        self._add("workings", "text", {"name": f"workings-{number}", "alt": "", "caption": ""}, step=step, file=path)
        self.found.exhibits[-1]["text"] = text

    def _next(self, kind: str, folder: str, ending: str) -> tuple[str, int]:
        self._numbers[kind] += 1
        return f"{folder}/workings-{self._numbers[kind]}.{ending}", self._numbers[kind]

    def _add(self, study: str, kind: str, words: Mapping[str, Any], *, step: str, file: str) -> None:
        exhibit = {"study": study, "kind": kind, "name": str(words["name"]), "file": file}
        self.found.exhibits.append(
            {**exhibit, "alt": str(words["alt"]), "caption": str(words["caption"]), "step": step}
        )


def _checked(row: Mapping[str, Any]) -> dict[str, Any]:
    """Return a quantity as it came.

    Raises:
        KeyError: Something is missing.
        ValueError: A number is not finite, or of no known kind.
    """
    if row["kind"] not in KINDS:
        raise ValueError(row["kind"])
    for name in ("value", "in_beta", "uncertainty"):
        if row[name] is not None and not math.isfinite(row[name]):
            raise ValueError(name)
    return {name: row[name] for name in ("name", "kind", "value", "unit", "in_beta", "uncertainty", "meaning")}


def _path(study: str, name: str, folder: str, ending: str) -> str:
    """Return the path of an exhibit.

    Raises:
        ValueError: The names make no path.
    """
    if not _NAME.fullmatch(study) or not _NAME.fullmatch(name):
        raise ValueError(name)
    return f"{folder}/{study if name == study else f'{study}-{name}'}.{ending}"


def drawing_alt(svg: str) -> str:
    """Return the alternative text of a figure that an author's code drew: the words that stand in it.

    >>> drawing_alt("<svg><!-- 0.5 --><!-- energy (eV) --><text x='1'>gap &amp; k</text></svg>")
    'A figure drawn by the workings of this case, with the words: energy (eV), gap & k'
    """
    found = [html.unescape(" ".join((one or other).split())) for one, other in _WORDS.findall(svg)]
    words = [word for word in dict.fromkeys(found) if re.search(r"[^\W\d_]", re.sub(r"\\\w+", "", word))]
    about = "A figure drawn by the workings of this case"
    return f"{about}, with the words: {', '.join(words[:_MOST_WORDS])}" if words else f"{about}; no words stand in it"
