"""The MkDocs plugin: hands the page tree over, and nothing else; and what the command calls to build the site."""

from bandbook.website.build import build_site, check_folder
from bandbook.website.plugin import BandbookPlugin

__all__ = ["BandbookPlugin", "build_site", "check_folder"]
