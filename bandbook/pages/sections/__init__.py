"""The sections of a case page.

The folder's rule: one file a section with ``facts`` (what its template needs, or ``None`` when it does not apply), its
template of the same name in ``site_templates/sections``, one line in :data:`SECTIONS` or, for what stands where a block
stands, in :data:`BLOCKS`.
"""

from bandbook.pages.sections import entry, head, provenance, system, trouble, values, workings

#: Before the author's text, in order.
TOP = (("head", head.facts), ("trouble", trouble.facts))
#: After it, in order.
BOTTOM = (("provenance", provenance.facts),)
#: Where a block stands, by its kind.
BLOCKS = {
    "system": ("system", system.facts),
    "study": ("entry", entry.facts),
    "reference": ("values", values.facts),
    "recorded": ("values", values.facts),
    "workings": ("workings", workings.facts),
}
#: Every section, in the order of the page.
SECTIONS = (*TOP, *dict.fromkeys(BLOCKS.values()), *BOTTOM)

__all__ = ["BLOCKS", "BOTTOM", "SECTIONS", "TOP"]
