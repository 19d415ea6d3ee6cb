"""The navigation of a book that writes down none: short, whatever the number of cases."""

from collections.abc import Iterable
from pathlib import PurePosixPath
from typing import Any

#: Page of the tree → its title in the navigation.
FIRST = {
    "index.md": "Front",
    "catalogue/index.md": "Catalogue",
    "parameters/index.md": "Parameter sets",
    "sources/index.md": "Sources",
    "reading/index.md": "Reading",
    "manual/index.md": "Manual",
}
#: Folders whose other pages are reached from a page above.
_APART = ("cases", "parameters")


def navigation(paths: Iterable[str]) -> list[Any]:
    """Return the pages of a tree as MkDocs takes a navigation: ours first, then the author's own, folder by folder.

    >>> navigation(["index.md", "cases/a/index.md", "notes.md", "talks/b.md"])
    [{'Front': 'index.md'}, 'notes.md', {'Talks': ['talks/b.md']}]
    """
    pages = sorted(path for path in paths if path.endswith(".md"))
    entries: list[Any] = [{title: path} for path, title in FIRST.items() if path in pages]
    folders: dict[str, list[str]] = {}
    for path in pages:
        top = PurePosixPath(path).parts[0]
        if path in FIRST or top in _APART:
            continue
        if top == path:
            entries.append(path)
        else:
            folders.setdefault(top, []).append(path)
    return [*entries, *({name.replace("-", " ").capitalize(): inside} for name, inside in folders.items())]
