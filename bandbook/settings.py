"""The book's options, read once for command and plugin."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

from bandbook.errors import AuthorError, Problem
from bandbook.parameters import Field, check

#: What may stand under ``plugins: - bandbook:`` in mkdocs.yml.
OPTIONS: Final = (
    Field("timeout", "number", "longest time of one notebook cell, in seconds", default=600.0, above=0.0),
)


@dataclass(frozen=True)
class Settings:
    """Where a book lies and what it allows.

    Attributes:
        root: The folder of mkdocs.yml.
        config_file: mkdocs.yml.
        title: The site's name.
        content: Case files, sets, sources, the front page's words.
        site: Where ``bind`` writes the web pages.
        timeout: Longest time of one notebook cell, s.
    """

    root: Path
    config_file: Path
    title: str
    content: Path
    site: Path
    timeout: float = 600.0

    @property
    def store(self) -> Path:
        """The store of finished runs and the page tree."""
        return self.root / ".bandbook"

    @property
    def templates(self) -> Path:
        """The book's own templates, which replace the package's of the same name."""
        return self.root / "site_templates"


def find_config(start: Path) -> Path:
    """Return the mkdocs.yml in a folder or above it.

    Raises:
        AuthorError: There is none.
    """
    for folder in (start.resolve(), *start.resolve().parents):
        for name in ("mkdocs.yml", "mkdocs.yaml"):
            if (folder / name).is_file():
                return folder / name
    found = f"there is no mkdocs.yml in {start} or above"
    raise AuthorError([Problem(found, "a book has one", "call bandbook start FOLDER, or name it with --book FILE")])


def read_settings(book: Path | None, start: Path) -> Settings:
    """Read the settings of the book at ``book``, or in ``start`` or above it.

    Raises:
        AuthorError: There is no book, its mkdocs.yml cannot be read, or an option is wrong.
    """
    path = (book.resolve() if book.is_absolute() else (start / book).resolve()) if book else find_config(start)
    if path.is_dir():
        path = path / "mkdocs.yml"
    whole = _load(path)
    options = _options(whole, path)
    return settings_from(
        path,
        options,
        docs_dir=str(whole.get("docs_dir", "content")),
        site_dir=str(whole.get("site_dir", "site")),
        title=str(whole.get("site_name", "Logbook")),
    )


def settings_from(
    config_file: Path, options: Mapping[str, Any], *, docs_dir: str, site_dir: str, title: str = "Logbook"
) -> Settings:
    """Return the settings of a book whose mkdocs.yml someone else has read.

    Raises:
        AuthorError: An option is unknown or wrong, or the content folder is missing.
    """
    checked, problems = check(OPTIONS, options)
    root = config_file.resolve().parent
    content = (root / docs_dir).resolve()
    if not content.is_dir():
        found = f'the content folder "{docs_dir}" does not exist'
        problems.append(Problem(found, "docs_dir names the folder of the cases", "make it, or correct docs_dir"))
    if problems:
        raise AuthorError([problem.at(config_file.name, 1) for problem in problems])
    return Settings(root, config_file.resolve(), title, content, (root / site_dir).resolve(), checked["timeout"])


def _load(path: Path) -> dict[str, Any]:
    import yaml

    class Loader(yaml.SafeLoader):
        """Reads a tag that only MkDocs knows as nothing."""

    Loader.add_multi_constructor("", lambda *_: None)
    try:
        text = path.read_text(encoding="utf-8-sig")
        whole = yaml.load(text, Loader=Loader)  # noqa: S506 - a SafeLoader underneath
    except (OSError, UnicodeDecodeError) as error:
        found = f"it cannot be read: {error}"
        raise AuthorError([Problem(found, "a UTF-8 file", "name an mkdocs.yml").at(str(path), 1)]) from error
    except yaml.YAMLError as error:
        mark = getattr(error, "problem_mark", None)
        found = f"it is no YAML: {getattr(error, 'problem', None) or error}"
        line = mark.line + 1 if mark else 1
        raise AuthorError([Problem(found, "YAML", "correct it").at(path.name, line)]) from error
    if not isinstance(whole, dict):
        raise AuthorError([Problem("it holds no settings", "keys and values", "add site_name").at(path.name, 1)])
    return whole


def _options(whole: Mapping[str, Any], path: Path) -> dict[str, Any]:
    for entry in whole.get("plugins") or ():
        if entry == "bandbook":
            return {}
        if isinstance(entry, dict) and "bandbook" in entry:
            return dict(entry["bandbook"] or {})
    found = "the plugin bandbook is not among the plugins"
    raise AuthorError([Problem(found, "a book has it", "add - bandbook under plugins:").at(path.name, 1)])
