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
_NAMES: Final = ("mkdocs.yml", "mkdocs.yaml")
_KEYS: Final = {"docs_dir": "content", "site_dir": "site", "site_name": "Logbook"}
#: So many files may inherit from one another.
_MOST_INHERITED: Final = 10


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
        for name in _NAMES:
            if (folder / name).is_file():
                return folder / name
    raise _no_book(f"there is no mkdocs.yml in {start} or above")


def read_settings(book: Path | None, start: Path) -> Settings:
    """Read the settings of the book at ``book``, or in ``start`` or above it.

    Args:
        book: Its mkdocs.yml or the folder of that; relative to ``start``.
        start: The current folder.

    Raises:
        AuthorError: There is no book, its mkdocs.yml cannot be read, or an option is wrong.
    """
    path = _named(start.resolve() / book) if book else find_config(start)
    whole = _load(path)
    texts = {}
    for key, default in _KEYS.items():
        texts[key] = default if whole.get(key) is None else whole[key]
        if not isinstance(texts[key], str):
            found = f"{key} is no text"
            raise AuthorError([Problem(found, "a text", "put it in quotes").at(path.name, line_of(path, key))])
    options = _options(whole.get("plugins"), path)
    docs, site = texts["docs_dir"], texts["site_dir"]
    return settings_from(path, options, docs_dir=docs, site_dir=site, title=texts["site_name"])


def settings_from(
    config_file: Path, options: Mapping[str, Any], *, docs_dir: str, site_dir: str, title: str = "Logbook"
) -> Settings:
    """Return the settings of a book whose mkdocs.yml someone else has read.

    Args:
        config_file: mkdocs.yml.
        options: What stands under ``plugins: - bandbook:``.
        docs_dir: The content folder; absolute, or relative to mkdocs.yml.
        site_dir: The folder of the web pages, likewise.
        title: The site's name.

    Raises:
        AuthorError: An option is unknown or wrong, or the content folder is missing or holds the site's.
    """
    config_file = config_file.resolve()
    root = config_file.parent
    checked, problems = check(OPTIONS, options)
    content, site = _folder(root, docs_dir), _folder(root, site_dir)
    if not content.is_dir():
        found = f'the content folder "{docs_dir}" does not exist'
        allowed = "docs_dir names the folder of cases/, content by default"
        problems.append(Problem(found, allowed, "make it, or correct docs_dir", ("docs_dir",)))
    if content.is_relative_to(site) or site.is_relative_to(content):
        found = f'the folders "{docs_dir}" and "{site_dir}" lie one inside the other'
        problems.append(Problem(found, "web pages stand apart from the content", "correct site_dir", ("site_dir",)))
    if problems:
        raise AuthorError(
            [problem.at(config_file.name, line_of(config_file, str(problem.key[0]))) for problem in problems]
        )
    return Settings(root, config_file, title, content, site, checked["timeout"])


def _folder(root: Path, name: str) -> Path:
    """Return a folder that mkdocs.yml names, links followed; of links that go round in a circle, the first."""
    try:
        return (root / name).resolve()
    except (OSError, RuntimeError, ValueError):
        return root / name


def line_of(config_file: Path, key: str) -> int:
    """Return the line of a top-level key, or of an option of the plugin; 1 where it is not written down."""
    import yaml

    try:
        node = yaml.compose(config_file.read_text(encoding="utf-8-sig"), Loader=yaml.SafeLoader)
    except (OSError, ValueError, RecursionError, yaml.YAMLError):
        return 1
    ahead: list[Any] = [node]
    lines: dict[str, int] = {}
    while ahead:
        node = ahead.pop()
        for entry in node.value if isinstance(node, yaml.CollectionNode) else ():
            name, value = entry if isinstance(entry, tuple) else (None, entry)
            is_on_the_way = name is None or name.value in {"plugins", "bandbook"}
            if name is not None:
                lines.setdefault(str(name.value), name.start_mark.line + 1)
            ahead += [value] if is_on_the_way else []
    return lines.get(key, lines.get("plugins", 1))


def _no_book(found: str) -> AuthorError:
    return AuthorError([Problem(found, "a book has one", "call bandbook start FOLDER, or name it with --book FILE")])


def _named(path: Path) -> Path:
    """Return the mkdocs.yml that a path means."""
    if path.is_dir():
        path = next((path / name for name in _NAMES if (path / name).is_file()), path / _NAMES[0])
    if not path.exists():
        raise _no_book(f"there is no file {path}")
    return path


def _load(path: Path, depth: int = 0) -> dict[str, Any]:
    """Return what mkdocs.yml says, with what it inherits; tags that only MkDocs knows are read as nothing."""
    import yaml

    class Loader(yaml.SafeLoader):
        """Reads a tag that only MkDocs knows as nothing."""

    Loader.add_multi_constructor("", lambda *_: None)
    try:
        whole = yaml.load(path.read_text(encoding="utf-8-sig"), Loader=Loader)  # noqa: S506 - a SafeLoader underneath
    except yaml.YAMLError as error:
        mark = getattr(error, "problem_mark", None)
        found = f"it is no YAML ({getattr(error, 'problem', None) or getattr(error, 'reason', error)})"
        line = mark.line + 1 if mark else 1
        raise AuthorError([Problem(found, "YAML", "correct the line").at(path.name, line)]) from error
    except (OSError, ValueError, RecursionError) as error:
        found = f"it cannot be read ({getattr(error, 'strerror', None) or error})"
        raise AuthorError([Problem(found, "YAML in a UTF-8 file", "correct it").at(path.name, 1)]) from error
    if not isinstance(whole, dict):
        raise AuthorError([Problem("it holds no settings", "keys and values", "add site_name").at(path.name, 1)])
    parent = whole.pop("INHERIT", None)
    if isinstance(parent, str) and depth < _MOST_INHERITED:
        return _merged(_load(path.parent / parent, depth + 1), whole)
    return dict(whole)


def _merged(below: Mapping[str, Any], above: Mapping[str, Any]) -> dict[str, Any]:
    """Return settings laid over others as MkDocs lays them: tables key by key, anything else replaced."""
    both = {
        key: _merged(below[key], value) if isinstance(value, dict) and isinstance(below.get(key), dict) else value
        for key, value in above.items()
    }
    return {**below, **both}


def _options(plugins: Any, path: Path) -> dict[str, Any]:
    """Return the plugin's options.

    Raises:
        AuthorError: The plugin is not among the plugins, or what stands there is no table.
    """
    entries = [{name: value} for name, value in plugins.items()] if isinstance(plugins, dict) else plugins
    for entry in entries if isinstance(entries, list) else ():
        if entry == "bandbook":
            return {}
        if isinstance(entry, dict) and "bandbook" in entry:
            return _table(entry["bandbook"], path)
    found = "the plugin bandbook is not among the plugins"
    problem = Problem(found, "a book has it", "add - bandbook under plugins:", ("plugins",))
    raise AuthorError([problem.at(path.name, line_of(path, "plugins"))])


def _table(options: Any, path: Path) -> dict[str, Any]:
    if options is None:
        return {}
    if isinstance(options, dict):
        return {str(key): value for key, value in options.items()}
    problem = Problem("the options are no table", "keys and values", "write bandbook: and below it timeout: 600")
    raise AuthorError([problem.at(path.name, line_of(path, "bandbook"))])
