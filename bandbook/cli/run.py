"""``bandbook run``: run what is stale."""

import click

from bandbook import workflow
from bandbook.cli.door import EXIT_HELP, Command, progress, settings_of, tell


@click.command(cls=Command, epilog=EXIT_HELP)
@click.argument("cases", nargs=-1, metavar="[CASE…]")
@click.option("--again", is_flag=True, help="Run also what is fresh.")
@click.pass_context
def run(context: click.Context, cases: tuple[str, ...], again: bool) -> None:  # noqa: FBT001 - a flag of the command line
    r"""Run the cases whose result is stale. Running a case runs its author's Python.

    \b
    Example:
      bandbook run
      bandbook run polyenes/butadiene --again
    """
    told = progress()
    finished = workflow.run(settings_of(context), cases, again=again, progress=told)
    told("")
    for message in finished.messages:
        tell(message)
    click.echo(finished.summary)
    context.exit(finished.exit_status)
