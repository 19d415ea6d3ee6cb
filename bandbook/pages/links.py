"""Relative links in an author's Markdown, adjusted to where the page stands."""

import posixpath
import re
from collections.abc import Collection

_LINK = re.compile(r"(\]\()([^)\s]+)((?:\s+\"[^\"]*\")?\))")
_CODE = re.compile(r"(```.*?```|~~~.*?~~~|`[^`\n]*`)", flags=re.DOTALL)


def adjusted(text: str, *, source: str, page: str, ids: Collection[str]) -> str:
    """Return Markdown whose relative links lead to the same places from its page.

    Args:
        text: The Markdown.
        source: Path of its file below the content folder.
        page: Path of its page in the tree.
        ids: Ids of the cases, whose files are pages of their own.

    >>> adjusted("[b](b.md)", source="cases/a.md", page="cases/a/index.md", ids=["a", "b"])
    '[b](../b/index.md)'
    """

    def one(match: re.Match[str]) -> str:
        return match[1] + _moved(match[2], source=source, page=page, ids=ids) + match[3]

    parts = _CODE.split(text)
    return "".join(part if number % 2 else _LINK.sub(one, part) for number, part in enumerate(parts))


def _moved(target: str, *, source: str, page: str, ids: Collection[str]) -> str:
    path, mark, rest = target.partition("#")
    if not path or re.match(r"[a-z][a-z0-9+.-]*:|/", path, flags=re.IGNORECASE):
        return target
    aim = posixpath.normpath(posixpath.join(posixpath.dirname(source), path))
    identity = aim.removeprefix("cases/").removesuffix(".md")
    if aim.startswith("cases/") and aim.endswith(".md") and identity in ids:
        aim = f"cases/{identity}/index.md"
    return posixpath.relpath(aim, posixpath.dirname(page) or ".") + mark + rest
