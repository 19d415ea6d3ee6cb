"""Build the site of a book from its page tree, as the command does."""

import logging
from pathlib import Path
from typing import Any

from bandbook.errors import AuthorError, Problem
from bandbook.settings import Settings, line_of
from bandbook.website.plugin import MARK


def build_site(settings: Settings, tree: Path, *, site_dir: Path | None = None) -> Path:
    """Build the web pages from a page tree that is written already.

    Args:
        settings: The book.
        tree: Its page tree.
        site_dir: Where the pages go, instead of the book's ``site_dir``.

    Returns:
        The folder of the site.

    Raises:
        AuthorError: mkdocs.yml is wrong or does not name the plugin, MkDocs refuses the pages, or the folder holds
            something else.
    """
    from mkdocs.commands.build import build
    from mkdocs.config import load_config
    from mkdocs.exceptions import Abort, MkDocsException

    logging.getLogger("mkdocs").setLevel(logging.WARNING)
    check_folder(site_dir or settings.site)
    overrides: dict[str, Any] = {"site_dir": str(site_dir)} if site_dir else {}
    plugin: Any = None
    try:
        config = load_config(str(settings.config_file), **overrides)
        plugin = config.plugins.get("bandbook")
        if plugin is None:
            raise AuthorError([_missing_plugin(settings)])
        plugin.tree = tree
        config.plugins.on_startup(command="build", dirty=False)
        build(config)
        config.plugins.on_shutdown()
    except (MkDocsException, Abort) as error:
        found = f"the pages could not be built: {error}"
        problem = Problem(found, "MkDocs reads mkdocs.yml", "correct it").at(settings.config_file.name, 1)
        raise AuthorError([problem]) from error
    finally:
        if plugin is not None:
            plugin.tree = None  # MkDocs keeps the plugin for the next build of the same process
    return Path(config.site_dir)


def check_folder(folder: Path) -> Path:
    """Return a folder that pages may be written to, or raise: what it holds is replaced.

    Raises:
        AuthorError: It holds something that is no site of a book.
    """
    is_ours = not folder.exists() or (folder.is_dir() and ((folder / MARK).is_file() or not any(folder.iterdir())))
    if is_ours:
        return folder
    found = f"{folder} holds what is no site of a book" if folder.is_dir() else f"{folder} is a file"
    allowed = "a new or empty folder, or one that pages were bound into before, because what it holds is replaced"
    raise AuthorError([Problem(found, allowed, "name another folder, or empty this one yourself")])


def _missing_plugin(settings: Settings) -> Problem:
    problem = Problem(
        "the plugin bandbook is missing", "it puts the pages in the place of the content", 'add "- bandbook"'
    )
    return problem.below("plugins").at(settings.config_file.name, line_of(settings.config_file, "plugins"))
