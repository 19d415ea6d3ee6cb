"""Run every check of the project: ``python3 -m tests [pytest arguments]``.

Needs only the standard library to start. Makes ``.tests-venv`` beside the sources, installs the project with its test
extra there (and Debian's ``chromium`` when root and missing), runs ruff, mypy and pytest, and ends with pytest's own
closing line. With pytest arguments only pytest is run.
"""

import hashlib
import os
import shutil
import subprocess
import sys
import time
import venv
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
ENVIRONMENT = ROOT / ".tests-venv"
PYTHON = ENVIRONMENT / ("Scripts/python.exe" if os.name == "nt" else "bin/python")


def main(arguments: list[str]) -> int:
    """Return the first exit status that is not 0, pytest last."""
    make_environment()
    install_browser()
    steps = {
        "ruff check": [PYTHON, "-m", "ruff", "check", "."],
        "ruff format": [PYTHON, "-m", "ruff", "format", "--check", "."],
        "mypy": [PYTHON, "-m", "mypy"],
    }
    failed = [name for name, command in ({} if arguments else steps).items() if run(name, command)]
    if failed:
        print(f"failed: {', '.join(failed)}", flush=True)
    wanted = arguments or ["-n", str(os.cpu_count() or 1), "--dist", "worksteal"]
    status = run("pytest", [PYTHON, "-m", "pytest", *wanted])
    return status or bool(failed)


def make_environment() -> None:
    """Make the environment, or bring it up to date when pyproject.toml or the Python changed."""
    stamp = ENVIRONMENT / "installed-for"
    wanted = hashlib.sha256((ROOT / "pyproject.toml").read_bytes() + f"{sys.version}{ROOT}".encode()).hexdigest()
    if stamp.is_file() and stamp.read_text(encoding="utf-8") == wanted:
        return
    shutil.rmtree(ENVIRONMENT, ignore_errors=True)
    venv.EnvBuilder(with_pip=True).create(ENVIRONMENT)
    status = run("install", [PYTHON, "-m", "pip", "install", "--quiet", "--editable", ".[all,test]"])
    if status:
        sys.exit(status)
    stamp.write_text(wanted, encoding="utf-8")


def install_browser() -> None:
    """Install Debian's Chromium when it is missing and this is root; without it the browser tests say so."""
    if shutil.which("chromium") or not hasattr(os, "geteuid") or os.geteuid() or not shutil.which("apt-get"):
        return
    run("apt-get update", ["apt-get", "update", "-qq"])
    run("apt-get install chromium", ["apt-get", "install", "-qq", "-y", "--no-install-recommends", "chromium"])


def run(name: str, command: list[object]) -> int:
    """Run one step in the project's folder and say how long it took."""
    print(f"== {name}", file=sys.stderr, flush=True)
    began = time.monotonic()
    environment = {**os.environ, "PYTHONUTF8": "1", "DEBIAN_FRONTEND": "noninteractive"}
    status = subprocess.run([str(part) for part in command], cwd=ROOT, env=environment, check=False).returncode
    print(f"== {name}: {time.monotonic() - began:.0f} s, status {status}", file=sys.stderr, flush=True)
    return status


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
