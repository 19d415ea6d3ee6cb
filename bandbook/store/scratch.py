"""Unfinished results: a folder a writer, named by host and process, so that what a dead one left can be cleared."""

import os
import platform
import re
import shutil
import tempfile
import time
from pathlib import Path
from typing import Final

#: What another machine left unfinished is kept this long, s: whether its process lives cannot be seen from here.
LONGEST_ELSEWHERE: Final = 86_400.0


def new_scratch(place: Path) -> Path:
    """Return a new empty folder for this process."""
    return Path(tempfile.mkdtemp(dir=place, prefix=f"{_host()}-{os.getpid()}-"))


def clear_scratch(place: Path) -> None:
    """Remove what writers left that have ended."""
    for path in place.iterdir():
        if _is_left(path):
            shutil.rmtree(path, ignore_errors=True)


def _host() -> str:
    return re.sub(r"[^A-Za-z0-9.]", "_", platform.node())[:60] or "host"


def _is_left(path: Path) -> bool:
    host, _, rest = path.name.partition("-")
    process = rest.partition("-")[0]
    if host == _host() and process.isdigit():
        return not _is_alive(int(process))
    try:
        return time.time() - path.stat().st_mtime > LONGEST_ELSEWHERE
    except OSError:
        return False


def _is_alive(process: int) -> bool:
    if os.name == "nt":  # there, signal 0 would end the process
        return True
    try:
        os.kill(process, 0)
    except (ProcessLookupError, OverflowError):
        return False
    except OSError:
        return True
    return True
