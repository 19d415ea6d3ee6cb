"""One case's page: the first screen, the author's text with results in place, provenance."""

import html
import json
from collections.abc import Collection, Mapping
from typing import Any

from bandbook.cases import Block, Prose
from bandbook.pages.links import adjusted
from bandbook.pages.mathml import with_mathml
from bandbook.pages.page import CaseView
from bandbook.pages.sections import AFTER_BLOCK, BLOCKS, BOTTOM, BROKEN, TOP
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
    """Return a page's front matter: its title as HTML, which is how MkDocs takes it, and what the page is about."""
    facts: dict[str, Any] = {"title": html.escape(title, quote=False)}
    if view is not None:
        facts |= {"case": view.id, "run": view.status}
    lines = [f"{key}: {json.dumps(value, ensure_ascii=False)}\n" for key, value in facts.items()]
    return "---\n" + "".join(lines) + "---"


def heading(title: str) -> str:
    r"""Return a title as Markdown heading in which nothing has a meaning of its own.

    >>> print(heading("a_b <i> 2:1"))
    # a\_b &lt;i&gt; 2&#58;1
    """
    return "# " + "".join(_escaped(sign) for sign in title)


def _escaped(sign: str) -> str:
    """Return one sign of a title: a backslash where every Markdown knows it, otherwise an entity."""
    if sign in "\\`*_{}[]#+!":
        return f"\\{sign}"
    return f"&#{ord(sign)};" if sign in "|~^=:$" else html.escape(sign, quote=False)


def _prose(view: CaseView, part: Prose, ids: Collection[str]) -> str:
    source, page = f"cases/{view.id}.md", f"cases/{view.id}/index.md"
    return with_mathml(adjusted(part.text.strip("\n"), source=source, page=page, ids=ids))


def _block(view: CaseView, block: Block, override: Any) -> str:
    is_unreadable = block.is_broken and block.kind != "workings"
    parts = [BROKEN if is_unreadable else BLOCKS[block.kind], AFTER_BLOCK]
    return "\n\n".join(filter(None, (_section(name, facts(view, block), override) for name, facts in parts)))


def _section(name: str, facts: Mapping[str, Any] | None, override: Any) -> str:
    return "" if facts is None else render(f"sections/{name}.html", facts, override=override)
