"""The pages that list things: catalogue, parameter sets, sources."""

import csv
import io
import json
from typing import Any

from bandbook.pages.case_page import front_matter, heading
from bandbook.pages.page import BookView
from bandbook.pages.sections.head import described_systems
from bandbook.pages.templates import render


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
            "aim": case.checked.case.front.aim,
            "quantities": [
                {key: quantity[key] for key in ("name", "kind", "value", "unit", "in_beta")}
                for quantity in (case.record.key_quantities if case.record else [])
            ],
        }
        for case in view.cases
    ]


def catalogue(view: BookView) -> dict[str, str]:
    """Return the catalogue: page, CSV, JSON."""
    rows = catalogue_rows(view)
    page = render("pages/catalogue.html", {"rows": rows}, override=view.templates)
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
    for case in view.cases:
        for reference in (*case.checked.references, *case.checked.recorded):
            if case.id not in users.get(reference.source, [case.id]):
                users[reference.source].append(case.id)
    facts = {"sources": view.book.sources.entries, "users": users}
    body = render("pages/sources.html", facts, override=view.templates)
    return {"sources/index.md": f"{front_matter('Sources')}\n\n# Sources\n\n{body}\n"}
