"""How an execution can end badly, told apart: the one place where foreign exceptions become the book's own."""

import re
import signal
from dataclasses import dataclass
from typing import Any

from bandbook.errors import AuthorError, BandbookError, PhysicsError, Problem, RunError, WorkingsError
from bandbook.notebooks.outputs import notebook_bytes

#: Exceptions of a study that mean: the numbers failed.
_NUMERICAL = ("LinAlgError", "ArpackError", "ArpackNoConvergence", "FloatingPointError", "OverflowError", "MemoryError")


@dataclass(frozen=True)
class Ended:
    """Where and how an execution ended.

    Attributes:
        notebook: As far as it ran, tidied.
        index: Number of the cell that ran last, from 0.
        timeout: Longest time of one cell, s.
        exit_code: How the kernel ended by itself; negative by a signal; ``None`` when it still ran.
    """

    notebook: Any
    index: int
    timeout: float
    exit_code: int | None = None

    @property
    def cell(self) -> Any:
        """The cell that ran last."""
        return self.notebook.cells[self.index]

    @property
    def step(self) -> int:
        """Number of the step that ran last, from 1; 0 before the first."""
        name, _, number = self.cell.id.partition("-")
        return int(number) if name == "step" else 0

    @property
    def is_study(self) -> bool:
        """Whether that step asks a study."""
        return bool(self.step) and _is_study(self.cell)

    @property
    def workings(self) -> int:
        """Number of the workings block that ran last, from 1; 0 when it was a study."""
        steps = [cell for cell in self.notebook.cells[: self.index + 1] if cell.id.startswith("step-")]
        return 0 if self.is_study else sum(not _is_study(cell) for cell in steps)


def _is_study(cell: Any) -> bool:
    return re.fullmatch(r"answer\('\w+'\)", cell.source) is not None


def error_of(error: Exception, ended: Ended) -> BandbookError:
    """Return what went wrong as the book's own error, with its step and the notebook as far as it ran."""
    from nbclient.exceptions import CellExecutionError, CellTimeoutError

    if isinstance(error, CellExecutionError):
        found = _failed(error, ended)
    elif isinstance(error, CellTimeoutError):
        found = _late(error, ended)
    else:
        found = _died(error, ended)
    found.step, found.notebook = ended.step, notebook_bytes(ended.notebook)
    return found


def _late(error: Exception, ended: Ended) -> RunError:
    if "IOPub" in str(error):
        text = "a cell ended, its outputs did not arrive; a run is kept only when all of it is; display less, run again"
    else:
        found = f"a cell ran longer than {ended.timeout:g} s"
        text = f"{found}; the limit is the book's option timeout; make the cell faster, or raise the limit"
    return RunError(text, reason="timed out")


def _died(error: Exception, ended: Ended) -> RunError:
    code = ended.exit_code
    allowed = "a run needs its kernel to the end"
    if code is not None and code < 0:
        name = signal.Signals(-code).name if -code in set(signal.Signals) else f"signal {-code}"
        remedy = "look at its workings and at the memory they need, then run again"
        return RunError(f"the kernel was killed ({name}); {allowed}; {remedy}", reason="killed")
    if code is not None or type(error).__name__ == "DeadKernelError":
        shown = f" (exit status {code})" if code else ""
        return RunError(f"the kernel died before the notebook ended{shown}; {allowed}; take out what ends the process")
    return RunError(f"the kernel could not be used ({type(error).__name__}: {error}); {allowed}; run again")


def _failed(error: Any, ended: Ended) -> BandbookError:
    """Return the error of a failing cell, by the class that was raised in it and the cell's kind."""
    outputs = [output for output in ended.cell.outputs if output.output_type == "error"]
    name, value = (outputs[-1].ename, outputs[-1].evalue) if outputs else (error.ename, error.evalue)
    traceback = "\n".join(outputs[-1].traceback) if outputs else f"{name}: {value}"
    if name == "SystemExit":
        return _died(error, Ended(ended.notebook, ended.index, ended.timeout, 0))
    if ended.is_study:
        return _refused(name, value, traceback, ended)
    if ended.step == 0:
        return RunError(f"the kernel could not begin ({name}: {value}); it needs bandbook; mend the installation")
    text = f"{_what(name, value)}; workings must run to their end; mend them, then run again"
    lines = [line for output in ended.cell.outputs for line in output.get("traceback", [])]
    own = re.findall(rf"Cell In\[{ended.cell.execution_count}\], line (\d+)", "\n".join(lines))
    failed = WorkingsError(text, cell=ended.workings, source=ended.cell.source, traceback=traceback)
    failed.offset = int(own[-1]) if own else 0
    return failed


def _refused(name: str, value: str, traceback: str, ended: Ended) -> BandbookError:
    """Return the error of a failing study, told at the block of its system where the model could not be built."""
    prefix = re.match(r"system (\w+):0: ", value)
    lines = [line.removeprefix(prefix[0] if prefix else "") for line in value.splitlines()] or [""]
    found: BandbookError
    if name == "AuthorError":
        found = AuthorError([_problem(line) for line in lines])
    elif name == "PhysicsError":
        found = PhysicsError("\n".join(lines))
    elif name in _NUMERICAL:
        allowed = "every number must be finite and every matrix solvable"
        found = PhysicsError(f"the numbers failed ({name}: {value}); {allowed}; ask a smaller or a simpler system")
    else:
        allowed = "a study must end without an exception"
        text = f"{_what(name, value)}; {allowed}; look at its traceback and at the code it uses"
        found = WorkingsError(
            "\n".join(lines) if name == "WorkingsError" else text, source=ended.cell.source, traceback=traceback
        )
    found.system = prefix[1] if prefix else ""
    return found


def _what(name: str, value: str) -> str:
    return f"{name}: {value}" if value else name


def _problem(line: str) -> Problem:
    """Return the problem that a kernel printed in one line."""
    found, allowed, remedy = [*line.split("; ", 2), "", ""][:3]
    return Problem(found or "a mistake", allowed or "see the manual", remedy or "correct it")
