"""The steps in their order: read, check, run what is stale, make records, write pages.

A flat list of calls; prints nothing. To follow one case from file to page, read :func:`run` and :func:`write_pages`.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from bandbook import cases, notebooks, pages, papers, records, registry, report, store
from bandbook.errors import AuthorError, BandbookError, IntegrityError, Problem, RunError, exit_status
from bandbook.parameters import one_of
from bandbook.settings import Settings

Progress = Callable[[str], None]
#: Runs one case: takes its checked parameters and key, returns what the executed notebook gave.
Runner = Callable[[dict[str, Any], str], notebooks.Harvest]


@dataclass(frozen=True)
class Checked:
    """A book that was read: nothing of it is computed."""

    book: cases.Book
    cases: tuple[cases.CheckedCase, ...]

    @property
    def problems(self) -> tuple[Problem, ...]:
        """Every mistake in the book, those of shared files first."""
        return (*self.book.problems, *(problem for checked in self.cases for problem in checked.problems))


@dataclass(frozen=True)
class Outcome:
    """What became of one case.

    Attributes:
        status: ``"executed"``, ``"fresh"``, ``"stale"`` (not asked to run) or ``"failed"``.
    """

    checked: cases.CheckedCase
    status: str
    result: store.Result | None = None
    record: records.Record | None = None
    failure: store.Failure | None = None

    @property
    def problems(self) -> tuple[Problem, ...]:
        """Mistakes found before and after the run."""
        return (*self.checked.problems, *(self.record.problems if self.record else ()))

    @property
    def exit_statuses(self) -> tuple[int, ...]:
        """What this case adds to the exit status of a command."""
        disagrees = self.record is not None and not self.record.agrees
        failed = (self.failure.exit_status,) if self.failure else ()
        return (*failed, *((2,) if self.problems else ()), *((1,) if disagrees else ()))


@dataclass(frozen=True)
class Finished:
    """A book after a run."""

    checked: Checked
    outcomes: tuple[Outcome, ...]
    set_aside: tuple[str, ...] = ()

    @property
    def summary(self) -> str:
        """The line that ends ``run`` and ``bind``; its numbers add up to the cases."""
        count = {status: sum(outcome.status == status for outcome in self.outcomes) for status in ("executed", "fresh")}
        failed = len(self.outcomes) - count["executed"] - count["fresh"]
        return f"executed {count['executed']}, fresh {count['fresh']}, failed {failed}"

    @property
    def exit_status(self) -> int:
        """The exit status of the command."""
        statuses = [status for outcome in self.outcomes for status in outcome.exit_statuses]
        return exit_status([*statuses, *([2] if self.checked.book.problems else []), *([5] if self.set_aside else [])])

    @property
    def messages(self) -> tuple[str, ...]:
        """What a person should read: mistakes, failures, disagreements, damaged results."""
        lines = [str(problem) for problem in self.checked.book.problems]
        for outcome in self.outcomes:
            lines += [str(problem) for problem in outcome.problems]
            lines += [str(outcome.failure)] if outcome.failure else []
            lines += outcome.record.disagreements if outcome.record else []
        return (*lines, *self.set_aside)


class _Vocabulary:
    """What the checker asks of the registry."""

    check_system = staticmethod(registry.check_system)
    check_study = staticmethod(registry.check_study)
    quantity_names = staticmethod(registry.quantity_names)
    formula_mistakes = staticmethod(pages.formula_mistakes)


def check(settings: Settings, wanted: Sequence[str] = ()) -> Checked:
    """Read and check the book, or the wanted cases of it.

    Raises:
        AuthorError: A wanted case does not exist.
    """
    book = cases.read_book(settings.root, settings.content)
    chosen = [case for case in book.cases if not wanted or case.id in wanted]
    unknown = [name for name in wanted if name not in {case.id for case in book.cases}]
    if unknown:
        raise AuthorError([_no_case(name, [case.id for case in book.cases]) for name in unknown])
    return Checked(book, tuple(cases.check_case(case, book, _Vocabulary()) for case in chosen))


def _no_case(name: str, known: Sequence[str]) -> Problem:
    """Return that there is no such case; of a file name, the case that it holds."""
    plain = name.removeprefix("./").removeprefix("content/").removeprefix("cases/").removesuffix(".md")
    problem = one_of(name, known, "case")
    return replace(problem, remedy=f'write "{plain}"') if plain in known else problem


def run(
    settings: Settings,
    wanted: Sequence[str] = (),
    *,
    again: bool = False,
    progress: Progress = lambda _: None,
    runner: Runner | None = None,
) -> Finished:
    """Run the cases whose result is stale and make every record; a failing case never stops the others."""
    checked = check(settings, wanted)
    shelf = store.Store(settings.store)
    run_one: Runner = runner or notebooks.local_runner(timeout=settings.timeout)
    outcomes = []
    for number, case in enumerate(checked.cases, start=1):

        def told(
            parameters: dict[str, Any], key: str, where: str = f"[{number}/{len(checked.cases)}] {case.case.id}"
        ) -> notebooks.Harvest:
            progress(where)
            return run_one(parameters, key)

        outcomes.append(_outcome(case, shelf, checked.book, told, again=again))
    return Finished(checked, tuple(outcomes), tuple(shelf.set_aside))


def look(settings: Settings, wanted: Sequence[str] = ()) -> Finished:
    """Return the book as its store has it: runs nothing."""
    checked = check(settings, wanted)
    shelf = store.Store(settings.store)
    outcomes = [_outcome(case, shelf, checked.book, None) for case in checked.cases]
    return Finished(checked, tuple(outcomes), tuple(shelf.set_aside))


def _outcome(
    checked: cases.CheckedCase, shelf: store.Store, book: cases.Book, runner: Runner | None, *, again: bool = False
) -> Outcome:
    """Return what becomes of one case: fetched when fresh, run when stale and a runner is given."""
    if checked.parameters is None:
        return Outcome(checked, "failed")
    key = store.key_of(checked.parameters)
    result = None if again and runner else shelf.get(key)
    status = "fresh" if result else "stale"
    if result is None and runner is None:
        failure = shelf.failure(checked.case.id)
        return Outcome(checked, "failed" if failure else "stale", failure=failure)
    if result is None and runner is not None:
        try:
            result = shelf.put(key, checked.parameters, runner(checked.parameters, key))
        except BandbookError as error:
            return Outcome(checked, "failed", failure=_kept(checked, shelf, error, key))
        status = "executed"
    assert result is not None  # noqa: S101 - fetched or just put
    try:
        shelf.remember(checked.case.id, key)
    except RunError as error:
        if runner is not None:  # who only looks needs no list of keys
            return Outcome(checked, "failed", failure=_kept(checked, shelf, error, key))
    shelf.forget_failure(checked.case.id)
    return Outcome(checked, status, result, records.make_record(checked, result, book))


def _kept(checked: cases.CheckedCase, shelf: store.Store, error: BandbookError, key: str) -> store.Failure:
    """Keep why a case failed, placed at the block that failed."""
    line = checked.blocks.get(f"step-{error.step}", 0)
    if error.system:
        line = checked.blocks.get(f"system {error.system}", line)
    return shelf.keep_failure(error, case=checked.case.id, key=key, file=checked.case.file, line=line)


def write_pages(settings: Settings, finished: Finished) -> Path:
    """Write the page tree and return its folder."""
    override = settings.templates if settings.templates.is_dir() else None
    views = tuple(
        pages.CaseView(o.checked, o.status, o.result, o.record, o.failure, o.problems) for o in finished.outcomes
    )
    view = pages.BookView(settings.title, finished.checked.book, views, override)
    return pages.write_tree(view, settings.store / "pages")


def write_report(settings: Settings, finished: Finished, file: Path) -> None:
    """Write the reference values of a run as a test report, whole or not at all."""
    entries = []
    for outcome in finished.outcomes:
        failed = (str(outcome.failure),) if outcome.failure else ()
        told = (*(str(problem) for problem in outcome.problems), *failed)
        entries.append(report.Entry(outcome.checked.case.id, outcome.checked.case.file, outcome.record, told))
    store.write_file(file, report.report_bytes(settings.title, entries))


@dataclass(frozen=True)
class Drawing:
    """A figure that is asked for a paper: case, figure, file, width with its unit, font size in points."""

    case: str
    figure: str
    to: Path
    width: str
    font_size: float


def draw(
    settings: Settings, asked: Drawing, *, progress: Progress = lambda _: None, runner: Runner | None = None
) -> list[Path]:
    """Draw a figure of a case for a paper, and return what was written: the drawing and the tables of its study.

    Raises:
        AuthorError: What is asked is not allowed, or the case has mistakes.
    """
    paper = papers.check_paper(asked.width, asked.font_size, asked.to.suffix)
    (checked,) = check(settings, (asked.case,)).cases
    if checked.parameters is None:
        raise AuthorError(checked.problems)
    parameters, key = papers.up_to(checked.parameters, asked.figure), store.key_of(checked.parameters)
    progress(f"{asked.case}: {asked.figure}")
    run_one: Runner = runner or notebooks.drawing_runner(timeout=settings.timeout, paper=paper)
    try:
        found = run_one(parameters, key)
    except BandbookError as error:
        line = checked.blocks.get(f"step-{error.step}", 1)
        raise store.placed_error(error, file=checked.case.file, line=line) from None
    return papers.write(papers.files_of(found, asked.figure, asked.to), store.write_file)


def start(folder: Path) -> list[str]:
    """Write a new book and return what was written.

    Raises:
        AuthorError: The folder holds something already.
    """
    if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
        found = f"{folder} is not empty"
        raise AuthorError([Problem(found, "a new book starts in a new folder", "name another folder")])
    pattern = pages.package_templates() / "start"
    written = []
    for path in sorted(pattern.rglob("*")):
        if path.is_file():
            name = path.relative_to(pattern).as_posix()
            name = name.replace("github/", ".github/workflows/", 1).replace("gitlab/", ".", 1)
            target = folder / name
            target.parent.mkdir(parents=True, exist_ok=True)
            target.write_bytes(path.read_bytes())
            written.append(name)
    (folder / ".gitignore").write_text(".bandbook/\nsite/\n", encoding="utf-8")
    return [*written, ".gitignore"]


def listing(finished: Finished) -> list[dict[str, Any]]:
    """Return a row a case: id, title, status, whether every reference value agrees, key quantities."""
    return [
        {
            "case": outcome.checked.case.id,
            "title": outcome.checked.case.front.title,
            "status": outcome.status,
            "agrees": outcome.record.agrees if outcome.record and outcome.record.references else None,
            "quantities": outcome.record.key_quantities if outcome.record else [],
            "summary": outcome.record.summary if outcome.record else "",
        }
        for outcome in finished.outcomes
    ]


def record_of(settings: Settings, case: str) -> dict[str, Any]:
    """Return the record of a case as ``record.json`` has it.

    Raises:
        AuthorError: There is no such case, it has mistakes, or it has not been run yet.
        IntegrityError: Its result is damaged.
    """
    finished = look(settings, (case,))
    (outcome,) = finished.outcomes
    if outcome.record is None and outcome.problems:
        raise AuthorError(outcome.problems)
    if finished.set_aside:
        raise IntegrityError("\n".join(finished.set_aside))
    if outcome.record is None and outcome.failure:
        raise AuthorError(
            [
                Problem(
                    f'case "{case}" failed at its last run: {outcome.failure}',
                    "a record needs a finished run",
                    f"mend it, then call bandbook run {case}",
                )
            ]
        )
    if outcome.record is None:
        found = f'case "{case}" has no result under its current parameters'
        raise AuthorError([Problem(found, "a record needs a finished run", f"call bandbook run {case}")])
    return outcome.record.as_dict()
