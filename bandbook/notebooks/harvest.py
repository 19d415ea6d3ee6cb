"""From an executed notebook to quantities, exhibits, warnings and files."""

import copy
import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

from bandbook.exhibits import MIME

#: Longest stream output that is kept of one cell, in characters.
MOST_STREAM = 20_000


@dataclass
class Harvest:
    """What an executed notebook gave.

    Attributes:
        quantities: As a result has them.
        exhibits: Figures, tables and texts in the order of the notebook.
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
    """Collect what an executed notebook gave."""
    clean = cleaned(notebook)
    found = Harvest(run=dict(run or {}))
    counts = {"figure": 0, "text": 0}
    for step, output in _outputs(clean):
        data = output.get("data", {})
        if MIME in data:
            _take_answer(found, _as_dict(data[MIME]), step)
        elif "image/svg+xml" in data:
            _take_figure(found, output, counts, step)
        elif output["output_type"] in {"stream", "execute_result", "display_data"}:
            _take_text(found, output, counts, step)
    found.files["notebook.ipynb"] = (json.dumps(clean, indent=1, sort_keys=True, ensure_ascii=False) + "\n").encode()
    return found


def _outputs(notebook: Any) -> Iterator[tuple[str, Any]]:
    for cell in notebook["cells"]:
        for output in cell.get("outputs", []):
            yield cell["id"], output


def _as_dict(data: Any) -> dict[str, Any]:
    return dict(json.loads(data)) if isinstance(data, str) else dict(data)


def _take_answer(found: Harvest, answer: dict[str, Any], step: str) -> None:
    study = answer["study"]
    found.quantities += answer["quantities"]
    found.warnings += [{"study": study, "text": text} for text in answer["warnings"]]
    for table in answer["tables"]:
        path = f"tables/{_name(study, table['name'])}.csv"
        found.files[path] = table["csv"].encode()
        words = {"alt": "", "caption": table["caption"], "html": table["html"]}
        found.exhibits.append(
            {"study": study, "kind": "table", "name": table["name"], "file": path, "step": step, **words}
        )
    for figure in answer["figures"]:
        path = f"figures/{_name(study, figure['name'])}.svg"
        if "svg" in figure:
            found.files[path] = figure["svg"].encode()
        words = {"alt": figure["alt"], "caption": figure["caption"]}
        found.exhibits.append(
            {"study": study, "kind": "figure", "name": figure["name"], "file": path, "step": step, **words}
        )


def _name(study: str, name: str) -> str:
    return study if name == study else f"{study}-{name}"


def _take_figure(found: Harvest, output: Any, counts: dict[str, int], step: str) -> None:
    """Take the picture of a figure that an answer announced, or one that workings drew."""
    mark = output.get("metadata", {}).get("bandbook")
    svg = _text(output["data"]["image/svg+xml"]).encode()
    if mark:
        found.files[f"figures/{_name(mark['study'], mark['figure'])}.svg"] = svg
        return
    counts["figure"] += 1
    path = f"figures/workings-{counts['figure']}.svg"
    found.files[path] = svg
    words = {"alt": f"Figure {counts['figure']} drawn by the case's own Python", "caption": ""}
    name = f"workings-{counts['figure']}"
    found.exhibits.append({"study": "workings", "kind": "figure", "name": name, "file": path, "step": step, **words})


def _take_text(found: Harvest, output: Any, counts: dict[str, int], step: str) -> None:
    text = _text(output["text"]) if output["output_type"] == "stream" else _text(output["data"].get("text/plain", ""))
    if not text.strip():
        return
    counts["text"] += 1
    path = f"tables/workings-{counts['text']}.txt"
    found.files[path] = text.encode()
    words = {"alt": "", "caption": "", "text": text}
    name = f"workings-{counts['text']}"
    found.exhibits.append({"study": "workings", "kind": "text", "name": name, "file": path, "step": step, **words})


def _text(value: Any) -> str:
    return value if isinstance(value, str) else "".join(value)


def cleaned(notebook: Any) -> Any:
    """Return the notebook without what differs from run to run: timings and the exact version of the language."""
    clean = copy.deepcopy(notebook)
    clean["metadata"]["language_info"] = {"name": "python"}
    for cell in clean["cells"]:
        cell.get("metadata", {}).pop("execution", None)
        if cell["cell_type"] == "code":
            cell["outputs"] = [_shortened(output) for output in _merged(cell["outputs"])]
    return clean


def _merged(outputs: list[Any]) -> list[Any]:
    """Join neighbouring stream outputs, which arrive in pieces of no fixed size."""
    merged: list[Any] = []
    for output in outputs:
        last = merged[-1] if merged else None
        if last and output["output_type"] == last["output_type"] == "stream" and output["name"] == last["name"]:
            last["text"] = _text(last["text"]) + _text(output["text"])
        else:
            merged.append(output)
    return merged


def _shortened(output: Any) -> Any:
    if output["output_type"] == "stream":
        text = _text(output["text"])
        if len(text) > MOST_STREAM:
            output["text"] = f"{text[:MOST_STREAM]}\n… {len(text) - MOST_STREAM} more characters were left out\n"
    return output
