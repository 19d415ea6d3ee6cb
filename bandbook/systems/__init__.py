"""The forms in which an author writes a system down, from checked parameters to a Model.

The folder's rule: one file a form (its fields, what the fields cannot see, its builder), one line in :data:`FORMS`.
"""

from bandbook.systems.built_by import BUILT_BY
from bandbook.systems.form import COMMON, Form
from bandbook.systems.named_lattice import NAMED_LATTICE
from bandbook.systems.written_out import WRITTEN_OUT

#: Every form, in the order of the manual.
FORMS: tuple[Form, ...] = (NAMED_LATTICE, WRITTEN_OUT, BUILT_BY)

__all__ = ["COMMON", "FORMS", "Form"]
