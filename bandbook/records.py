"""From a case and its result to a record: the numbers, judged against the reference values, on the host."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Final

from bandbook.cases import Book, CheckedCase, Reference
from bandbook.errors import Problem
from bandbook.exhibits import KINDS, typeset
from bandbook.parameters import near
from bandbook.store import Result

#: What a summary shows first, where a case has it.
KEY_QUANTITIES: Final = ("gap", "band_gap", "homo", "lumo", "total_width", "pi_energy")
#: What two numbers of size 1 may differ by when both stand for the same decimal number.
_ROUNDING: Final = 1e-12
_EXHIBIT: Final = ("study", "kind", "file", "alt", "caption")
_MOST_NAMES: Final = 12


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
        warnings: Whole sentences, each after the name of its study.
        inputs: Digest of each input, the files of parameter sets included.
        environment: Versions.
        problems: Reference values for quantities that do not exist, placed.
        disagreements: A sentence for every reference value that disagrees, placed.
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
    problems: tuple[Problem, ...] = ()
    disagreements: tuple[str, ...] = ()

    @property
    def agrees(self) -> bool:
        """Whether every reference value agrees."""
        return all(reference["agrees"] for reference in self.references)

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
            "exhibits": [{name: row[name] for name in _EXHIBIT} for row in self.exhibits],
            "warnings": list(self.warnings),
            "inputs": dict(self.inputs),
            "environment": dict(self.environment),
        }


def make_record(checked: CheckedCase, result: Result, book: Book) -> Record:
    """Assemble the record of a case from its result; every reference value is judged by :func:`is_within`."""
    case, found = checked.case, {row["name"]: row for row in result.quantities}
    judged = [(reference, _judge(reference, found)) for reference in checked.references]
    rows = [(reference, row) for reference, row in judged if not isinstance(row, Problem)]
    sets = {f"parameters/{use.set}.toml": book.sets[use.set].digest for use in checked.uses}
    return Record(
        case.id,
        case.front.title,
        result.key,
        tuple(_quantity(row) for row in result.quantities)
        + tuple(_recorded(reference, found.get(reference.quantity)) for reference in checked.recorded),
        tuple(row for _, row in rows),
        result.exhibits,
        tuple(f"{row['study']}: {row['text']}" for row in result.warnings),
        {**result.inputs, **dict(sorted(sets.items()))},
        result.environment,
        tuple(row.at(case.file, reference.line) for reference, row in judged if isinstance(row, Problem)),
        tuple(f"{case.file}:{reference.line}: {_sentence(row)}" for reference, row in rows if not row["agrees"]),
    )


def is_within(found: float | None, reference: float, within: float, *, decimals: int = 9) -> bool:
    """Return whether a found value agrees with a reference value.

    It agrees when ``|found − reference| ≤ within``, the bound included. A found value is stored with fixed decimals, so
    half a unit of the last one is allowed besides (nothing for whole numbers); no answer agrees with no number.

    Args:
        found: The stored value.
        reference: The stated value.
        within: How far apart they may be.
        decimals: Decimals that are stored of the found value.

    >>> is_within(1.45, 1.40, 0.05), is_within(1.4500001, 1.40, 0.05), is_within(None, 0.0, 1.0)
    (True, False, False)
    """
    if found is None:
        return False
    rounding = 0.5 * 10.0**-decimals if decimals else 0.0
    size = max(1.0, abs(found), abs(reference))
    return abs(found - reference) <= within + rounding + _ROUNDING * size


def _quantity(row: Mapping[str, Any], *, recorded: bool = False) -> dict[str, Any]:
    """Return a row of ``quantities`` in the order in which ``record.json`` has it."""
    names = ("name", "kind", "value", "unit", "in_beta", "uncertainty")
    return {**{name: row.get(name) for name in names}, "recorded": recorded, "meaning": row.get("meaning", "")}


def _recorded(reference: Reference, found: Mapping[str, Any] | None) -> dict[str, Any]:
    """Return a recorded value as a quantity: kind and unit are those of the quantity that the run gave, if it did."""
    in_beta = reference.unit == "beta"
    row = {
        "name": reference.quantity,
        "kind": found["kind"] if found else "number",
        "value": None if in_beta else reference.value,
        "unit": found["unit"] if found else "",
        "in_beta": reference.value if in_beta else None,
        "meaning": reference.note or reference.source,
    }
    return _quantity(row, recorded=True)


def _judge(reference: Reference, found: Mapping[str, Mapping[str, Any]]) -> dict[str, Any] | Problem:
    quantity = found.get(reference.quantity)
    if quantity is None:
        return _unknown(reference.quantity, list(found))
    in_beta = reference.unit == "beta"
    if in_beta and quantity["value"] is not None and quantity["in_beta"] is None:
        return _without_beta(quantity)
    value = quantity["in_beta"] if in_beta else quantity["value"]
    within, decimals = reference.within or 0.0, KINDS[quantity["kind"]].decimals
    return {
        "quantity": reference.quantity,
        "value": reference.value,
        "within": within,
        "found": value,
        "unit": "beta" if in_beta else quantity["unit"],
        "agrees": is_within(value, reference.value, within, decimals=decimals),
        "source": reference.source or None,
        "note": reference.note or None,
    }


def _unknown(name: str, given: list[str]) -> Problem:
    study, _, short = name.partition(".")
    own = [one.partition(".")[2] for one in given if one.startswith(f"{study}.")]
    names, remedy = (own, near(short, own)) if own else (given, near(name, given))
    shown = ", ".join(names[:_MOST_NAMES]) + (", …" if len(names) > _MOST_NAMES else "") if names else "nothing"
    found = f'the run gave "{study}" no quantity "{short}"' if own else f'the run gave no quantity "{name}"'
    return Problem(found, f"it gave {shown}", remedy or "name one of them", (name,))


def _without_beta(quantity: Mapping[str, Any]) -> Problem:
    name, kind = quantity["name"], quantity["kind"]
    found = f'"{name}" has no value in β'
    if not KINDS[kind].beta:
        energies = ", ".join(one.name for one in KINDS.values() if one.beta)
        return Problem(found, f"a {kind} has none; those of kind {energies} have one", "remove unit", (name,))
    return Problem(
        found, 'unit = "beta" needs a system with a β', "give the system a beta_unit, or remove unit", (name,)
    )


def _sentence(row: Mapping[str, Any]) -> str:
    unit = " β" if row["unit"] == "beta" else f" {row['unit']}" if row["unit"] else ""
    found = f"{row['quantity']} has no answer" if row["found"] is None else f"{row['quantity']} is {row['found']}{unit}"
    stated = f"the reference value is {row['value']} ± {row['within']}{unit} ({row['source'] or row['note']})"
    return f"{found}; {stated}; correct the case or the reference value"
