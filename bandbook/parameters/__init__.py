"""Names, units and ranges of everything an author may write in a block, and one check that collects every mistake.

A family member (a lattice, a system form, a question) declares a tuple of :class:`Field`; :func:`check` reads a table
against it and returns the checked parameters, plain JSON, together with every :class:`Problem`.
"""

from bandbook.errors import Problem
from bandbook.parameters.field import MOST_CELLS, REQUIRED, Field, describe
from bandbook.parameters.from_set import FromSet
from bandbook.parameters.reading import KINDS, check, corrected
from bandbook.parameters.words import NAME, listed, near, nearest, one_of, plain_name, shortened, shown

__all__ = [
    "KINDS",
    "MOST_CELLS",
    "NAME",
    "REQUIRED",
    "Field",
    "FromSet",
    "Problem",
    "check",
    "corrected",
    "describe",
    "listed",
    "near",
    "nearest",
    "one_of",
    "plain_name",
    "shortened",
    "shown",
]
