"""A result: what a run gave, in a folder named by its key."""

import json
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from bandbook.errors import IntegrityError
from bandbook.store.files import is_inside
from bandbook.store.keys import canonical_json, digest

RESULT_FILE = "result.json"
RUN_FILE = "run.json"


@dataclass(frozen=True)
class Result:
    """One finished run, read back and verified.

    Attributes:
        key: ``sha256:…``.
        quantities: As ``result.json`` has them.
        exhibits: Figures, tables and texts in the order of the notebook; a table carries its ``html``, a text its
            ``text``, each the ``step`` of the notebook that gave it.
        warnings: ``{"study", "text"}`` each.
        inputs: Digest of each input.
        environment: Versions.
        files: Relative path → digest of everything beside ``result.json`` and ``run.json``.
        folder: Where it lies.
    """

    key: str
    quantities: tuple[Mapping[str, Any], ...]
    exhibits: tuple[Mapping[str, Any], ...]
    warnings: tuple[Mapping[str, str], ...]
    inputs: Mapping[str, str]
    environment: Mapping[str, str]
    files: Mapping[str, str]
    folder: Path


def result_bytes(content: Mapping[str, Any]) -> bytes:
    """Return ``result.json``: the content with its own digest, readable and sorted."""
    whole = {**content, "digest": digest(canonical_json(content))}
    return (json.dumps(whole, indent=1, sort_keys=True, ensure_ascii=False, allow_nan=False) + "\n").encode()


def read_result(folder: Path, key: str) -> Result:
    """Read a result and verify every byte of it.

    Raises:
        IntegrityError: Something is missing, damaged, or belongs to another key.
    """
    try:
        raw = (folder / RESULT_FILE).read_bytes()
        content = {name: value for name, value in json.loads(raw).items() if name != "digest"}
        ours = raw == result_bytes(content) and content["key"] == key
        damaged = [path for path, value in content["files"].items() if not _is_whole(folder, path, value)]
        result = Result(
            key,
            tuple(content["quantities"]),
            tuple(content["exhibits"]),
            tuple(content["warnings"]),
            content["inputs"],
            content["environment"],
            content["files"],
            folder,
        )
    except (OSError, ValueError, KeyError, AttributeError, TypeError, RecursionError) as error:
        raise IntegrityError(f"result {folder.name} cannot be read ({type(error).__name__})") from error
    if not ours or damaged:
        raise IntegrityError(f"result {folder.name}: {', '.join(damaged) or RESULT_FILE} is not what its digest says")
    return result


def _is_whole(folder: Path, path: str, value: str) -> bool:
    return is_inside(path) and (folder / path).is_file() and digest((folder / path).read_bytes()) == value
