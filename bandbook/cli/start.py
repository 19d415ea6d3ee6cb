"""``bandbook start``: a new book from the package's own pattern."""

from pathlib import Path

import click

from bandbook import workflow
from bandbook.cli.door import Command, tell


@click.command(cls=Command)
@click.argument("folder", type=click.Path(file_okay=False))
def start(folder: str) -> None:
    r"""Write a new book: settings, one case, a parameter set, workflow files for CI.

    \b
    Example:
      bandbook start my-book
      cd my-book
      bandbook bind
    """
    written = workflow.start(Path(folder))
    for path in written:
        click.echo(path)
    tell(f"the book is in {folder}; go there and call bandbook bind")
