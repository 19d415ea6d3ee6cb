"""A failure: why a case has no result, kept until its next outcome."""

import json
from dataclasses import asdict, dataclass, fields
from typing import Any

from bandbook.errors import AuthorError, BandbookError, RunError, WorkingsError


@dataclass(frozen=True)
class Failure:
    """Why a run gave nothing.

    Attributes:
        case: Id of the case.
        key: Key under which it ran.
        kind: Name of the error's class.
        exit_status: What it means for the command.
        message: The message, placed at file and line.
        line: Line of the block in the case file; 0 when unknown.
        source: Source of the failing cell.
        traceback: Traceback as plain text.
        reason: Of a run that did not end: ``"timed out"``, ``"killed"`` or ``"kernel died"``; otherwise empty.
        step: Number of the notebook's step, from 1; 0 when unknown.
    """

    case: str
    key: str
    kind: str
    exit_status: int
    message: str
    line: int = 0
    source: str = ""
    traceback: str = ""
    reason: str = ""
    step: int = 0

    def __str__(self) -> str:
        return self.message

    def as_dict(self) -> dict[str, Any]:
        """Return it as plain JSON."""
        return asdict(self)


def failure_of(error: BandbookError, *, case: str, key: str, file: str, line: int) -> Failure:
    """Return an error of a run as the failure of its case, placed at a line of the case file."""
    return Failure(
        case,
        key,
        type(error).__name__,
        error.exit_status,
        _placed(error, file, (line or 1) + (error.offset if isinstance(error, WorkingsError) else 0)),
        line,
        error.source if isinstance(error, WorkingsError) else "",
        error.traceback if isinstance(error, WorkingsError) else "",
        error.reason if isinstance(error, RunError) else "",
        error.step,
    )


def placed_error(error: BandbookError, *, file: str, line: int) -> BandbookError:
    """Return an error of a run, placed at a line of the case file."""
    if isinstance(error, AuthorError):
        return AuthorError([problem if problem.file else problem.at(file, line) for problem in error.problems])
    error.args = (f"{file}:{line}: {error}",)
    return error


def _placed(error: BandbookError, file: str, line: int) -> str:
    if isinstance(error, AuthorError):
        return "\n".join(str(problem if problem.file else problem.at(file, line)) for problem in error.problems)
    return f"{file}:{line}: {error}"


def failure_from(data: bytes) -> Failure:
    """Return a kept failure; what another version wrote beside it is left out.

    Raises:
        ValueError: The bytes are no failure.
    """
    content = json.loads(data)
    names = {field.name for field in fields(Failure)}
    try:
        return Failure(**{name: value for name, value in content.items() if name in names})
    except (AttributeError, TypeError) as error:
        raise ValueError(str(error)) from error
