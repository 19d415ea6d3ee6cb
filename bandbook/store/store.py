"""The store: results by key, the last key of each case, failures; every write whole or not at all."""

import json
import os
import shutil
import tempfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any, Protocol

from bandbook.errors import BandbookError, IntegrityError
from bandbook.store.failure import Failure, failure_of
from bandbook.store.files import as_run_error, locked, sync_folder, write_file
from bandbook.store.keys import digest, environment, inputs_of
from bandbook.store.result import RESULT_FILE, RUN_FILE, Result, read_result, result_bytes


class Harvested(Protocol):
    """What an executed notebook gave; see ``notebooks``."""

    @property
    def quantities(self) -> list[dict[str, Any]]:
        """As a result has them."""
        ...

    @property
    def exhibits(self) -> list[dict[str, Any]]:
        """Figures, tables and texts."""
        ...

    @property
    def warnings(self) -> list[dict[str, str]]:
        """A study and a text each."""
        ...

    @property
    def files(self) -> Mapping[str, bytes]:
        """Relative path → bytes."""
        ...

    @property
    def run(self) -> Mapping[str, Any]:
        """Times and host."""
        ...


class Store:
    """The store of one book.

    Attributes:
        root: ``.bandbook``.
        set_aside: A sentence for every damaged result that was set aside.
    """

    def __init__(self, root: Path) -> None:
        self.root = root
        self.set_aside: list[str] = []

    def folder(self, key: str) -> Path:
        """Return where the result of a key lies."""
        return self.root / "store" / key.removeprefix("sha256:")

    def get(self, key: str) -> Result | None:
        """Return the verified result of a key, or nothing; a damaged one is set aside and named in ``set_aside``."""
        folder = self.folder(key)
        if not folder.is_dir():
            return None
        try:
            return read_result(folder, key)
        except IntegrityError as error:
            self._set_aside(folder, str(error))
            return None

    def put(self, key: str, parameters: Mapping[str, Any], harvest: Harvested) -> Result:
        """Keep what a run gave and return it; a second writer of the same key is welcome.

        Raises:
            RunError: The disk is full, or the store cannot be written.
        """
        self._prepare()
        target = self.folder(key)
        with as_run_error(target):
            target.parent.mkdir(parents=True, exist_ok=True)
            folder = Path(tempfile.mkdtemp(dir=self.root / "tmp", prefix=f"{os.getpid()}-"))
        try:
            self._write(folder, key, parameters, harvest)
            with as_run_error(target):
                self._publish(folder, target)
        finally:
            shutil.rmtree(folder, ignore_errors=True)
        return read_result(target, key)

    @staticmethod
    def _write(folder: Path, key: str, parameters: Mapping[str, Any], harvest: Harvested) -> None:
        for path, data in harvest.files.items():
            write_file(folder / path, data)
        content = {
            "format": 1,
            "key": key,
            "quantities": harvest.quantities,
            "exhibits": harvest.exhibits,
            "warnings": harvest.warnings,
            "inputs": inputs_of(parameters),
            "environment": dict(environment()),
            "files": {path: digest(data) for path, data in sorted(harvest.files.items())},
        }
        write_file(folder / RESULT_FILE, result_bytes(content))
        write_file(folder / RUN_FILE, (json.dumps(harvest.run, indent=1, sort_keys=True) + "\n").encode())
        for inner in sorted({path.parent for path in folder.rglob("*")} | {folder}):
            sync_folder(inner)

    @staticmethod
    def _publish(folder: Path, target: Path) -> None:
        try:
            folder.rename(target)
        except OSError:
            if not target.is_dir():
                raise
            previous = folder.with_name(folder.name + "-previous")
            target.rename(previous)
            folder.rename(target)
            shutil.rmtree(previous, ignore_errors=True)
        sync_folder(target.parent)

    def _prepare(self) -> None:
        """Make the store's folders, its ``.gitignore``, and clear what dead processes left unfinished."""
        ignore = self.root / ".gitignore"
        if not ignore.is_file():
            write_file(ignore, b"*\n")
        with as_run_error(self.root):
            (self.root / "tmp").mkdir(exist_ok=True)
        for path in (self.root / "tmp").iterdir():
            owner = path.name.split("-")[0]
            if not owner.isdigit() or not _is_alive(int(owner)):
                shutil.rmtree(path, ignore_errors=True)

    def _set_aside(self, folder: Path, reason: str) -> None:
        number = 1
        while (target := self.root / "damaged" / f"{folder.name}-{number}").exists():
            number += 1
        with as_run_error(target):
            target.parent.mkdir(parents=True, exist_ok=True)
            folder.rename(target)
        self.set_aside.append(f"{reason}; it was set aside in damaged/{target.name} and is computed again")

    def remember(self, case: str, key: str) -> None:
        """Write down the last key of a case."""
        path = self.root / "cases.json"
        self._prepare()
        with locked(self.root / "lock"):
            keys = self._keys()
            if keys.get(case) != key:
                write_file(path, (json.dumps({**keys, case: key}, indent=1, sort_keys=True) + "\n").encode())

    def latest(self, case: str) -> str | None:
        """Return the last key of a case."""
        return self._keys().get(case)

    def _keys(self) -> dict[str, str]:
        try:
            keys = json.loads((self.root / "cases.json").read_bytes())
        except (OSError, ValueError):
            return {}
        return {str(case): str(key) for case, key in keys.items()} if isinstance(keys, dict) else {}

    def keep_failure(self, error: BandbookError, *, case: str, key: str, file: str, line: int) -> Failure:
        """Keep why a case has no result, with the notebook as far as it ran, and return it."""
        failure = failure_of(error, case=case, key=key, file=file, line=line)
        self._prepare()
        write_file(self._failure_path(case), (json.dumps(failure.as_dict(), indent=1, sort_keys=True) + "\n").encode())
        return failure

    def failure(self, case: str) -> Failure | None:
        """Return the kept failure of a case."""
        try:
            return Failure(**json.loads(self._failure_path(case).read_bytes()))
        except (OSError, ValueError, TypeError):
            return None

    def forget_failure(self, case: str) -> None:
        """Forget the failure of a case that has a result now."""
        self._failure_path(case).unlink(missing_ok=True)

    def _failure_path(self, case: str) -> Path:
        return self.root / "failed" / f"{case.replace('/', '+')}.json"


def _is_alive(process: int) -> bool:
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    except OSError:
        return True
    return True
