"""Writing that a crash cannot halve: a temporary name, fsync, rename."""

import contextlib
import os
import tempfile
from collections.abc import Iterator
from pathlib import Path, PurePosixPath

from bandbook.errors import RunError

try:
    import fcntl
except ImportError:  # not on every system; there a lock is a courtesy only
    fcntl = None  # type: ignore[assignment]

_MASK = os.umask(0o077)
os.umask(_MASK)  # the only way to read it is to set it


def write_file(path: Path, data: bytes) -> None:
    """Replace a file by new bytes, whole or not at all.

    Raises:
        RunError: The disk is full, or the folder cannot be written.
    """
    with as_run_error(path):
        path.parent.mkdir(parents=True, exist_ok=True)
        handle, name = tempfile.mkstemp(dir=path.parent, prefix=".tmp-")
        try:
            with os.fdopen(handle, "wb") as file:
                file.write(data)
                file.flush()
                os.fsync(file.fileno())
            Path(name).chmod(0o666 & ~_MASK)  # mkstemp gives it to its owner alone
            Path(name).replace(path)
        except BaseException:
            Path(name).unlink(missing_ok=True)
            raise


def sync_folder(folder: Path) -> None:
    """Make the names in a folder durable, where the system can."""
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def is_inside(path: str) -> bool:
    """Return whether a path names something below a folder, and nothing else.

    >>> [is_inside(path) for path in ("figures/bands.svg", "/etc/passwd", "../x", "a/../../x", "c:x", "", "a/.")]
    [True, False, False, False, False, False, False]
    """
    parts = path.split("/")
    plain = not any(sign in path for sign in ":\\\0")
    return plain and not PurePosixPath(path).is_absolute() and not {"", ".", ".."} & set(parts)


@contextlib.contextmanager
def as_run_error(path: Path) -> Iterator[None]:
    """Turn what the system refuses into the book's own error.

    Raises:
        RunError: The disk is full, or the folder cannot be written.
    """
    try:
        yield
    except OSError as error:
        found = f"{path.name} could not be written: {error.strerror or error}"
        raise RunError(
            f"{found}; the store must be writable; free space or check the rights, then run again"
        ) from error


@contextlib.contextmanager
def locked(path: Path) -> Iterator[None]:
    """Hold a lock file while several commands may write; where the system has no such locks, do without.

    Raises:
        RunError: The lock file cannot be made.
    """
    with as_run_error(path):
        path.parent.mkdir(parents=True, exist_ok=True)
        file = path.open("ab")
    with file:
        if fcntl is not None:
            with contextlib.suppress(OSError):  # some network disks know no locks
                fcntl.flock(file, fcntl.LOCK_EX)
        yield
