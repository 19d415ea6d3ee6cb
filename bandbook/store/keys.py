"""Keys: what can change a result and nothing else, as one digest."""

import hashlib
import importlib.metadata
import json
import math
import sys
from collections.abc import Mapping
from functools import cache
from pathlib import Path
from typing import Any, Final

import bandbook

#: The closure of ``cells``: the in-house code that can change a result (held to the import table by a test).
KERNEL_PARTS: Final = (
    "analyses",
    "cells",
    "errors",
    "exhibits",
    "lattices",
    "model",
    "parameters",
    "registry",
    "solver",
    "systems",
)
#: Raised when composing, running or harvesting a notebook changes what a result holds.
COMPOSE_FORMAT: Final = 1
#: Whose versions a key covers; ``environment`` lists exactly these, Python and bandbook itself.
PACKAGES: Final = ("numpy", "scipy", "matplotlib")


def canonical_json(value: Any) -> bytes:
    """Return the one spelling of a value: keys sorted, 1 and 1.0 the same, −0.0 as 0.

    Raises:
        ValueError: A number is not finite.
        TypeError: Something is not plain JSON.

    >>> canonical_json({"b": 1.0, "a": -0.0})
    b'{"a":0,"b":1}'
    """
    return json.dumps(_plain(value), sort_keys=True, separators=(",", ":"), ensure_ascii=True, allow_nan=False).encode()


def _plain(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {str(key): _plain(entry) for key, entry in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(entry) for entry in value]
    if isinstance(value, float) and math.isfinite(value) and value.is_integer():
        return int(value)
    return value


def digest(data: bytes) -> str:
    """Return ``sha256:…`` of some bytes.

    >>> digest(b"")[:20]
    'sha256:e3b0c44298fc1'
    """
    return "sha256:" + hashlib.sha256(data).hexdigest()


def kernel_sources() -> list[Path]:
    """Return the files that a kernel runs, in the order of their names."""
    folder = Path(bandbook.__file__).parent
    single = [folder / f"{part}.py" for part in KERNEL_PARTS]
    folders = [path for part in KERNEL_PARTS for path in (folder / part).rglob("*.py")]
    return sorted([*(path for path in single if path.is_file()), *folders])


def code_digest() -> str:
    """Return the digest of the sources that a kernel runs.

    A file that has not been touched is not read again, so that a server that runs for days sees an edit at once.
    """
    folder = Path(bandbook.__file__).parent
    lines = []
    for path in kernel_sources():
        state = path.stat()
        lines.append(f"{path.relative_to(folder).as_posix()} {_source(path, state.st_mtime_ns, state.st_size)}")
    return digest("\n".join(lines).encode())


@cache
def _source(path: Path, touched: int, size: int) -> str:
    """Return the digest of a source with plain line ends; ``touched`` and ``size`` tell whether to read it again."""
    del touched, size
    return digest(path.read_bytes().replace(b"\r\n", b"\n"))


@cache
def environment() -> Mapping[str, str]:
    """Return the versions that can change a result, without importing anything."""
    versions = {name: importlib.metadata.version(name) for name in PACKAGES}
    python = f"{sys.version_info.major}.{sys.version_info.minor}"
    return {"python": python, **versions, "bandbook": bandbook.__version__}


def key_of(parameters: Mapping[str, Any]) -> str:
    """Return the key of checked parameters: what can change their result and nothing else."""
    return digest(
        canonical_json(
            {
                "parameters": parameters,
                "code": code_digest(),
                "compose": COMPOSE_FORMAT,
                "environment": dict(environment()),
            }
        )
    )


def inputs_of(parameters: Mapping[str, Any]) -> dict[str, str]:
    """Return a digest for each system, study, workings block and embedded file."""
    inputs = {}
    for name, system in parameters["systems"].items():
        inputs["system" if len(parameters["systems"]) == 1 else f"system {name}"] = digest(canonical_json(system))
    for name, study in parameters["studies"].items():
        inputs[f"study {name}"] = digest(canonical_json(study))
    for number, source in enumerate(parameters["workings"], start=1):
        inputs[f"workings {number}"] = digest(source.encode())
    for path, text in parameters["files"].items():
        inputs[path] = digest(text.encode())
    return inputs
