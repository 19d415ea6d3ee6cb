"""A failure: why a case has no result, kept until its next outcome."""

from dataclasses import asdict, dataclass
from typing import Any

from bandbook.errors import AuthorError, BandbookError, WorkingsError


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
    """

    case: str
    key: str
    kind: str
    exit_status: int
    message: str
    line: int = 0
    source: str = ""
    traceback: str = ""

    def __str__(self) -> str:
        return self.message

    def as_dict(self) -> dict[str, Any]:
        """Return it as plain JSON."""
        return asdict(self)


def failure_of(error: BandbookError, *, case: str, key: str, file: str, line: int) -> Failure:
    """Return an error of a run as the failure of its case."""
    where = f"{file}:{line}: " if line else f"{file}: "
    message = str(error) if isinstance(error, AuthorError) and error.problems[0].file else where + str(error)
    source = error.source if isinstance(error, WorkingsError) else ""
    traceback = error.traceback if isinstance(error, WorkingsError) else ""
    return Failure(case, key, type(error).__name__, error.exit_status, message, line, source, traceback)
