"""The page tree: a plain folder of Markdown, SVG, CSV and JSON that any generator could take."""

import json
import os
import shutil
import tempfile
from pathlib import Path

from bandbook.pages.case_page import case_page, front_matter
from bandbook.pages.links import adjusted
from bandbook.pages.mathml import with_mathml
from bandbook.pages.page import BookView, CaseView
from bandbook.pages.tables import catalogue, front, quantities_csv, set_pages, sources_page
from bandbook.pages.templates import package_templates

#: Folders of the content whose files become pages of another kind, or none.
APART = ("cases", "parameters", "data", "structures", "comparisons", "editions")


def write_tree(view: BookView, folder: Path) -> Path:
    """Write the page tree of a book; what has not changed is left alone, what has no page any more goes.

    Private cases have no page, and nothing of theirs is copied or named.

    Returns:
        The folder.
    """
    view = view.published
    files: dict[str, bytes] = {}
    ids = [case.id for case in view.cases]
    files |= _content(view.book.content, ids)
    files["index.md"] = files["index.md"].rstrip() + f"\n\n{front(view)}\n".encode()
    files |= _assets(view)
    pages = {**catalogue(view), **set_pages(view), **sources_page(view), **_reading(view)}
    files |= {path: text.encode() for path, text in pages.items()}
    for case in view.cases:
        files |= _case(case, ids, view)
    _replace(folder, files)
    return folder


def _content(content: Path, ids: list[str]) -> dict[str, bytes]:
    """Return the book's own words and pictures: front page, manual, files beside cases."""
    files: dict[str, bytes] = {"index.md": f"{front_matter('Front')}\n\n# Logbook\n".encode()}
    for path in sorted(content.rglob("*")):
        name = path.relative_to(content).as_posix()
        if not _is_ours(path, content) or any(part.startswith(".") for part in Path(name).parts):
            continue
        if name.endswith(".md") and name.split("/")[0] not in APART:
            text = path.read_text(encoding="utf-8-sig", errors="replace")
            files[name] = with_mathml(adjusted(text, source=name, page=name, ids=ids)).encode()
        elif not name.endswith((".md", ".toml", ".bib")) and name.split("/")[0] not in APART[1:]:
            files[name] = path.read_bytes()
    return files


def _is_ours(path: Path, content: Path) -> bool:
    """Return whether a path is a file inside the content folder, also after links of the file system."""
    return path.is_file() and path.resolve().is_relative_to(content.resolve())


def _assets(view: BookView) -> dict[str, bytes]:
    files = {}
    for root in (package_templates(), *([view.templates] if view.templates else [])):
        for path in sorted((root / "assets").rglob("*")):
            if path.is_file():
                files[f"assets/bandbook/{path.relative_to(root / 'assets').as_posix()}"] = path.read_bytes()
    return files


def _reading(view: BookView) -> dict[str, str]:
    if (view.book.content / "reading" / "index.md").is_file():
        return {}
    return {"reading/index.md": (package_templates() / "pages" / "reading.md").read_text(encoding="utf-8")}


def _case(case: CaseView, ids: list[str], view: BookView) -> dict[str, bytes]:
    place = f"cases/{case.id}"
    files = {f"{place}/index.md": case_page(case, ids=ids, override=view.templates).encode()}
    if case.record is None or case.result is None:
        return files
    record = json.dumps(case.record.as_dict(), indent=1, ensure_ascii=False) + "\n"
    files[f"{place}/record.json"] = record.encode()
    files[f"{place}/quantities.csv"] = quantities_csv(case.record).encode()
    for name in case.result.files:
        files[f"{place}/{name}"] = (case.result.folder / name).read_bytes()
    return files


def _replace(folder: Path, files: dict[str, bytes]) -> None:
    """Make a folder hold exactly these files; a file with the same bytes keeps its time."""
    folder.mkdir(parents=True, exist_ok=True)
    for path in sorted(folder.rglob("*"), reverse=True):
        name = path.relative_to(folder).as_posix()
        if path.is_file() and name not in files:
            path.unlink()
        elif path.is_dir() and not any(path.iterdir()):
            path.rmdir()
    for name, data in files.items():
        path = folder / name
        if path.is_dir():
            shutil.rmtree(path)
        if path.is_file() and path.read_bytes() == data:
            continue
        path.parent.mkdir(parents=True, exist_ok=True)
        handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=".tmp-")
        with os.fdopen(handle, "wb") as file:
            file.write(data)
        Path(temporary).chmod(0o644)
        Path(temporary).replace(path)
