"""Reference values and recorded values, as a case states them."""

from collections.abc import Collection, Mapping
from dataclasses import dataclass
from typing import Any, Protocol

from bandbook.cases.book import Book, source_problem
from bandbook.cases.fences import Block
from bandbook.errors import Problem
from bandbook.parameters import Field, check, near

_FIELDS = (
    Field("value", "number", "the value"),
    Field("within", "number", "how far the found value may be from it", least=0.0),
    Field("unit", "choice", 'unit, "beta" to compare in units of β', default="", choices=("beta",)),
    Field("source", "text", "key of sources.bib", default=""),
    Field("note", "text", "where it comes from", default=""),
)


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


def read_references(
    block: Block, book: Book, promised: Mapping[str, Collection[QuantityPattern]]
) -> tuple[list[Reference], list[Problem]]:
    """Read a reference or recorded block.

    Args:
        block: The block.
        book: For its sources.
        promised: Study → quantities that it promises.

    Returns:
        The references; and the problems, not placed.
    """
    fields = _FIELDS if block.kind == "reference" else tuple(field for field in _FIELDS if field.name != "within")
    references, problems = [], []
    for quantity, row in _rows(block.table):
        if not isinstance(row, Mapping):
            found = "found no table"
            problems.append(Problem(found, "{ value = …, within = …, source = … }", "write a table", (quantity,)))
            continue
        checked, wrong = check(fields, row)
        wrong += _origin(checked, book)
        wrong += _quantity(quantity, promised) if block.kind == "reference" else []
        problems += [problem.below(quantity) for problem in wrong]
        if not wrong:
            line = block.line_of((quantity,))
            references.append(Reference(quantity, line=line, **{"within": None, **checked}))
    return references, problems


def _rows(table: Mapping[str, Any]) -> list[tuple[str, Any]]:
    """Return quantity → row; ``bands.gap = …`` without quotes, which TOML reads as nested tables, is understood too."""
    rows = []
    for name, entry in table.items():
        if (
            isinstance(entry, Mapping)
            and "." not in name
            and entry
            and all(isinstance(row, Mapping) for row in entry.values())
        ):
            rows += [(f"{name}.{inner}", row) for inner, row in entry.items()]
        else:
            rows.append((name, entry))
    return rows


def _origin(checked: Mapping[str, Any], book: Book) -> list[Problem]:
    source = checked["source"]
    if source and source not in book.sources.entries:
        return [source_problem(source, book.sources)]
    if not source and not checked["note"]:
        return [Problem("neither source nor note", "every reference value names one of the two", "add source or note")]
    return []


def _quantity(name: str, promised: Mapping[str, Collection[QuantityPattern]]) -> list[Problem]:
    study, _, quantity = name.partition(".")
    if study == "workings" and quantity:
        return []
    if study not in promised:
        allowed = "studies of this case are " + (", ".join(f'"{one}"' for one in promised) or "none")
        remedy = near(study, promised) or 'write "<study>.<quantity>"'
        return [Problem(f'"{name}" names no study of this case', allowed, remedy)]
    if not promised[study] or any(one.fits(quantity) for one in promised[study]):
        return []
    patterns = [one.pattern for one in promised[study]]
    remedy = near(quantity, patterns) or "use one of them"
    return [Problem(f'"{study}" has no quantity "{quantity}"', "it gives " + ", ".join(patterns), remedy)]
