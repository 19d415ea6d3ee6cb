"""The pages that list things: catalogue, parameter sets, sources."""

import csv
import io
import json
from collections import Counter
from collections.abc import Callable, Mapping
from typing import Any

from bandbook.exhibits import KINDS
from bandbook.pages.case_page import front_matter, heading
from bandbook.pages.described import dimension_of
from bandbook.pages.page import BookView, CaseView
from bandbook.pages.sections.head import described_systems
from bandbook.pages.templates import render
from bandbook.records import Record

#: Endings of the figures that a front page shows one of each.
_KINDS_SHOWN = ("on-band", "orbitals", "bands", "sketch")
#: Endings of the figures that are seen when they are small, the best first.
_SMALL = ("bands", "on-band", "diagram", "series")
#: Sign of a verdict → its word in the catalogue.
_SIGNS = {"✓": "agree", "✗": "disagree or failed", "○": "none", "◌": "not run"}


def catalogue_rows(view: BookView) -> list[dict[str, Any]]:
    """Return a row a case: plain JSON."""
    return [
        {
            "case": case.id,
            "title": case.title,
            "state": case.checked.case.front.state,
            "tags": list(case.checked.case.front.tags),
            "status": case.status if case.status in {"failed", "stale"} else "done",
            "sign": case.verdict[0],
            "verdict": case.verdict[1],
            "system": "; ".join(described_systems(case)),
            "dimension": _dimensions(case),
            "thumbnail": _thumbnail(case),
            "gap": _first(case, ("gap", "band_gap")),
            "width": _first(case, ("total_width",)),
            "aim": case.checked.case.front.aim,
            "quantities": [
                {key: quantity[key] for key in ("name", "kind", "value", "unit", "in_beta")}
                for quantity in (case.record.key_quantities if case.record else [])
            ],
        }
        for case in view.cases
    ]


def _dimensions(case: CaseView) -> list[str]:
    systems = case.checked.parameters["systems"].values() if case.checked.parameters else ()
    return sorted({dimension_of(system) for system in systems} - {""})


def _thumbnail(case: CaseView) -> str:
    """Return the picture that stands for a case, from the root: one whose shape is seen when it is small."""
    exhibits = case.record.exhibits if case.record else ()
    figures = [one["file"] for one in exhibits if one["kind"] == "figure" and one["study"] != "workings"]
    chosen = (file for ending in _SMALL for file in figures if file.removesuffix(".svg").endswith(ending))
    found = next(chosen, figures[0] if figures else "")
    return f"cases/{case.id}/{found}" if found else ""


def _first(case: CaseView, names: tuple[str, ...]) -> dict[str, Any] | None:
    """Return the first quantity of a case that has one of these names without its study, the best name first."""
    quantities = [one for one in (case.record.quantities if case.record else ()) if not one["recorded"]]
    found = [one for name in names for one in quantities if one["name"].partition(".")[2] == name]
    chosen = next((one for one in found if one["value"] is not None), None)
    return None if chosen is None else {key: chosen[key] for key in ("name", "kind", "value", "unit")}


def _facets(rows: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Return what a catalogue can be narrowed by, with how many cases each choice leaves."""
    kinds: dict[str, Callable[[dict[str, Any]], list[str]]] = {
        "dimension": lambda row: row["dimension"],
        "reference values": lambda row: [row["sign"] + " " + _SIGNS[row["sign"]]],
        "state": lambda row: [row["state"]],
        "tag": lambda row: row["tags"],
    }
    facets = []
    for name, of in kinds.items():
        counts = Counter(choice for row in rows for choice in of(row))
        choices = [{"name": choice, "count": counts[choice]} for choice in sorted(counts)]
        if len(choices) > 1:
            facets.append({"name": name, "key": name.split(maxsplit=1)[0], "choices": choices})
    return facets


def catalogue(view: BookView) -> dict[str, str]:
    """Return the catalogue: page, CSV, JSON."""
    rows = catalogue_rows(view)
    page = render(
        "pages/catalogue.html", {"rows": rows, "facets": _facets(rows), "signs": _SIGNS}, override=view.templates
    )
    return {
        "catalogue/index.md": f"{front_matter('Catalogue')}\n\n# Catalogue\n\n{page}\n",
        "catalogue/catalogue.json": json.dumps(rows, indent=1, ensure_ascii=False) + "\n",
        "catalogue/catalogue.csv": _csv(rows),
    }


def _csv(rows: list[dict[str, Any]]) -> str:
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(["case", "title", "state", "status", "reference values", "quantity", "value", "unit"])
    for row in rows:
        for quantity in row["quantities"] or [{"name": "", "value": "", "unit": ""}]:
            writer.writerow(
                [*(row[key] for key in ("case", "title", "state", "status", "verdict")),
                 *(quantity[key] for key in ("name", "value", "unit"))]
            )  # fmt: skip
    return out.getvalue()


def front(view: BookView) -> str:
    """Return what the front page says below the group's own words: counts, and a few pictures."""
    references = [row for case in view.cases if case.record for row in case.record.references]
    agreeing = sum(row["agrees"] for row in references)
    states = Counter(case.checked.case.front.state for case in view.cases)
    statuses = Counter(case.status for case in view.cases)
    counts = [
        ("cases", str(len(view.cases))),
        ("reference values that agree", f"{agreeing} of {len(references)}"),
        *((state, str(states[state])) for state in ("active", "finished", "withdrawn") if states[state]),
        *((status, str(statuses[status])) for status in ("stale", "failed") if statuses[status]),
    ]
    return render("pages/front.html", {"counts": counts, "pictures": _pictures(view)}, override=view.templates)


def _pictures(view: BookView) -> list[dict[str, str]]:
    """Return a picture of each of a few cases, of different kinds where there are some."""
    pictures: list[dict[str, str]] = []
    wanted = list(_KINDS_SHOWN)
    for case in view.cases:
        files = [one["file"] for one in (case.record.exhibits if case.record else ()) if one["kind"] == "figure"]
        kind = next((one for one in wanted if any(file.removesuffix(".svg").endswith(one) for file in files)), None)
        if kind is None:
            continue
        wanted.remove(kind)
        file = next(file for file in files if file.removesuffix(".svg").endswith(kind))
        pictures.append({"case": case.id, "title": case.title, "file": f"cases/{case.id}/{file}"})
    return pictures


def quantities_csv(record: Record) -> str:
    """Return every quantity of a record as CSV, with its reference value where it has one."""
    judged = {row["quantity"]: row for row in record.references}
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    heads = ("quantity", "value", "unit", "in beta", "uncertainty", "recorded", "meaning")
    writer.writerow([*heads, "reference value", "within", "agrees", "source", "note"])
    for row in record.quantities:
        reference = judged.get(row["name"], {}) if not row["recorded"] else {}
        writer.writerow([
            row["name"], _decimals(row, "value"), row["unit"], _decimals(row, "in_beta"), _decimals(row, "uncertainty"),
            "yes" if row["recorded"] else "", row["meaning"], reference.get("value", ""), reference.get("within", ""),
            ("yes" if reference["agrees"] else "no") if reference else "", reference.get("source") or "",
            reference.get("note") or "",
        ])  # fmt: skip
    return out.getvalue()


def _decimals(row: Mapping[str, Any], name: str) -> str:
    """Return a number with all the decimals that are stored of its kind."""
    value = row[name]
    return "" if value is None else f"{value:.{KINDS[row['kind']].decimals}f}"


def set_pages(view: BookView) -> dict[str, str]:
    """Return a page for each parameter set and one that lists them."""
    pages = {}
    for name, parameters in view.book.sets.items():
        users = {
            value: sorted(
                {case.id for case in view.cases for use in case.checked.uses if (use.set, use.name) == (name, value)}
            )
            for value in parameters.values
        }
        facts = {"set": parameters, "users": users, "problems": [str(problem) for problem in parameters.problems]}
        body = render("pages/parameters.html", facts, override=view.templates)
        pages[f"parameters/{name}/index.md"] = (
            f"{front_matter(parameters.title)}\n\n{heading(parameters.title)}\n\n{body}\n"
        )
    listing = render("pages/sets.html", {"sets": view.book.sets}, override=view.templates)
    pages["parameters/index.md"] = f"{front_matter('Parameter sets')}\n\n# Parameter sets\n\n{listing}\n"
    return pages


def sources_page(view: BookView) -> dict[str, str]:
    """Return the page of the sources, each with the cases that name it."""
    users: dict[str, list[str]] = {key: [] for key in view.book.sources.entries}
    in_sets = {
        key: sorted(
            name
            for name, one in view.book.sets.items()
            if key in {one.source, *(value.source for value in one.values.values())}
        )
        for key in users
    }
    for case in view.cases:
        for reference in (*case.checked.references, *case.checked.recorded):
            if case.id not in users.get(reference.source, [case.id]):
                users[reference.source].append(case.id)
    facts = {"sources": view.book.sources.entries, "users": users, "sets": in_sets}
    body = render("pages/sources.html", facts, override=view.templates)
    return {"sources/index.md": f"{front_matter('Sources')}\n\n# Sources\n\n{body}\n"}
