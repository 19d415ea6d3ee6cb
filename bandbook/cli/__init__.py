"""The command ``bandbook``: one file a command, no work in any of them.

The folder's rule: a command reads its options, calls ``workflow`` once, prints, and returns an exit status. Results go
to stdout, messages and progress to stderr.
"""

import click

from bandbook import __version__
from bandbook.cli.bind import bind
from bandbook.cli.check import check
from bandbook.cli.door import Door
from bandbook.cli.draw import draw
from bandbook.cli.list import list_cases
from bandbook.cli.run import run
from bandbook.cli.show import show
from bandbook.cli.start import start

COMMANDS = (start, check, run, bind, list_cases, show, draw)


@click.group(cls=Door, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(__version__, prog_name="bandbook")
@click.option(
    "--book", metavar="FILE", type=click.Path(dir_okay=False), help="The book's mkdocs.yml (default: here or above)."
)
@click.pass_context
def main(context: click.Context, book: str | None) -> None:
    r"""Keep a logbook of one-electron studies: check, run and bind its case files.

    \b
    Example:
      bandbook start my-book
      cd my-book
      bandbook bind
      (then open site/index.html)
    """
    context.obj = book


for command in COMMANDS:
    main.add_command(command)
