"""What crosses back from a notebook: quantities, tables and figures; shared by both sides.

The folder's rule: an exhibit carries its own words (unit, meaning, caption, alternative text), written from its
numbers, and gives the same bytes for the same numbers.
"""

from bandbook.exhibits.answer import MIME, Answer, answer_bundle
from bandbook.exhibits.figure import Figure
from bandbook.exhibits.quantity import KINDS, Kind, Quantity, QuantityName, fixed, in_beta, typeset
from bandbook.exhibits.table import Column, Table

__all__ = [
    "KINDS",
    "MIME",
    "Answer",
    "Column",
    "Figure",
    "Kind",
    "Quantity",
    "QuantityName",
    "Table",
    "answer_bundle",
    "fixed",
    "in_beta",
    "typeset",
]
