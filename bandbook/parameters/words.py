"""Words of messages: near names, short lists, a value as its author would see it."""

import difflib
import math
import re
import unicodedata
from collections.abc import Collection, Mapping
from typing import Final

from bandbook.errors import Problem, printable

#: Study, system and site names.
NAME: Final = re.compile(r"[A-Za-z][A-Za-z0-9_]*\Z")
#: Names that a message lists before it says how many more there are.
MOST_LISTED: Final = 24


def near(word: str, known: Collection[str]) -> str:
    """Return a question that names near words, or nothing.

    >>> near("bata", ["alpha", "beta"])
    'did you mean "beta"?'
    """
    found = nearest(word, known)
    return "did you mean " + " or ".join(f'"{name}"' for name in found) + "?" if found else ""


def nearest(word: str, known: Collection[str]) -> list[str]:
    """Return the up to three known words that are near a word, the nearest first.

    >>> nearest("bata", ["alpha", "beta"]), nearest("x", ["alpha"])
    (['beta'], [])
    """
    lowered = {name.lower(): name for name in known}
    return [lowered[name] for name in difflib.get_close_matches(word.lower()[:80], list(lowered), n=3, cutoff=0.6)]


def one_of(word: str, known: Collection[str], what: str) -> Problem:
    """Return the problem of a word that is not one of the known ones."""
    allowed = f"{what}s are " + listed([f'"{name}"' for name in known]) if known else f"there is no {what} yet"
    remedy = near(word, known) or f"use one of the {what}s that exist"
    return Problem(f'unknown {what} "{shortened(word)}"', allowed, remedy)


def listed(names: Collection[str]) -> str:
    """Return names with commas between them, the first of very many.

    >>> listed([f"A{number}" for number in range(5000)])[-30:]
    ', A21, A22, A23 and 4,976 more'
    """
    more = len(names) - MOST_LISTED
    return ", ".join(list(names)[:MOST_LISTED]) + (f" and {more:,} more" if more > 0 else "")


def shortened(text: str) -> str:
    r"""Return a text as one short line without signs that steer a terminal.

    >>> shortened("two\nlines"), len(shortened("x" * 1000))
    ('two\\nlines', 40)
    """
    return printable(text if len(text) <= 40 else text[:39] + "…")


def shown(value: object) -> str:
    """Return a value as TOML would show it, shortened.

    >>> shown(True), shown("2,5"), shown(10**400)
    ('the boolean true', 'the text "2,5"', 'a whole number of very many digits')
    """
    match value:
        case None:
            text = "nothing"
        case bool():
            text = f"the boolean {str(value).lower()}"
        case str():
            text = f'the text "{shortened(value)}"'
        case float() if not math.isfinite(value):
            text = f"the number {value}"
        case int() if abs(value) >= 10**30:
            text = "a whole number of very many digits"
        case Mapping():
            text = "a table"
        case list() | tuple():
            text = f"a list of {len(value)}"
        case _:
            text = shortened(str(value))
    return text


def plain_name(text: str) -> str:
    """Return the allowed name that is nearest to a text, or nothing.

    >>> plain_name("β short"), plain_name("Größe"), plain_name("1")
    ('beta_short', 'Grosse', '')
    """
    signs = []
    for sign in unicodedata.normalize("NFKD", text.strip()[:80].replace("ß", "ss")):
        greek = re.fullmatch(r"GREEK (?:SMALL|CAPITAL) LETTER (\w+)", unicodedata.name(sign, ""))
        signs.append(greek[1].lower() if greek else "_" if sign in " -." else sign)
    name = re.sub(r"[^A-Za-z0-9_]", "", "".join(signs))
    return name if NAME.match(name) else ""
