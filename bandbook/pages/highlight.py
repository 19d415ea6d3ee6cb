"""Python source as HTML in which strings, comments, numbers and keywords are marked."""

import html
import io
import keyword
import token
import tokenize
from collections.abc import Iterator

_CLASSES = {
    tokenize.COMMENT: "comment",
    token.STRING: "string",
    token.NUMBER: "number",
}
Place = tuple[int, int]


def highlighted(source: str) -> str:
    """Return Python source escaped and marked; what cannot be read as Python is escaped only.

    >>> highlighted("x = '<'")
    'x = <span class="bb-string">&#x27;&lt;&#x27;</span>'
    """
    try:
        spans = [(kind, start, end) for kind, start, end in _spans(source) if start < end]
    except (tokenize.TokenError, SyntaxError, ValueError):
        return html.escape(source)
    lines = source.splitlines(keepends=True)
    offsets = [0]
    for line in lines:
        offsets.append(offsets[-1] + len(line))
    out, done = [], 0
    for kind, start, end in spans:
        first, last = offsets[start[0] - 1] + start[1], offsets[end[0] - 1] + end[1]
        out += [html.escape(source[done:first]), f'<span class="bb-{kind}">{html.escape(source[first:last])}</span>']
        done = last
    return "".join([*out, html.escape(source[done:])])


def _spans(source: str) -> Iterator[tuple[str, Place, Place]]:
    """Yield what is marked, and where it begins and ends."""
    for item in tokenize.generate_tokens(io.StringIO(source, newline="").readline):
        is_string = token.tok_name[item.type].startswith("FSTRING")
        if item.type in _CLASSES or is_string:
            yield _CLASSES.get(item.type, "string"), item.start, item.end
        elif item.type == token.NAME and keyword.iskeyword(item.string):
            yield "keyword", item.start, item.end
