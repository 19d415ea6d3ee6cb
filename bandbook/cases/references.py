"""Reference values and recorded values, as a case states them."""

from collections.abc import Collection, Mapping
from dataclasses import dataclass, replace
from typing import Any, Final, Protocol

from bandbook.cases.book import Book, source_problem
from bandbook.cases.toml_lines import Key
from bandbook.errors import Problem
from bandbook.parameters import Field, check, listed, near, shortened

_FIELDS: Final = (
    Field("value", "number", "the value"),
    Field("within", "number", "how far the found value may be from it", least=0.0),
    Field("unit", "choice", 'unit, "beta" to compare in units of β', default="", choices=("beta",)),
    Field("source", "text", "key of sources.bib", default=""),
    Field("note", "text", "where it comes from", default=""),
)
_FORM: Final = 'a quantity is "<study>.<quantity>"'


class QuantityPattern(Protocol):
    """A quantity that a question promises."""

    @property
    def pattern(self) -> str:
        """Its name, parts that vary in angle brackets."""
        ...

    def fits(self, name: str) -> bool:
        """Return whether a name is of this pattern."""
        ...


@dataclass(frozen=True)
class Reference:
    """A value that a quantity is compared with, or one that is only recorded (``within`` is then ``None``)."""

    quantity: str
    value: float
    within: float | None
    unit: str = ""
    source: str = ""
    note: str = ""
    line: int = 0


@dataclass(frozen=True)
class Promised:
    """What a case can be asked for.

    Attributes:
        studies: Study → the quantities that its question promises; none where the question is unknown.
        has_workings: Whether the case has workings, which may report any quantity.
        is_whole: Whether every study is known by its name; otherwise an unknown one may be a study with mistakes.
    """

    studies: Mapping[str, Collection[QuantityPattern]]
    has_workings: bool = True
    is_whole: bool = True


def read_references(
    table: Mapping[str, Any], kind: str, *, book: Book, promised: Promised
) -> tuple[list[tuple[Key, Reference]], list[Problem]]:
    """Read a reference or recorded block.

    Args:
        table: What stands in it, references to parameter sets resolved.
        kind: ``"reference"`` or ``"recorded"``.
        book: For its sources.
        promised: What the case can be asked for; a recorded value may be of anything.

    Returns:
        The references, each with its key path and without its line; and the problems, not placed.
    """
    fields = _FIELDS if kind == "reference" else tuple(field for field in _FIELDS if field.name != "within")
    references, problems = [], []
    for key, quantity, row in _rows(table):
        wrong = _quantity(quantity, promised) if kind == "reference" else _form(quantity)
        if isinstance(row, Mapping):
            checked, mistakes = check(fields, row)
            wrong += [*(_in_own_unit(problem) for problem in mistakes), *_origin(checked, book)]
        else:
            checked = {}
            wrong.append(Problem("found no table", "{ value = …, within = …, source = … }", "write a table"))
        problems += [problem.below(*key) for problem in wrong]
        if not wrong:
            references.append((key, Reference(quantity, **{"within": None, **checked})))
    return references, problems


def _in_own_unit(problem: Problem) -> Problem:
    """Return what is wrong with a row; of another unit, that a quantity's own needs no word."""
    if problem.key != ("unit",):
        return problem
    return replace(problem, remedy="leave it out to compare in the quantity's own unit")


def _rows(table: Mapping[str, Any]) -> list[tuple[Key, str, Any]]:
    """Return key path, quantity and row of each value.

    ``bands.gap = …`` without quotes, which TOML reads as nested tables, is understood too.
    """
    rows: list[tuple[Key, str, Any]] = []
    for name, entry in table.items():
        is_nested = isinstance(entry, Mapping) and entry and all(isinstance(row, Mapping) for row in entry.values())
        if is_nested and "." not in name:
            rows += [((name, inner), f"{name}.{inner}", row) for inner, row in entry.items()]
        else:
            rows.append(((name,), name, entry))
    return rows


def _origin(checked: Mapping[str, Any], book: Book) -> list[Problem]:
    source = checked["source"]
    if source and source not in book.sources.entries:
        return [source_problem(source, book.sources)]
    if source == "" and checked["note"] == "":
        return [Problem("neither source nor note", "every value names one of the two", "add source or note")]
    return []


def _form(name: str) -> list[Problem]:
    study, _, quantity = name.partition(".")
    return (
        []
        if study and quantity
        else [Problem(f'"{shortened(name)}" names no quantity', _FORM, "write both, with a point")]
    )


def _quantity(name: str, promised: Promised) -> list[Problem]:
    if wrong := _form(name):
        return wrong
    study, _, quantity = name.partition(".")
    if study == "workings":
        remedy = "add a python workings block, or name a study"
        found = f'"{shortened(name)}" is reported by workings, and this case has none'
        return [] if promised.has_workings else [Problem(found, "quantities of this case", remedy)]
    if study not in promised.studies:
        allowed = "studies of this case are " + (listed([f'"{one}"' for one in promised.studies]) or "none")
        remedy = near(study, promised.studies) or "name one of them"
        return (
            [Problem(f'"{shortened(name)}" names no study of this case', allowed, remedy)] if promised.is_whole else []
        )
    known = promised.studies[study]
    if not known or any(one.fits(quantity) for one in known):
        return []
    patterns = [one.pattern for one in known]
    remedy = near(quantity, patterns) or "use one of them"
    return [Problem(f'"{study}" has no quantity "{shortened(quantity)}"', "it gives " + listed(patterns), remedy)]
