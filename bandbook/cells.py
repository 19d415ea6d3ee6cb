"""The few names that a notebook cell imports.

``begin`` takes the checked parameters and puts in scope what an author's code may use; ``answer`` asks a study;
``report`` adds a number. A kernel opens no file of the book: all it needs stands in the first cell.
"""

import html
import math
from collections.abc import Callable, Iterator, Mapping
from typing import Any

import numpy as np

from bandbook import registry
from bandbook.errors import AuthorError, PhysicsError, Problem, WorkingsError
from bandbook.exhibits import MIME, Answer, Figure, Quantity, answer_bundle, typeset
from bandbook.exhibits.paper import in_use, pack_displays, use
from bandbook.model import Model
from bandbook.parameters import NAME

Scope = tuple[
    Mapping[str, Model],
    dict[str, Answer],
    Mapping[str, str],
    np.random.Generator,
    Callable[..., None],
    Callable[..., None],
]


class Systems(Mapping[str, Model]):
    """The models of a case by name, built when first asked for."""

    def __init__(self, checked: Mapping[str, Any], namespace: Mapping[str, Any]) -> None:
        self._checked, self._namespace = checked, namespace
        self._built: dict[str, Model] = {}

    def __getitem__(self, name: str) -> Model:
        if name not in self._built:
            try:
                self._built[name] = registry.build_system(self._checked[name], self._namespace)
            except AuthorError as error:  # told at the system's block, whichever study asks first
                raise AuthorError([problem.at(f"system {name}", 0) for problem in error.problems]) from error
            except (PhysicsError, WorkingsError) as error:
                raise type(error)(f"system {name}:0: {error}") from error
        return self._built[name]

    def __iter__(self) -> Iterator[str]:
        return iter(self._checked)

    def __len__(self) -> int:
        return len(self._checked)


class Results(dict[str, Answer]):
    """What the studies above gave, by name."""

    def __missing__(self, name: str) -> Answer:
        known = ", ".join(self) or "none so far"
        raise KeyError(f"no study {name!r} above this block; answered are: {known}")


class Files(dict[str, str]):
    """The text of each file that front matter ``uses`` names, by path."""

    def __missing__(self, path: str) -> str:
        known = ", ".join(self) or "none"
        raise KeyError(f"{path!r} is not embedded; add it to uses in the front matter; embedded are: {known}")


def begin(
    parameters: Mapping[str, Any],
    *,
    seed: int,
    namespace: Mapping[str, Any],
    paper: Mapping[str, Any] | None = None,
) -> Scope:
    """Return what a notebook works with: systems, results, files, rng, report, answer.

    Args:
        parameters: The checked parameters of a case.
        seed: Seeds ``rng``; taken from the key.
        namespace: The notebook's globals, where an author's functions stand.
        paper: What figures are drawn for, in place of a page.
    """
    use(paper)
    _prepare_figures()
    systems = Systems(parameters["systems"], namespace)
    results = Results()
    sketched: set[str] = set()

    def answer(study: str) -> None:
        """Ask a study and display what it gives."""
        checked = parameters["studies"][study]
        if checked["system"] not in sketched:
            sketched.add(checked["system"])
            _display(registry.sketch(checked["system"], systems[checked["system"]]))
        results[study] = registry.answer(study, checked, systems[checked["system"]])
        _display(results[study])

    return systems, results, Files(parameters["files"]), np.random.default_rng(seed), report, answer


def report(name: str, value: float | None, unit: str = "", meaning: str = "") -> None:
    """Add the quantity ``workings.<name>``.

    Args:
        name: Letters, digits and ``_``, a letter first.
        value: A finite number, or ``None`` where there is no answer.
        unit: Its unit.
        meaning: One line.

    Raises:
        AuthorError: The name or the value is not allowed.
    """
    if not NAME.match(name):
        raise AuthorError(
            [Problem(f"report was given the name {name!r}", "letters, digits and _, a letter first", "rename it")]
        )
    number = None if value is None else float(value)
    if number is not None and not math.isfinite(number):
        raise AuthorError([Problem(f"report was given {number} for {name}", "a finite number, or None", "correct it")])
    _display(Answer("workings", (Quantity(f"workings.{name}", "number", number, unit, meaning),)))


def _prepare_figures() -> None:
    """Make figures that an author's code draws come out as SVG, with the same bytes each time."""
    shell = _shell()
    if shell is None:
        return
    from matplotlib_inline.backend_inline import set_matplotlib_formats

    set_matplotlib_formats("svg", metadata={"Date": None})
    import matplotlib as mpl

    mpl.rcParams["svg.hashsalt"] = "bandbook"
    paper = in_use()
    if paper:
        pack_displays(shell.display_formatter.formatters, paper)


def _shell() -> Any:
    """Return the notebook's shell, or nothing under plain Python."""
    try:
        from IPython.core.getipython import get_ipython
    except ImportError:
        return None
    return get_ipython()


def _display(answer: Answer) -> None:
    """Display an answer: one output that the host collects and a person can read, then its figures."""
    if _shell() is None:
        print(_as_text(answer))  # noqa: T201 - under plain Python this is the display
        return
    from IPython.display import display

    bundle = answer_bundle(answer)
    for figure in bundle["figures"]:
        del figure["svg"]
    display({MIME: bundle, "text/plain": _as_text(answer), "text/html": _as_html(answer)}, raw=True)
    for figure in answer.figures:
        _show(figure, answer.study)


def _show(figure: Figure, study: str) -> None:
    from IPython.display import display

    data = {"image/svg+xml": figure.svg, "text/plain": figure.caption}
    display(data, raw=True, metadata={"bandbook": {"study": study, "figure": figure.name}})


def _as_text(answer: Answer) -> str:
    lines = [f"{q.name} = {typeset(q.value, 6)} {q.unit}".rstrip() for q in answer.quantities[:20]]
    lines += [f"… {len(answer.quantities) - 20} more"] if len(answer.quantities) > 20 else []
    return "\n".join([*lines, *answer.warnings])


def _as_html(answer: Answer) -> str:
    return f"<pre>{html.escape(_as_text(answer))}</pre>" + "".join(table.to_html() for table in answer.tables)
