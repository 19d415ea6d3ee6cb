"""Pages: from records to a plain tree of Markdown, SVG, CSV and JSON.

The folder's rule: a page is made from a view and templates, knows nothing of the generator that turns the tree into a
site, and escapes everything that an author wrote outside prose.
"""

from bandbook.pages.mathml import mistakes as formula_mistakes
from bandbook.pages.page import BookView, CaseView
from bandbook.pages.templates import package_templates
from bandbook.pages.tree import write_tree

__all__ = ["BookView", "CaseView", "formula_mistakes", "package_templates", "write_tree"]
