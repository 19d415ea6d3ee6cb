"""An adapter between MkDocs and the page tree."""

import html
import logging
import re
from pathlib import Path
from typing import Any

from mkdocs.config import config_options
from mkdocs.config.base import Config
from mkdocs.plugins import BasePlugin
from mkdocs.structure.files import File, Files, InclusionLevel

from bandbook import workflow
from bandbook.errors import AuthorError
from bandbook.pages import package_templates
from bandbook.settings import settings_from
from bandbook.website.navigation import navigation

log = logging.getLogger("mkdocs.plugins.bandbook")
_PICTURE = re.compile(r'<img data-inline(?:="")? src="([^"]+)" alt="[^"]*"\s*/?>')
_ASSETS = "assets/bandbook"
#: A file of every site that is built, by which its folder is known again.
MARK = ".bound"
_LIGHT = {"media": "(prefers-color-scheme: light)", "scheme": "default"}
_DARK = {"media": "(prefers-color-scheme: dark)", "scheme": "slate"}
#: Key of the theme → what it holds when a book says nothing, and what we put there: no font from another host, our
#: mark, light and dark.
_THEME: dict[str, tuple[Any, Any]] = {
    "font": ({"text": "Roboto", "code": "Roboto Mono"}, False),
    "favicon": ("assets/images/favicon.png", f"{_ASSETS}/mark.svg"),
    "palette": (
        None,
        [
            {**_LIGHT, "toggle": {"icon": "material/weather-night", "name": "Dark"}},
            {**_DARK, "toggle": {"icon": "material/weather-sunny", "name": "Light"}},
        ],
    ),
}


class BandbookOptions(Config):
    """The plugin's options; ``settings`` checks them."""

    timeout = config_options.Optional(config_options.Type((int, float)))


class BandbookPlugin(BasePlugin[BandbookOptions]):
    """Puts the page tree in the place of the content folder.

    Attributes:
        tree: The page tree; given by the command, otherwise written here.
    """

    tree: Path | None = None

    def on_startup(self, **_: Any) -> None:
        """Stay for all builds of one ``serve``."""

    def on_config(self, config: Any) -> Any:
        """Add our style and theme parts; without a command, read, run and write the pages first."""
        config.use_directory_urls = False  # pages open from disk, where a folder has no index
        _dress(config)
        self._tree = self.tree if self.tree is not None else self._written(config)
        return config

    def _written(self, config: Any) -> Path:
        from mkdocs.exceptions import PluginError

        options = {name: value for name, value in dict(self.config).items() if value is not None}
        try:
            settings = settings_from(
                Path(config.config_file_path), options, docs_dir=config.docs_dir, site_dir=config.site_dir,
                title=config.site_name,
            )  # fmt: skip
            finished = workflow.run(settings)
            tree = workflow.write_pages(settings, finished)
        except AuthorError as error:
            raise PluginError(str(error)) from error
        for message in finished.messages:
            log.warning(message)
        return tree

    def on_files(self, files: Files, config: Any) -> Files:
        """Return the theme's files and those of the page tree; cases stay out of the navigation."""
        kept = [file for file in files if Path(file.src_dir or "") != Path(config.docs_dir)]
        ours = [
            File(
                path.relative_to(self._tree).as_posix(), str(self._tree), config.site_dir, use_directory_urls=False,
                inclusion=_inclusion(path, self._tree),
            )
            for path in sorted(self._tree.rglob("*"))
            if path.is_file()
        ]  # fmt: skip
        if config.nav is None:
            config.nav = navigation(file.src_uri for file in ours)
        return Files([*kept, *ours])

    def on_post_page(self, output: str, page: Any, config: Any) -> str:
        """Put each marked figure in the page itself, so that it follows light and dark."""
        del config
        folder, tree = Path(page.file.abs_src_path).parent, self._tree.resolve()

        def inline(match: re.Match[str]) -> str:
            picture = (folder / html.unescape(match[1])).resolve()
            is_ours = picture.is_relative_to(tree) and picture.suffix == ".svg" and picture.is_file()
            return picture.read_text(encoding="utf-8") if is_ours else match[0]

        return _PICTURE.sub(inline, output)

    def on_post_build(self, *, config: Any) -> None:
        """Mark the folder as one that may be built into again."""
        (Path(config.site_dir) / MARK).write_text(
            "Pages of a book; replaced when it is bound again.\n", encoding="utf-8"
        )


def _inclusion(path: Path, tree: Path) -> Any:
    """Return that a case or a parameter set stands outside the navigation, whose cost is the square of its length."""
    folder, *below = path.relative_to(tree).parts
    is_apart = folder == "cases" or (folder == "parameters" and len(below) > 1)
    return InclusionLevel.NOT_IN_NAV if is_apart else InclusionLevel.UNDEFINED


def _dress(config: Any) -> None:
    """Add style sheet, script and theme parts, ours below the book's own; nothing is asked of another host."""
    theme, own = config.theme, Path(config.config_file_path).parent / "site_templates"
    config.extra_css.insert(0, f"{_ASSETS}/book.css")
    config.extra_javascript.insert(0, f"{_ASSETS}/book.js")
    for parts in dict.fromkeys((package_templates() / "theme", own / "theme")):
        if parts.is_dir():
            theme.dirs.insert(1 if theme.custom_dir else 0, str(parts))
    for key, (bare, ours) in _THEME.items():
        if theme.get(key) == bare:
            theme[key] = ours
    if own.is_dir():
        config.watch.append(str(own))
