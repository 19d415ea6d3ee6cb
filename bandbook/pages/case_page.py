"""One case's page: the first screen, the author's text with results in place, provenance."""

import json
from collections.abc import Collection, Mapping
from typing import Any

from bandbook.cases import Block, Prose
from bandbook.pages.links import adjusted
from bandbook.pages.page import CaseView
from bandbook.pages.sections import BLOCKS, BOTTOM, TOP
from bandbook.pages.templates import render


def case_page(view: CaseView, *, ids: Collection[str], override: Any = None) -> str:
    """Return the page's Markdown."""
    parts = [front_matter(view.title, view), heading(view.title)]
    parts += [_section(name, facts(view), override) for name, facts in TOP]
    for part in view.checked.case.parts:
        parts.append(_prose(view, part, ids) if isinstance(part, Prose) else _block(view, part, override))
    parts += [_section(name, facts(view), override) for name, facts in BOTTOM]
    return "\n\n".join(part for part in parts if part) + "\n"


def front_matter(title: str, view: CaseView | None = None) -> str:
    """Return a page's front matter: its title, and for a case what its page is about."""
    facts: dict[str, Any] = {"title": title}
    if view is not None:
        facts |= {"case": view.id, "status": view.status}
    return (
        "---\n" + "".join(f"{key}: {json.dumps(value, ensure_ascii=False)}\n" for key, value in facts.items()) + "---"
    )


def heading(title: str) -> str:
    """Return a title as Markdown heading in which nothing has a meaning of its own."""
    escaped = "".join(
        f"\\{sign}" if sign in "\\`*_{}[]()#+-.!|<>&" and sign not in "<>&-.()" else sign for sign in title
    )
    return "# " + escaped.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;")


def _prose(view: CaseView, part: Prose, ids: Collection[str]) -> str:
    source, page = f"cases/{view.id}.md", f"cases/{view.id}/index.md"
    return adjusted(part.text.strip("\n"), source=source, page=page, ids=ids)


def _block(view: CaseView, block: Block, override: Any) -> str:
    name, facts = BLOCKS[block.kind]
    return _section(name, facts(view, block), override)


def _section(name: str, facts: Mapping[str, Any] | None, override: Any) -> str:
    return "" if facts is None else render(f"sections/{name}.html", facts, override=override)
