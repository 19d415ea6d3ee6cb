"""Relative links in an author's Markdown, adjusted to where the page stands."""

import posixpath
import re
from collections.abc import Collection
from dataclasses import dataclass
from urllib.parse import quote, unquote

#: Code and comments, in which nothing is a link.
_APART = re.compile(
    r"(?ms)^ {0,3}(?P<fence>`{3,}|~{3,})[^\n]*$.*?(?:^ {0,3}(?P=fence)[`~]*[ \t]*$|\Z)"
    r"|(?<!`)(?P<ticks>`+)(?!`)(?:(?!\n[ \t]*\n).)+?(?<!`)(?P=ticks)(?!`)"
    r"|<!--.*?-->"
)
_INLINE = re.compile(r"(\]\([ \t]*)(<[^<>\n]*>|[^\s()<>]+(?:\([^\s()]*\)[^\s()<>]*)*)(?=[\s)])")
_DEFINITION = re.compile(r"(?m)^( {0,3}\[(?!\^)[^\]\n]+\]:[ \t]+)(<[^<>\n]*>|\S+)")
_HTML = re.compile(r"(<(?:a|img|source|video|audio|iframe)\b[^<>]*?\s(?:href|src)=)(\"[^\"\n]*\"|'[^'\n]*')")
_ELSEWHERE = re.compile(r"[a-z][a-z0-9+.-]*:|/|#", flags=re.IGNORECASE)


@dataclass(frozen=True)
class _Place:
    """Where a text was written and where it is read."""

    source: str
    page: str
    ids: Collection[str]

    def page_of(self, aim: str) -> str:
        """Return the page that a file of the content folder became, or the file itself."""
        name, ending = posixpath.splitext(aim)
        if aim.startswith("cases/") and ending == ".md" and name.removeprefix("cases/") in self.ids:
            return f"{name}/index.md"
        if aim.startswith("parameters/") and ending == ".toml":
            return f"{name}/index.md"
        return "sources/index.md" if aim == "sources.bib" else aim

    def moved(self, target: str, *, is_html: bool = False) -> str:
        """Return a link's target as seen from the page."""
        path, mark, rest = target.partition("#")
        if not path or _ELSEWHERE.match(path):
            return target
        plain = unquote(path)
        aim = self.page_of(posixpath.normpath(posixpath.join(posixpath.dirname(self.source), plain)))
        found = posixpath.relpath(aim, posixpath.dirname(self.page) or ".") + ("/" if plain.endswith("/") else "")
        if is_html and found.endswith(".md"):
            found = found.removesuffix(".md") + ".html"
        return (quote(found, safe="/!$&'()*+,;=:@~?") if plain != path else found) + mark + rest


def adjusted(text: str, *, source: str, page: str, ids: Collection[str]) -> str:
    """Return Markdown whose relative links lead to the same places from its page.

    Links to a case's file lead to its page, those to a parameter set or to ``sources.bib`` likewise. Code and comments
    are left alone.

    Args:
        text: The Markdown.
        source: Path of its file below the content folder.
        page: Path of its page in the tree.
        ids: Ids of the cases that have a page.

    >>> adjusted("[b](b.md)", source="cases/a.md", page="cases/a/index.md", ids=["a", "b"])
    '[b](../b/index.md)'
    """
    place = _Place(source, page, ids)
    out, done = [], 0
    for apart in _APART.finditer(text):
        out += [_plain(text[done : apart.start()], place), apart[0]]
        done = apart.end()
    return "".join([*out, _plain(text[done:], place)])


def _plain(text: str, place: _Place) -> str:
    """Return a text without code, with its links adjusted."""

    def markdown(match: re.Match[str]) -> str:
        target = match[2]
        is_bracketed = target.startswith("<")
        moved = place.moved(target[1:-1] if is_bracketed else target)
        return match[1] + (f"<{moved}>" if is_bracketed else moved)

    def raw(match: re.Match[str]) -> str:
        mark = match[2][0]
        return f"{match[1]}{mark}{place.moved(match[2][1:-1], is_html=True)}{mark}"

    return _HTML.sub(raw, _DEFINITION.sub(markdown, _INLINE.sub(markdown, text)))
