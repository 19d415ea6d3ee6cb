"""What pages are made from: a book and, for each case, what became of it."""

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Final

from bandbook.cases import Book, CheckedCase
from bandbook.errors import Problem
from bandbook.records import Record
from bandbook.store import Failure, Result

#: Sketches of the first screen; those of further systems stand at their blocks.
MOST_SKETCHES: Final = 2


@dataclass(frozen=True)
class CaseView:
    """One case as its page shows it.

    Attributes:
        checked: The case after its check.
        status: ``"executed"``, ``"fresh"``, ``"stale"`` or ``"failed"``.
        result: Its result, when it has one.
        record: Its record, when it has one.
        failure: Why it has none.
        problems: Every mistake, placed.
        related: Id and title of each case that its author points to and that has a page.
        sources: Set and name of a value of a parameter set → key of its source.
    """

    checked: CheckedCase
    status: str
    result: Result | None = None
    record: Record | None = None
    failure: Failure | None = None
    problems: tuple[Problem, ...] = ()
    related: tuple[tuple[str, str], ...] = ()
    sources: Mapping[tuple[str, str], str] = field(default_factory=dict)

    @property
    def id(self) -> str:
        """The case's id."""
        return self.checked.case.id

    @property
    def title(self) -> str:
        """The case's title, or its id."""
        return self.checked.case.front.title or self.id

    @property
    def up(self) -> str:
        """The way from the case's page to the root of the tree."""
        return "../" * (self.id.count("/") + 2)

    @property
    def verdict(self) -> tuple[str, str]:
        """Sign and words for whether the numbers can be trusted."""
        if self.problems or self.failure:
            return "✗", "failed"
        if self.record is None:
            return "◌", "not run yet"
        references = self.record.references
        if not references:
            return "○", "no reference value"
        wrong = sum(not reference["agrees"] for reference in references)
        if wrong:
            return "✗", f"{wrong} of {len(references)} reference values disagree"
        return "✓", f"{len(references)} reference values agree" if len(references) > 1 else "1 reference value agrees"


@dataclass(frozen=True)
class BookView:
    """A book as its pages show it; cases that are private have no page."""

    title: str
    book: Book
    cases: tuple[CaseView, ...] = field(default_factory=tuple)
    templates: Path | None = None

    @property
    def published(self) -> "BookView":
        """The same book without its private cases, each case with those it points to."""
        shown = {case.id: case.title for case in self.cases if not case.checked.case.front.private}

        def related(case: CaseView) -> tuple[tuple[str, str], ...]:
            return tuple((name, shown[name]) for name in case.checked.case.front.see if name in shown)

        sources = {
            (name, value): row.source for name, one in self.book.sets.items() for value, row in one.values.items()
        }
        cases = (replace(case, related=related(case), sources=sources) for case in self.cases if case.id in shown)
        return replace(self, cases=tuple(cases))
