"""The store: results by key, the last key of each case, failures; every write whole or not at all."""

import contextlib
import json
import shutil
from collections.abc import Mapping
from pathlib import Path
from typing import Any, Final, Protocol

from bandbook.errors import BandbookError, IntegrityError, RunError
from bandbook.store.failure import Failure, failure_from, failure_of
from bandbook.store.files import as_run_error, is_inside, locked, sync_folder, write_file
from bandbook.store.keys import digest, environment, inputs_of
from bandbook.store.result import RESULT_FILE, RUN_FILE, Result, read_result, result_bytes
from bandbook.store.scratch import clear_scratch, new_scratch

#: Longest name of a failure's file; a longer one gives way to its digest.
_LONGEST_NAME: Final = 150


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
        except IntegrityError:
            return self._second_look(folder, key)

    def _second_look(self, folder: Path, key: str) -> Result | None:
        """Read once more while nobody writes, and set aside what is damaged all the same."""
        reason = f"result {folder.name} is damaged"
        try:
            with locked(self.root / "lock"):
                if not folder.is_dir():
                    return None
                try:
                    return read_result(folder, key)
                except IntegrityError as error:
                    reason = str(error)
                self.set_aside.append(f"{reason}; {self._move_aside(folder)}")
        except RunError as error:
            self.set_aside.append(f"{reason}; it is computed again and could not be set aside ({error})")
        return None

    def _move_aside(self, folder: Path) -> str:
        number = 1
        while (target := self.root / "damaged" / f"{folder.name}-{number}").exists():
            number += 1
        with as_run_error(target):
            target.parent.mkdir(parents=True, exist_ok=True)
            folder.rename(target)
        return f"a result is read only when every byte is right; it was set aside in damaged/{target.name}, run again"

    def put(self, key: str, parameters: Mapping[str, Any], harvest: Harvested) -> Result:
        """Keep what a run gave and return it; a second writer of the same key is welcome.

        Raises:
            RunError: The disk is full, or the store cannot be written.
            IntegrityError: A file would lie outside the result's folder, or cannot be read back as it was written.
        """
        outside = [path for path in harvest.files if not is_inside(path)]
        if outside:
            found = f"a result with a file at {outside[0]!r}"
            raise IntegrityError(f"{found}; its files lie below its own folder; rename what the workings display")
        self._prepare()
        target = self.folder(key)
        with as_run_error(target):
            target.parent.mkdir(parents=True, exist_ok=True)
            folder = new_scratch(self.root / "tmp")
        try:
            self._write(folder, key, parameters, harvest)
            with locked(self.root / "lock"), as_run_error(target):
                self._publish(folder, target)
                return read_result(target, key)
        finally:
            shutil.rmtree(folder, ignore_errors=True)

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
        write_file(folder / RUN_FILE, _as_json(harvest.run))
        with as_run_error(folder):
            for inner in sorted({path.parent for path in folder.rglob("*")} | {folder}):
                sync_folder(inner)

    @staticmethod
    def _publish(folder: Path, target: Path) -> None:
        """Rename a finished folder to its place; what stood there goes, or comes back when that fails."""
        previous = folder.with_name(folder.name + "-previous")
        if target.exists():
            target.rename(previous)
        try:
            folder.rename(target)
        except OSError:
            if previous.exists():
                previous.rename(target)
            raise
        sync_folder(target.parent)
        shutil.rmtree(previous, ignore_errors=True)

    def _prepare(self) -> None:
        """Make the store's folders, its ``.gitignore``, and clear what dead processes left unfinished."""
        ignore = self.root / ".gitignore"
        if not ignore.is_file():
            write_file(ignore, b"*\n")
        with as_run_error(self.root):
            (self.root / "tmp").mkdir(exist_ok=True)
            clear_scratch(self.root / "tmp")

    def remember(self, case: str, key: str) -> None:
        """Write down the last key of a case.

        Raises:
            RunError: The disk is full, or the store cannot be written.
        """
        if self.latest(case) == key:
            return
        self._prepare()
        with locked(self.root / "lock"):
            write_file(self.root / "cases.json", _as_json({**self._keys(), case: key}))

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
        """Keep why a case has no result, with its notebook as far as it ran, and return it.

        On a full disk it is returned all the same: one failing case never stops the others.
        """
        failure = failure_of(error, case=case, key=key, file=file, line=line)
        with contextlib.suppress(RunError):
            self._prepare()
            self.forget_failure(case)
            if error.notebook:
                write_file(self._failure_path(case, "ipynb"), error.notebook)
            write_file(self._failure_path(case, "json"), _as_json(failure.as_dict()))
        return failure

    def failure(self, case: str) -> Failure | None:
        """Return the kept failure of a case."""
        try:
            return failure_from(self._failure_path(case, "json").read_bytes())
        except (OSError, ValueError):
            return None

    def failed_notebook(self, case: str) -> bytes | None:
        """Return the notebook of a case that failed, as far as it ran."""
        try:
            return self._failure_path(case, "ipynb").read_bytes()
        except OSError:
            return None

    def forget_failure(self, case: str) -> None:
        """Forget the failure of a case, where the disk can be written."""
        for ending in ("json", "ipynb"):
            with contextlib.suppress(OSError):
                self._failure_path(case, ending).unlink(missing_ok=True)

    def _failure_path(self, case: str, ending: str) -> Path:
        name = case.replace("/", "+")  # no id has a plus
        if len(name) > _LONGEST_NAME:
            name = digest(case.encode()).removeprefix("sha256:")
        return self.root / "failed" / f"{name}.{ending}"


def _as_json(content: Mapping[str, Any]) -> bytes:
    return (json.dumps(content, indent=1, sort_keys=True) + "\n").encode()
