"""Case files, parameter sets and sources: from text to checked parameters.

The folder's rule: reading collects what is wrong and never raises; every problem carries its file and line; nothing of
an author's Python is executed. What systems and questions are is asked of a :class:`Vocabulary`.
"""

from bandbook.cases.book import Book, read_book
from bandbook.cases.check import CheckedCase, Vocabulary, check_case
from bandbook.cases.fences import Block, Prose
from bandbook.cases.front import FrontMatter
from bandbook.cases.read import Case, case_of, read_case
from bandbook.cases.references import Reference
from bandbook.cases.resolve import ParameterUse
from bandbook.cases.sets import ParameterSet, ParameterValue, read_parameter_set
from bandbook.cases.sources import Source, Sources, read_sources

__all__ = [
    "Block",
    "Book",
    "Case",
    "CheckedCase",
    "FrontMatter",
    "ParameterSet",
    "ParameterUse",
    "ParameterValue",
    "Prose",
    "Reference",
    "Source",
    "Sources",
    "Vocabulary",
    "case_of",
    "check_case",
    "read_book",
    "read_case",
    "read_parameter_set",
    "read_sources",
]
