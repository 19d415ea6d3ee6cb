"""What every command shares: the book it works on, how errors are told, and progress."""

import os
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import click

from bandbook.errors import AuthorError, BandbookError, Problem, printable
from bandbook.settings import Settings, read_settings

#: Where ``--help`` points for the meaning of an exit status.
EXIT_HELP = (
    "Exit: 0 done; 1 failing workings or a reference value disagrees; 2 an author's mistake; 3 the question makes no "
    "sense for the model; 4 a run timed out or died; 5 damaged bytes."
)
#: Goes to the start of a terminal's line and clears it.
CLEAR = "\r\033[K"


class Command(click.Command):
    r"""A command whose help keeps the lines of its example: ``\b`` stands above them in a raw docstring."""

    def format_help_text(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write the help."""
        self.help = (self.help or "").replace(r"\b", "\b")
        super().format_help_text(ctx, formatter)


class Door(click.Group):
    """A group of commands whose errors are told on stderr, never as a traceback."""

    def format_help_text(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write the help."""
        self.help = (self.help or "").replace(r"\b", "\b")
        super().format_help_text(ctx, formatter)

    def invoke(self, context: click.Context) -> Any:
        """Run the command; a book's own error becomes its message and its exit status."""
        try:
            return super().invoke(context)
        except BandbookError as error:
            tell(str(error))
            context.exit(error.exit_status)
        except KeyboardInterrupt:
            tell("interrupted; what was finished is kept, call the command again to go on")
            context.exit(130)
        except OSError as error:
            tell(
                f"{error.filename or 'the system'}: {error.strerror or error}; the book must be readable and writable;"
                " check the space left and the rights"
            )
            context.exit(4)


def settings_of(context: click.Context) -> Settings:
    """Return the settings of the book that the command works on.

    Raises:
        AuthorError: There is no book here or above, or its settings are wrong.
    """
    book = context.find_root().obj
    return read_settings(Path(book) if book else None, Path.cwd())


def writable(file: Path) -> Path:
    """Return a file that a command may write.

    Raises:
        AuthorError: It is a folder, or its folder does not exist or cannot be written.
    """
    shown, place = printable(str(file)), printable(str(file.parent))
    if file.is_dir():
        raise AuthorError([Problem(f"{shown} is a folder", "the name of a file", "name a file in it")])
    if not file.parent.is_dir():
        raise AuthorError([Problem(f"{place} is no folder", "a folder that exists", "make it first")])
    if not os.access(file.parent, os.W_OK):
        raise AuthorError([Problem(f"{place} cannot be written", "a folder with the right to write", "name another")])
    return file


def tell(message: str) -> None:
    """Print a message to stderr, in place of a line of progress that stands there."""
    click.echo(f"{CLEAR if sys.stderr.isatty() else ''}{message}", err=True)


def progress() -> Callable[[str], None]:
    """Return what tells progress: a line each on stderr, overwritten where stderr is a terminal.

    An empty line ends it.
    """

    def rewrite(line: str) -> None:
        click.echo(f"{CLEAR}{line}", err=True, nl=False)

    def add(line: str) -> None:
        if line:
            tell(line)

    return rewrite if sys.stderr.isatty() else add
