"""Kernels: one fresh process a case, on a private socket, in an empty folder, with a scrubbed environment."""

import contextlib
import logging
import os
import shutil
import signal
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

import bandbook

#: What a kernel keeps of the environment; everything else stays outside.
ALLOWED: Final = (
    "PATH", "HOME", "LANG", "LC_ALL", "LC_CTYPE", "TZ", "VIRTUAL_ENV", "LD_LIBRARY_PATH", "DYLD_LIBRARY_PATH",
    "MPLCONFIGDIR", "OPENBLAS_CORETYPE", "OPENBLAS_L2_SIZE",
    "SYSTEMROOT", "WINDIR", "COMSPEC", "PATHEXT", "USERPROFILE", "APPDATA", "LOCALAPPDATA",
)  # fmt: skip
#: What a kernel is given, so that the same case gives the same bytes.
FIXED: Final = {
    "PYTHONHASHSEED": "0",
    "PYTHONUTF8": "1",
    "PYTHONDONTWRITEBYTECODE": "1",
    "OPENBLAS_NUM_THREADS": "1",
    "OMP_NUM_THREADS": "1",
    "MKL_NUM_THREADS": "1",
    "SOURCE_DATE_EPOCH": "315532800",
    "MPLBACKEND": "module://matplotlib_inline.backend_inline",
    "PYDEVD_DISABLE_FILE_VALIDATION": "1",
}
#: Longest path of the temporary folder, in bytes, in which a socket's path stays below what systems allow (103).
LONGEST_BASE: Final = 60
#: How long a killed process may take to go, s.
_PATIENCE: Final = 5.0


@dataclass(frozen=True)
class Kernel:
    """A kernel that may be started.

    Attributes:
        manager: jupyter_client's manager.
        scratch: Its private folder.
        place: How it is started: folder, environment, nothing on the terminal.
    """

    manager: Any
    scratch: Path
    place: dict[str, Any]

    @property
    def process(self) -> Any:
        """The process, once started."""
        return getattr(getattr(self.manager, "provisioner", None), "process", None)

    @property
    def exit_code(self) -> int | None:
        """How the process ended, negative by a signal; ``None`` while it runs."""
        code: int | None = self.process.poll() if self.process else None
        return code

    def end(self) -> None:
        """Kill the kernel and whatever it started; a kernel that is gone is no mistake."""
        processes = self._own()
        if self.process and self.exit_code is None and hasattr(os, "killpg"):
            with contextlib.suppress(OSError):
                os.killpg(self.process.pid, signal.SIGKILL)  # the kernel leads a group of its own
        import psutil

        for process in processes:
            with contextlib.suppress(psutil.Error):
                process.kill()
        psutil.wait_procs(processes, timeout=_PATIENCE)
        if self.process:
            with contextlib.suppress(subprocess.TimeoutExpired):
                self.process.wait(_PATIENCE)

    def _own(self) -> list[Any]:
        """Return the processes that carry this kernel's private folder in their environment, or descend from it."""
        import psutil

        mark = str(self.scratch / "ipython")
        found: dict[int, Any] = {}
        for process in psutil.process_iter():
            with contextlib.suppress(psutil.Error, OSError):
                if process.environ().get("IPYTHONDIR") == mark:
                    found |= {one.pid: one for one in (process, *process.children(recursive=True))}
        return list(found.values())


def silent_log() -> logging.Logger:
    """Return a log that nobody hears: what is to say of a kernel is said by the book's own errors."""
    log = logging.getLogger("bandbook.notebooks")
    log.propagate = False
    if not log.handlers:
        log.addHandler(logging.NullHandler())
    return log


def kernel_environment(scratch: Path) -> dict[str, str]:
    """Return the environment of a kernel whose scratch folder is given."""
    kept = {name: os.environ[name] for name in ALLOWED if name in os.environ}
    private = {
        "IPYTHONDIR": str(scratch / "ipython"),
        "JUPYTER_CONFIG_DIR": str(scratch / "jupyter"),
        "JUPYTER_RUNTIME_DIR": str(scratch / "jupyter"),
        "MATPLOTLIBRC": str(scratch / "matplotlibrc"),
        "PYTHONPATH": str(Path(bandbook.__file__).resolve().parent.parent),
        **dict.fromkeys(("TMPDIR", "TEMP", "TMP"), str(scratch / "t")),
    }
    return {**kept, **FIXED, **private}


@contextlib.contextmanager
def private_folder() -> Iterator[Path]:
    """Yield a private folder with a short path; it is gone afterwards."""
    base = tempfile.gettempdir()
    if len(os.fsencode(base)) > LONGEST_BASE and Path("/tmp").is_dir():  # noqa: S108 - mkdtemp makes a private folder in it
        base = "/tmp"  # noqa: S108 - see above
    folder = Path(tempfile.mkdtemp(prefix="bb-", dir=base))
    try:
        yield folder
    finally:
        shutil.rmtree(folder, ignore_errors=True)


@contextlib.contextmanager
def fresh_kernel() -> Iterator[Kernel]:
    """Yield a kernel that runs in an empty folder once it is started; it, its children and the folder go afterwards."""
    with private_folder() as scratch:
        for name in ("work", "t", "ipython", "jupyter"):
            (scratch / name).mkdir()
        (scratch / "matplotlibrc").write_text("", encoding="utf-8")  # nobody's own style
        silent = dict.fromkeys(("stdout", "stderr"), subprocess.DEVNULL)
        place = {"cwd": str(scratch / "work"), "env": kernel_environment(scratch), **silent}
        kernel = Kernel(_manager(scratch), scratch, place)
        try:
            yield kernel
        finally:
            kernel.end()


def _manager(scratch: Path) -> Any:
    from jupyter_client.kernelspec import KernelSpec, KernelSpecManager
    from jupyter_client.manager import AsyncKernelManager

    argv = [sys.executable, "-m", "ipykernel_launcher", "-f", "{connection_file}", "--HistoryManager.enabled=False"]
    spec = KernelSpec(argv=argv, display_name="Python 3", language="python", interrupt_mode="signal")

    class OneSpec(KernelSpecManager):
        def get_kernel_spec(self, kernel_name: str) -> Any:  # noqa: ARG002 - there is only one
            return spec

    sockets = {"transport": "ipc", "ip": str(scratch / "s")} if os.name != "nt" else {}
    manager = AsyncKernelManager(
        kernel_name="python3",
        kernel_spec_manager=OneSpec(),
        connection_file=str(scratch / "c.json"),
        log=silent_log(),
        **sockets,
    )
    manager.context.rcvhwm = 0  # no bound: beyond one, outputs of a cell that prints fast are dropped in silence
    return manager
