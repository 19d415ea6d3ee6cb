"""An adapter between MkDocs and the page tree."""

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
from bandbook.settings import settings_from

log = logging.getLogger("mkdocs.plugins.bandbook")
_PICTURE = re.compile(r'<img data-inline(?:="")? src="([^"]+)" alt="[^"]*"\s*/?>')


def _inclusion(path: Path, tree: Path) -> Any:
    return InclusionLevel.NOT_IN_NAV if path.is_relative_to(tree / "cases") else InclusionLevel.UNDEFINED


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
        """Add the style sheet; without a command, read, run and write the pages first."""
        self._is_given = self.tree is not None
        if not self._is_given:
            self._write(config)
        config.extra_css.append("assets/bandbook/book.css")
        return config

    def _write(self, config: Any) -> None:
        from mkdocs.exceptions import PluginError

        options = {name: value for name, value in dict(self.config).items() if value is not None}
        try:
            settings = settings_from(
                Path(config.config_file_path), options, docs_dir=config.docs_dir, site_dir=config.site_dir,
                title=config.site_name,
            )  # fmt: skip
            finished = workflow.run(settings)
            self._tree = workflow.write_pages(settings, finished)
        except AuthorError as error:
            raise PluginError(str(error)) from error
        for message in finished.messages:
            log.warning(message)

    def on_files(self, files: Files, config: Any) -> Files:
        """Return the theme's files and those of the page tree; cases stay out of the navigation."""
        tree = self.tree if self.tree is not None else self._tree
        kept = [file for file in files if Path(file.src_dir or "") != Path(config.docs_dir)]
        ours = [
            File(
                path.relative_to(tree).as_posix(), str(tree), config.site_dir, use_directory_urls=False,
                inclusion=_inclusion(path, tree),
            )
            for path in sorted(tree.rglob("*"))
            if path.is_file()
        ]  # fmt: skip
        return Files([*kept, *ours])

    def on_post_page(self, output: str, page: Any, config: Any) -> str:
        """Put each marked figure in the page itself, so that it follows light and dark."""
        del config
        folder = Path(page.file.abs_src_path).parent

        def inline(match: re.Match[str]) -> str:
            picture = folder / match[1]
            return picture.read_text(encoding="utf-8") if picture.is_file() else match[0]

        return _PICTURE.sub(inline, output)
