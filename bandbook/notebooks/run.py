"""Execute a notebook in a kernel of its own and tell apart how it can end."""

import contextlib
import json
import platform
import re
import time
from collections.abc import Callable, Mapping
from typing import Any

from bandbook.errors import AuthorError, BandbookError, PhysicsError, Problem, RunError, WorkingsError
from bandbook.notebooks.compose import compose
from bandbook.notebooks.harvest import Harvest, harvest
from bandbook.notebooks.kernels import fresh_kernel

_ANSI = re.compile(r"\x1b\[[0-9;]*m")
_PLACE = re.compile(r"(?:/[^\s'\"]+)+/(?=[\w.-]+\.py\b)|/tmp/[^\s:'\"]+/")


def local_runner(*, timeout: float) -> Callable[[Mapping[str, Any], str], Harvest]:
    """Return the runner that executes a case on this machine.

    Args:
        timeout: Longest time of one cell, s.
    """

    def run_one(parameters: Mapping[str, Any], key: str) -> Harvest:
        began = time.time()
        notebook = run_notebook(compose(parameters, key), timeout=timeout)
        run = {"began": began, "seconds": time.time() - began, "host": platform.node()}
        return harvest(notebook, run=run)

    return run_one


def run_notebook(notebook: Any, *, timeout: float) -> Any:
    """Execute a notebook in a fresh kernel and return it.

    Raises:
        WorkingsError: An author's code cell failed.
        PhysicsError: A question makes no sense for its model.
        AuthorError: A function of the workings built no model, or a study names what the model lacks.
        RunError: The run timed out, or the kernel died. Every error carries the number of its step.
    """
    try:
        with fresh_kernel() as (manager, place):
            return _execute(notebook, manager, timeout=timeout, place=place)
    except BandbookError as error:
        error.step = _failing_step(notebook)
        raise


def _execute(notebook: Any, manager: Any, *, timeout: float, place: Mapping[str, Any]) -> Any:
    from nbclient import NotebookClient
    from nbclient.exceptions import CellExecutionError, CellTimeoutError, DeadKernelError

    client = NotebookClient(
        notebook,
        km=manager,
        timeout=int(timeout),
        startup_timeout=120,
        record_timing=False,
        raise_on_iopub_timeout=True,
        iopub_timeout=30,
        shutdown_kernel="immediate",
    )
    try:
        client.execute(cwd=place["cwd"], env=dict(place["env"]))
    except CellExecutionError as error:
        raise _failed(notebook, error) from error
    except CellTimeoutError as error:
        found = f"a cell ran longer than {timeout:g} s"
        raise RunError(
            f"{found}; the limit is the book's `timeout`; make it faster or raise it", reason="timed out"
        ) from error
    except DeadKernelError as error:
        raise _died() from error
    except RuntimeError as error:
        raise _died(str(error)) from error
    finally:
        with contextlib.suppress(Exception):
            client.kc.stop_channels()
    return notebook


def _died(detail: str = "") -> RunError:
    found = "the kernel died before the notebook ended" + (f" ({detail})" if detail else "")
    return RunError(f"{found}; a case must not end its own process; look at its workings and its memory")


def _failed(notebook: Any, error: Any) -> BandbookError:
    """Return the book's error for a failing cell, by the class that was raised in it and the cell's kind."""
    cell = next((cell for cell in notebook.cells if _error_of(cell)), None)
    output = _error_of(cell) if cell is not None else None
    text = _ANSI.sub("", "\n".join(output["traceback"])) if output else str(error)
    traceback = _PLACE.sub("", text)
    source = cell.source if cell is not None else ""
    is_study = source.startswith("answer(") or "from bandbook.cells import begin" in source
    if is_study and error.ename == "PhysicsError":
        return PhysicsError(error.evalue)
    if is_study and error.ename == "AuthorError":
        return AuthorError([Problem(*(*error.evalue.split("; ", 2), "see the manual", "correct it")[:3])])
    number = _number(notebook, cell)
    message = f"{error.ename}: {error.evalue}"
    return WorkingsError(message, cell=number, source=source, traceback=traceback)


def _error_of(cell: Any) -> Any:
    if cell.cell_type != "code":
        return None
    return next((output for output in cell.outputs if output.output_type == "error"), None)


def _failing_step(notebook: Any) -> int:
    """Return the number of the step that failed or was running last, from 1; 0 before the first."""
    steps = [cell for cell in notebook.cells if cell.id.startswith("step-")]
    failing = next((number for number, cell in enumerate(steps, start=1) if _error_of(cell)), 0)
    started = sum(bool(cell.execution_count or cell.outputs) for cell in steps)
    return failing or min(started + 1, len(steps))


def _number(notebook: Any, failing: Any) -> int:
    """Return the number of the failing step among the steps, from 1."""
    steps = [cell for cell in notebook.cells if cell.id.startswith("step-")]
    return next((number for number, cell in enumerate(steps, start=1) if cell is failing), 0)


def notebook_bytes(notebook: Any) -> bytes:
    """Return a notebook as it is stored: sorted, readable, the same bytes for the same notebook."""
    return (json.dumps(notebook, indent=1, sort_keys=True, ensure_ascii=False) + "\n").encode()
