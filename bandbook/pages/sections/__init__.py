"""The sections of a case page.

The folder's rule: one file a section with ``facts`` (what its template needs, or ``None`` when it does not apply), its
template of the same name in ``site_templates/sections``, one line in :data:`TOP`, :data:`BOTTOM` or, for what stands
where a block stands, in :data:`BLOCKS`; :data:`AFTER_BLOCK` follows every block.
"""

from bandbook.pages.sections import broken, entry, head, mishap, provenance, system, trouble, values, workings

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
#: In the place of a block that could not be read.
BROKEN = ("broken", broken.facts)
#: Below a block, when something is wrong with it.
AFTER_BLOCK = ("mishap", mishap.facts)
#: Every section, in the order of the page.
SECTIONS = (*TOP, *dict.fromkeys(BLOCKS.values()), BROKEN, AFTER_BLOCK, *BOTTOM)

__all__ = ["AFTER_BLOCK", "BLOCKS", "BOTTOM", "BROKEN", "SECTIONS", "TOP"]
