"""Every error of the book; imports nothing.

::

    BandbookError
    ├── WorkingsError    1  an author's code cell failed: cell, source, traceback
    ├── AuthorError      2  mistakes in the book's files: every problem, each with file and line
    ├── PhysicsError     3  the question makes no sense for the model, or numbers failed
    ├── RunError         4  a run timed out, was killed, or its kernel died
    └── IntegrityError   5  bytes are not what their name says

The number is the exit status of the command. A message says *where: what was found; what is allowed; what to do*.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

#: Several outcomes in one command: the first of these that occurred is the exit status.
EXIT_ORDER = (5, 2, 4, 3, 1)


@dataclass(frozen=True)
class Problem:
    """One mistake of an author.

    Attributes:
        found: What was found, as a clause without a full stop.
        allowed: What is allowed there.
        remedy: What to do.
        key: The place inside a block, from the top-level key down: ``("sites", 2, "alpha")``; rows count from 0.
        file: The file, relative to the book; empty until the problem is placed.
        line: The line in the file, from 1; 0 until the problem is placed.
    """

    found: str
    allowed: str
    remedy: str
    key: tuple[str | int, ...] = ()
    file: str = ""
    line: int = 0

    def at(self, file: str, line: int) -> "Problem":
        """Return the same problem, placed at a line of a file."""
        return replace(self, file=file, line=line)

    def below(self, *key: str | int) -> "Problem":
        """Return the same problem with ``key`` put before its own key."""
        return replace(self, key=(*key, *self.key))

    def __str__(self) -> str:
        place = f"{self.file}:{self.line}: " if self.file else ""
        name = key_text(self.key)
        return printable(f"{place}{name + ': ' if name else ''}{self.found}; {self.allowed}; {self.remedy}")


def printable(text: str) -> str:
    r"""Return a text as one line, signs that steer a terminal written out.

    >>> printable("two\nlines")
    'two\\nlines'
    """
    return "".join(sign if sign.isprintable() else sign.encode("unicode_escape").decode() for sign in text)


def key_text(key: Iterable[str | int]) -> str:
    """Return a key path as an author would write it.

    >>> key_text(("sites", 2, "alpha"))
    'sites[2].alpha'
    """
    text = ""
    for part in key:
        text += f"[{part}]" if isinstance(part, int) else f".{part}" if text else part
    return text


class BandbookError(Exception):
    """The root of every error that the book raises itself.

    Attributes:
        step: Number of the notebook step in which it arose, from 1; 0 outside a run.
        system: The system of the case at whose block it is told; empty where it is told at the step.
        notebook: The notebook as far as it ran, as the bytes of its file; empty outside a run.
    """

    exit_status = 1
    step = 0
    system = ""
    notebook = b""


class WorkingsError(BandbookError):
    """An author's code cell failed.

    Attributes:
        cell: Number of the workings block in its case, from 1.
        source: The cell's source.
        traceback: The traceback as plain text.
        line: The line of the case file at which the failing block starts; 0 when unknown.
        offset: The line of the block that failed, from 1; 0 when unknown.
    """

    exit_status = 1
    offset = 0

    def __init__(self, message: str, *, cell: int = 0, source: str = "", traceback: str = "", line: int = 0) -> None:
        super().__init__(message)
        self.cell, self.source, self.traceback, self.line = cell, source, traceback, line


class AuthorError(BandbookError):
    """One or more mistakes in the book's files.

    Attributes:
        problems: Every mistake, in file order.
    """

    exit_status = 2

    def __init__(self, problems: Sequence[Problem]) -> None:
        self.problems = tuple(problems)
        super().__init__(self.problems)

    def __str__(self) -> str:
        return "\n".join(str(problem) for problem in self.problems)


class PhysicsError(BandbookError):
    """The question makes no sense for the model, or the numbers failed."""

    exit_status = 3


class RunError(BandbookError):
    """A run timed out, was killed, or its kernel died.

    Attributes:
        reason: One of ``"timed out"``, ``"killed"``, ``"kernel died"``.
    """

    exit_status = 4

    def __init__(self, message: str, *, reason: str = "kernel died") -> None:
        super().__init__(message)
        self.reason = reason


class IntegrityError(BandbookError):
    """Bytes are not what their name says."""

    exit_status = 5


def exit_status(statuses: Iterable[int]) -> int:
    """Return the exit status of a command that met several outcomes.

    >>> exit_status([1, 0, 3])
    3
    >>> exit_status([])
    0
    """
    met = set(statuses)
    return next((status for status in EXIT_ORDER if status in met), 0)
