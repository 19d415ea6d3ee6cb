"""The first screen: what this is, what came out, whether it can be trusted, what it is built on."""

from collections.abc import Mapping
from typing import Any

from bandbook.pages.page import CaseView


def facts(view: CaseView) -> dict[str, Any] | None:
    """Return the facts of the first screen."""
    sign, words = view.verdict
    return {
        "front": view.checked.case.front,
        "systems": described_systems(view),
        "quantities": view.record.key_quantities if view.record else [],
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
    return [describe(name, system) for name, system in systems.items()]


def describe(name: str, system: Mapping[str, Any]) -> str:
    """Return a system in one line.

    >>> describe("short", {"form": "named-lattice", "lattice": "chain"})
    'short: chain'
    """
    what = {
        "named-lattice": lambda: str(system["lattice"]),
        "written-out": lambda: f"{len(system['sites'])} sites written out",
        "built-by": lambda: f"built by {system['built_by']}",
    }[system["form"]]()
    return what if name == "system" else f"{name}: {what}"
