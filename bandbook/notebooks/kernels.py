"""Kernels: one fresh process a case, on a private socket, in an empty folder, with a scrubbed environment."""

import contextlib
import os
import shutil
import sys
import tempfile
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import bandbook

#: What a kernel keeps of the environment; everything else stays outside.
ALLOWED = (
    "PATH", "HOME", "LANG", "LC_ALL", "TMPDIR", "TEMP", "TMP", "SYSTEMROOT", "VIRTUAL_ENV", "LD_LIBRARY_PATH",
    "OPENBLAS_CORETYPE", "OPENBLAS_L2_SIZE",
)  # fmt: skip
#: What a kernel is given, so that the same case gives the same bytes.
FIXED = {
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


def kernel_environment(scratch: Path) -> dict[str, str]:
    """Return the environment of a kernel whose scratch folder is given."""
    kept = {name: os.environ[name] for name in ALLOWED if name in os.environ}
    source = str(Path(bandbook.__file__).resolve().parent.parent)
    private = {
        "IPYTHONDIR": str(scratch / "ipython"),
        "JUPYTER_CONFIG_DIR": str(scratch / "jupyter"),
        "MATPLOTLIBRC": str(scratch / "matplotlibrc"),
        "PYTHONPATH": source,
    }
    return {**kept, **FIXED, **private}


@contextlib.contextmanager
def private_folder() -> Iterator[Path]:
    """Yield a private folder with a short path (a socket's path may have 100 bytes); it is gone afterwards."""
    base = tempfile.gettempdir()
    if len(base.encode()) > 50 and Path("/tmp").is_dir():  # noqa: S108 - mkdtemp makes a private folder in it
        base = "/tmp"  # noqa: S108 - see above
    folder = Path(tempfile.mkdtemp(prefix="bb-", dir=base))
    try:
        yield folder
    finally:
        shutil.rmtree(folder, ignore_errors=True)


@contextlib.contextmanager
def fresh_kernel() -> Iterator[Any]:
    """Yield a kernel manager whose kernel runs in an empty folder; kernel and children are gone afterwards."""
    with private_folder() as scratch:
        manager = _manager(scratch)
        work = scratch / "work"
        work.mkdir()
        (scratch / "matplotlibrc").write_text("", encoding="utf-8")  # nobody's own style
        try:
            yield manager, {"cwd": str(work), "env": kernel_environment(scratch)}
        finally:
            _end(manager)


def _manager(scratch: Path) -> Any:
    from jupyter_client.kernelspec import KernelSpec, KernelSpecManager
    from jupyter_client.manager import AsyncKernelManager

    argv = [sys.executable, "-m", "ipykernel_launcher", "-f", "{connection_file}", "--HistoryManager.enabled=False"]
    spec = KernelSpec(argv=argv, display_name="Python 3", language="python", interrupt_mode="signal")

    class OneSpec(KernelSpecManager):
        def get_kernel_spec(self, kernel_name: str) -> Any:  # noqa: ARG002 - there is only one
            return spec

    place = {"transport": "ipc", "ip": str(scratch / "s")} if os.name != "nt" else {}
    return AsyncKernelManager(
        kernel_name="python3",
        kernel_spec_manager=OneSpec(),
        connection_file=str(scratch / "c.json"),
        **place,
    )


def _end(manager: Any) -> None:
    """Kill what is left of a kernel, its children first."""
    import psutil

    process = getattr(getattr(manager, "provisioner", None), "process", None)
    if process is None or process.poll() is not None:
        return
    with contextlib.suppress(psutil.Error):
        kernel = psutil.Process(process.pid)
        for child in [*kernel.children(recursive=True), kernel]:
            with contextlib.suppress(psutil.Error):
                child.kill()
    with contextlib.suppress(Exception):
        process.wait(5)
