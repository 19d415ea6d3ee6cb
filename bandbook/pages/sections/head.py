"""The first screen: what this is, what came out, whether it can be trusted, what it is built on."""

from collections.abc import Mapping, Sequence
from typing import Any

from bandbook.pages.described import called, described
from bandbook.pages.page import MOST_SKETCHES, CaseView


def facts(view: CaseView) -> dict[str, Any] | None:
    """Return the facts of the first screen."""
    sign, words = view.verdict
    return {
        "front": view.checked.case.front,
        "systems": described_systems(view),
        "quantities": _named(view.record.key_quantities if view.record else []),
        "sketches": sketches(view)[:MOST_SKETCHES],
        "sign": sign,
        "verdict": words,
        "n_warnings": len(view.record.warnings) if view.record else 0,
        "sets": sorted({use.set for use in view.checked.uses}),
        "digest": view.record.key.removeprefix("sha256:")[:12] if view.record else "",
        "related": view.related,
        "up": view.up,
    }


def described_systems(view: CaseView) -> list[str]:
    """Return each system of a case in one line."""
    systems = view.checked.parameters["systems"] if view.checked.parameters else {}
    return [described(name, system) for name, system in systems.items()]


def sketches(view: CaseView) -> list[Mapping[str, Any]]:
    """Return the sketches of a case's systems."""
    exhibits = view.record.exhibits if view.record else ()
    return [exhibit for exhibit in exhibits if exhibit["study"] == "system" and exhibit["kind"] == "figure"]


def _named(quantities: Sequence[Mapping[str, Any]]) -> list[dict[str, Any]]:
    return [{**quantity, "called": called(quantity["name"])} for quantity in quantities]
