"""SVG without what nobody needs: names that nothing refers to, empty groups, the same look written on every mark."""

import re
from typing import Final

_REFERRED: Final = re.compile(r'(?:href="#|url\(#)([^")]+)')
_ID: Final = re.compile(r' id="([^"]+)"')
_EMPTY: Final = re.compile(r"<g(?: [^>]*)?/>\s*|<g(?: [^>]*)?>\s*</g>\s*")
_PATH: Final = re.compile(r' d="([^"]*)"')
_MARKS: Final = re.compile(r"<g((?: [^>]*)?)>((?:\s*<use [^>]*/>){2,}\s*)</g>")
_NUMBER: Final = re.compile(r"-?\d+\.\d+")
#: Points of a path above which they are written to a tenth.
MOST_EXACT: Final = 60
_STYLE: Final = re.compile(r' style="([^"]*)"')


def slimmed(svg: str) -> str:
    """Return the same picture in fewer bytes.

    Args:
        svg: As matplotlib saves it.

    >>> slimmed('<svg><g id="a"><path id="m" d="M 0 0 L 1 1 "/><g id="b"/></g><use xlink:href="#m"/></svg>')
    '<svg><g><path id="m" d="M0 0L1 1"/></g><use xlink:href="#m"/></svg>'
    """
    referred = set(_REFERRED.findall(svg))
    svg = _ID.sub(lambda found: found[0] if found[1] in referred else "", svg)
    svg = _PATH.sub(lambda found: f' d="{_joined(found[1])}"', svg)
    while (fewer := _EMPTY.sub("", svg)) != svg:
        svg = fewer
    return re.sub(r">\s*\n\s*<", ">\n<", _MARKS.sub(_hoisted, svg))


def _joined(path: str) -> str:
    """Return a path on one line; of a long one a tenth of a point is as fine as it is seen."""
    path = re.sub(r"\s*([A-Za-z])\s*", r"\1", " ".join(path.split()))
    if path.count(" ") <= MOST_EXACT:
        return path
    return _NUMBER.sub(lambda number: f"{round(float(number[0]), 1) + 0.0:g}", path)


def _hoisted(group: re.Match[str]) -> str:
    """Return marks of one look with that look on their group."""
    styles = set(_STYLE.findall(group[2]))
    if len(styles) != 1 or " style=" in group[1] or group[2].count(" style=") != group[2].count("<use "):
        return group[0]
    return f'<g{group[1]} style="{styles.pop()}">{_STYLE.sub("", group[2])}</g>'
