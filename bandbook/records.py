"""From a case and its result to a record: the numbers, judged against the reference values, on the host."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from bandbook.cases import Book, CheckedCase, Reference
from bandbook.errors import Problem
from bandbook.exhibits import KINDS, typeset
from bandbook.parameters import near
from bandbook.store import Result

#: Half a unit of the last stored decimal of an energy: a stored value is allowed to be that far off.
HAIR = 5e-10
#: What a summary shows first, where a case has it.
KEY_QUANTITIES = ("gap", "band_gap", "homo", "lumo", "total_width", "pi_energy")


@dataclass(frozen=True)
class Record:
    """A result under the name of its case.

    Attributes:
        case: The case's id.
        title: Its title.
        key: The result's key.
        quantities: As ``record.json`` has them, recorded values last.
        references: Reference values with what was found and whether it agrees.
        exhibits: Figures, tables and texts.
        warnings: Whole sentences.
        inputs: Digest of each input, the files of parameter sets included.
        environment: Versions.
        problems: Reference values for quantities that do not exist, placed.
        file: The case's file, for messages.
        lines: Quantity → line of its reference value.
    """

    case: str
    title: str
    key: str
    quantities: tuple[Mapping[str, Any], ...]
    references: tuple[Mapping[str, Any], ...]
    exhibits: tuple[Mapping[str, Any], ...]
    warnings: tuple[str, ...]
    inputs: Mapping[str, str]
    environment: Mapping[str, str]
    problems: tuple[Problem, ...]
    file: str
    lines: Mapping[str, int]

    @property
    def agrees(self) -> bool:
        """Whether every reference value agrees."""
        return all(reference["agrees"] for reference in self.references)

    @property
    def disagreements(self) -> list[str]:
        """A sentence for every reference value that disagrees."""
        return [
            f"{self.file}:{self.lines[row['quantity']]}: {row['quantity']} is {row['found']}"
            f"{' β' if row['unit'] == 'beta' else ''}; the reference value is {row['value']} ± {row['within']}"
            f" ({row['source'] or row['note']}); one of the two is wrong"
            for row in self.references
            if not row["agrees"]
        ]

    @property
    def key_quantities(self) -> list[Mapping[str, Any]]:
        """The few quantities that stand for the case."""
        chosen = [q for name in KEY_QUANTITIES for q in self.quantities if q["name"].partition(".")[2] == name]
        return [q for q in chosen if q["value"] is not None and not q["recorded"]][:4]

    @property
    def summary(self) -> str:
        """The key quantities in one line."""
        return ", ".join(
            f"{q['name']} {typeset(q['value'], KINDS[q['kind']].shown)} {q['unit']}".rstrip()
            for q in self.key_quantities
        )

    def as_dict(self) -> dict[str, Any]:
        """Return the record as ``record.json`` has it."""
        return {
            "format": 1,
            "case": self.case,
            "title": self.title,
            "key": self.key,
            "quantities": [dict(row) for row in self.quantities],
            "references": [dict(row) for row in self.references],
            "exhibits": [
                {name: row[name] for name in ("study", "kind", "file", "alt", "caption")} for row in self.exhibits
            ],
            "warnings": list(self.warnings),
            "inputs": dict(self.inputs),
            "environment": dict(self.environment),
        }


def make_record(checked: CheckedCase, result: Result, book: Book) -> Record:
    """Assemble the record of a case from its result.

    A value agrees when it lies within the tolerance, plus half a unit of the last decimal that is stored; a quantity
    without an answer disagrees with every number.
    """
    found = {row["name"]: row for row in result.quantities}
    judged = [_judge(reference, found) for reference in checked.references]
    problems = [problem.at(checked.case.file, reference.line) for reference, problem in _pairs(checked, judged)]
    recorded = [_recorded(reference) for reference in checked.recorded]
    sets = {book.sets[use.set].file.rpartition("content/")[2]: book.sets[use.set].digest for use in checked.uses}
    return Record(
        checked.case.id,
        checked.case.front.title,
        result.key,
        tuple({**row, "recorded": False} for row in result.quantities) + tuple(recorded),
        tuple(row for row in judged if not isinstance(row, Problem)),
        result.exhibits,
        tuple(f"{row['study']}: {row['text']}" for row in result.warnings),
        {**result.inputs, **dict(sorted(sets.items()))},
        result.environment,
        tuple(problems),
        checked.case.file,
        {reference.quantity: reference.line for reference in checked.references},
    )


def _pairs(checked: CheckedCase, judged: list[dict[str, Any] | Problem]) -> list[tuple[Reference, Problem]]:
    pairs = zip(checked.references, judged, strict=True)
    return [(reference, row) for reference, row in pairs if isinstance(row, Problem)]


def _judge(reference: Reference, found: Mapping[str, Mapping[str, Any]]) -> dict[str, Any] | Problem:
    quantity = found.get(reference.quantity)
    if quantity is None:
        study = reference.quantity.partition(".")[0]
        names = [name for name in found if name.startswith(f"{study}.")] or list(found)
        shown = ", ".join(names[:12]) + (", …" if len(names) > 12 else "")
        remedy = near(reference.quantity, names) or "use one of them"
        return Problem(f'the run gave no quantity "{reference.quantity}"', f"it gave {shown}", remedy)
    in_beta = reference.unit == "beta"
    if in_beta and quantity["value"] is not None and quantity["in_beta"] is None:
        remedy = "give the system a beta_unit, or remove unit"
        return Problem(f'"{reference.quantity}" has no value in β', 'unit = "beta" needs a β', remedy)
    value = quantity["in_beta"] if in_beta else quantity["value"]
    within = reference.within or 0.0
    agrees = value is not None and abs(value - reference.value) <= within + HAIR
    return {
        "quantity": reference.quantity,
        "value": reference.value,
        "within": within,
        "found": value,
        "unit": "beta" if in_beta else quantity["unit"],
        "agrees": agrees,
        "source": reference.source or None,
        "note": reference.note or None,
    }


def _recorded(reference: Reference) -> dict[str, Any]:
    return {
        "name": reference.quantity,
        "kind": "number",
        "value": None if reference.unit == "beta" else reference.value,
        "unit": "",
        "in_beta": reference.value if reference.unit == "beta" else None,
        "uncertainty": None,
        "recorded": True,
        "meaning": reference.note or reference.source,
    }
