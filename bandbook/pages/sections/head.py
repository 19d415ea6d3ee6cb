"""The first screen: what this is, what came out, whether it can be trusted, what it is built on."""

from typing import Any

from bandbook.pages.page import CaseView


def facts(view: CaseView) -> dict[str, Any] | None:
    """Return the facts of the first screen."""
    front = view.checked.case.front
    sign, words = view.verdict
    return {
        "front": front,
        "systems": [describe(name, system) for name, system in _systems(view)],
        "quantities": view.record.key_quantities if view.record else [],
        "sign": sign,
        "verdict": words,
        "n_warnings": len(view.record.warnings) if view.record else 0,
        "sets": sorted({use.set for use in view.checked.uses}),
        "digest": view.record.key.removeprefix("sha256:")[:12] if view.record else "",
        "up": "../" * (view.id.count("/") + 2),
    }


def _systems(view: CaseView) -> list[tuple[str, dict[str, Any]]]:
    return list(view.checked.parameters["systems"].items()) if view.checked.parameters else []


def describe(name: str, system: dict[str, Any]) -> str:
    """Return a system in one line."""
    what = {
        "named-lattice": lambda: str(system["lattice"]),
        "written-out": lambda: f"{len(system['sites'])} sites written out",
        "built-by": lambda: f"built by {system['built_by']}",
    }[system["form"]]()
    return what if name == "system" else f"{name}: {what}"
