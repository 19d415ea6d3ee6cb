"""What pages are made from: a book and, for each case, what became of it."""

from dataclasses import dataclass, field
from pathlib import Path

from bandbook.cases import Book, CheckedCase
from bandbook.errors import Problem
from bandbook.records import Record
from bandbook.store import Failure, Result


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
    """

    checked: CheckedCase
    status: str
    result: Result | None = None
    record: Record | None = None
    failure: Failure | None = None
    problems: tuple[Problem, ...] = ()

    @property
    def id(self) -> str:
        """The case's id."""
        return self.checked.case.id

    @property
    def title(self) -> str:
        """The case's title, or its id."""
        return self.checked.case.front.title or self.id

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
    """A book as its pages show it."""

    title: str
    book: Book
    cases: tuple[CaseView, ...] = field(default_factory=tuple)
    templates: Path | None = None
