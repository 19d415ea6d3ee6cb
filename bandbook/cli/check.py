"""``bandbook check``: read every case, compute nothing."""

import click

from bandbook import workflow
from bandbook.cli.door import EXIT_HELP, Command, settings_of, tell
from bandbook.errors import AuthorError


@click.command(cls=Command, epilog=EXIT_HELP)
@click.argument("cases", nargs=-1, metavar="[CASE…]")
@click.pass_context
def check(context: click.Context, cases: tuple[str, ...]) -> None:
    r"""Read the cases and print every mistake; computes and executes nothing.

    \b
    Example:
      bandbook check
      bandbook check polyenes/butadiene
    """
    checked = workflow.check(settings_of(context), cases)
    problems = checked.problems
    if problems:
        raise AuthorError(problems)
    tell(f"{len(checked.cases)} case{'' if len(checked.cases) == 1 else 's'}, no mistake")
