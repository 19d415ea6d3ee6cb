"""What one study gave, as a notebook cell displays it and the host collects it."""

from dataclasses import dataclass, field
from typing import Any, Final

from bandbook.exhibits.figure import Figure
from bandbook.exhibits.quantity import Quantity
from bandbook.exhibits.table import Table

#: The MIME type under which a cell hands an answer to the host.
MIME: Final = "application/vnd.bandbook.answer+json"


@dataclass(frozen=True)
class Answer:
    """Quantities, tables, figures and warnings of one study.

    Attributes:
        study: The study's name; ``"workings"`` for what an author's code reports.
        quantities: Named ``<study>.<quantity>``.
        tables: In the order of the page.
        figures: In the order of the page.
        warnings: Whole sentences.
        result: The arrays behind it, for workings; never stored.
    """

    study: str
    quantities: tuple[Quantity, ...] = ()
    tables: tuple[Table, ...] = ()
    figures: tuple[Figure, ...] = ()
    warnings: tuple[str, ...] = ()
    result: Any = field(default=None, compare=False, repr=False)

    def value(self, name: str) -> float | None:
        """Return the value of one quantity by its name without the study.

        Raises:
            KeyError: The study has no such quantity.
        """
        for quantity in self.quantities:
            if quantity.name == f"{self.study}.{name}":
                return quantity.value
        names = [quantity.name.partition(".")[2] for quantity in self.quantities]
        shown = ", ".join(names[:20]) + (", …" if len(names) > 20 else "")
        raise KeyError(f"the study {self.study!r} has no quantity {name!r}; it has {shown}")


def answer_bundle(answer: Answer) -> dict[str, Any]:
    """Return the payload under :data:`MIME`: plain JSON, everything the host needs."""
    return {
        "format": 1,
        "study": answer.study,
        "quantities": [quantity.as_dict() for quantity in answer.quantities],
        "tables": [table.as_dict() for table in answer.tables],
        "figures": [figure.as_dict() for figure in answer.figures],
        "warnings": list(answer.warnings),
    }
