"""Every way in which an execution can end badly is told apart."""

from typing import Any

import nbformat
import nbformat.v4
import pytest
from nbclient.exceptions import CellExecutionError, CellTimeoutError, DeadKernelError

from bandbook.errors import AuthorError, BandbookError, PhysicsError, RunError, WorkingsError
from bandbook.notebooks.endings import Ended, error_of

SOURCES = ("from bandbook.cells import begin", "x = 1", "answer('levels')", "y = 1\nf()")


def ended(index: int, *, name: str = "", value: str = "", exit_code: int | None = None) -> Ended:
    names = ("parameters", "step-1", "step-2", "step-3")
    cells = [nbformat.v4.new_code_cell(one, id=name) for one, name in zip(SOURCES, names, strict=True)]
    cells[index].execution_count = index + 1
    if name:
        trace = [f"Cell In[{index + 1}], line 2\n", "Cell In[1], line 9", f"{name}: {value}"]
        error = {"output_type": "error", "ename": name, "evalue": value, "traceback": trace}
        cells[index].outputs = [nbformat.from_dict(error)]
    return Ended(nbformat.v4.new_notebook(cells=cells), index, 60.0, exit_code)


def failing(index: int, name: str, value: str) -> BandbookError:
    return error_of(CellExecutionError("t", name, value), ended(index, name=name, value=value))


def test_a_workings_block_that_raises() -> None:
    error = failing(3, "ValueError", "no; way")
    assert isinstance(error, WorkingsError)
    assert error.offset == 2
    assert str(error) == ("ValueError: no; way; workings must run to their end; mend them, then run again")
    assert (error.cell, error.step, error.source) == (2, 3, SOURCES[3])
    assert "Cell In[4], line 2" in error.traceback
    assert b'"ename": "ValueError"' in error.notebook


@pytest.mark.parametrize(
    ("name", "kind", "status"),
    [
        ("PhysicsError", PhysicsError, 3),
        ("AuthorError", AuthorError, 2),
        ("LinAlgError", PhysicsError, 3),
        ("MemoryError", PhysicsError, 3),
        ("KeyError", WorkingsError, 1),
    ],
)
def test_a_study_that_raises(name: str, kind: type[BandbookError], status: int) -> None:
    error = failing(2, name, "one; two; three")
    assert type(error) is kind
    assert (error.exit_status, error.step) == (status, 2)
    assert "one; two; three" in str(error)


def test_every_problem_that_a_study_names() -> None:
    error = failing(2, "AuthorError", "sites[2]: a; b; c; d\ne")
    assert isinstance(error, AuthorError)
    assert [str(problem) for problem in error.problems] == ["sites[2]: a; b; c; d", "e; see the manual; correct it"]
    assert isinstance(failing(2, "AuthorError", ""), AuthorError)


@pytest.mark.parametrize("name", ["PhysicsError", "AuthorError", "LinAlgError"])
def test_the_same_classes_in_workings_are_the_workings_own(name: str) -> None:
    assert isinstance(failing(1, name, "x"), WorkingsError)


def test_a_first_cell_that_raises() -> None:
    error = failing(0, "ImportError", "x")
    assert isinstance(error, RunError)
    assert "the kernel could not begin (ImportError: x); it needs bandbook; " in str(error)


@pytest.mark.parametrize(
    ("raised", "code", "reason", "words"),
    [
        (CellTimeoutError("Cell execution timed out"), None, "timed out", "a cell ran longer than 60 s; the limit is"),
        (CellTimeoutError("Timeout waiting for IOPub output"), None, "timed out", "its outputs did not arrive; "),
        (DeadKernelError("Kernel died"), 0, "kernel died", "the kernel died before the notebook ended; "),
        (DeadKernelError("Kernel died"), 3, "kernel died", "ended (exit status 3); "),
        (DeadKernelError("Kernel died"), -9, "killed", "the kernel was killed (SIGKILL); "),
        (DeadKernelError("Kernel died"), -11, "killed", "(SIGSEGV)"),
        (DeadKernelError("Kernel died"), -63, "killed", "(signal 63)"),
        (DeadKernelError("asked"), None, "kernel died", "the kernel died before the notebook ended; "),
        (RuntimeError("Kernel died before replying"), 1, "kernel died", "ended (exit status 1); "),
        (OSError("no socket"), None, "kernel died", "the kernel could not be used (OSError: no socket); "),
        (
            CellExecutionError("t", "SystemExit", "3"),
            None,
            "kernel died",
            "the kernel died before the notebook ended; ",
        ),
    ],
)
def test_a_run_that_does_not_end(raised: Any, code: int | None, reason: str, words: str) -> None:
    error = error_of(raised, ended(1, exit_code=code))
    assert isinstance(error, RunError)
    assert (error.reason, error.exit_status, error.step) == (reason, 4, 1)
    assert words in str(error)
    assert str(error).count("; ") == 2, "what was found; what is allowed; what to do"


@pytest.mark.parametrize(
    ("name", "value", "told"),
    [
        ("AuthorError", "system two:0: with: found 3; two; add one", "with: found 3; two; add one"),
        ("PhysicsError", "system two:0: no sites; one is needed; add one", "no sites; one is needed; add one"),
        ("WorkingsError", 'system two:0: "wall" raised; a Model; mend it', '"wall" raised; a Model; mend it'),
    ],
)
def test_a_system_that_cannot_be_built_is_told_at_its_own_block(name: str, value: str, told: str) -> None:
    error = failing(2, name, value)
    assert (type(error).__name__, str(error), error.system) == (name, told, "two")
