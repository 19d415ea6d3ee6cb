"""``bandbook list``: the cases, their state and key quantities."""

import json
from collections.abc import Mapping, Sequence
from typing import Any

import click

from bandbook import workflow
from bandbook.cli.door import Command, settings_of, tell


@click.command("list", cls=Command)
@click.option("--json", "as_json", is_flag=True, help="Print the list as JSON.")
@click.pass_context
def list_cases(context: click.Context, as_json: bool) -> None:  # noqa: FBT001 - a flag of the command line
    r"""List each case: fresh, stale or failed, with its key quantities. Runs nothing.

    \b
    Example:
      bandbook list
      bandbook list --json
    """
    finished = workflow.look(settings_of(context))
    rows = workflow.listing(finished)
    for message in finished.set_aside:
        tell(message)
    if as_json:
        click.echo(json.dumps(rows, indent=1, ensure_ascii=False))
    else:
        _print_rows(rows)
    context.exit(5 if finished.set_aside else 0)


def _print_rows(rows: Sequence[Mapping[str, Any]]) -> None:
    width = max((len(row["case"]) for row in rows), default=0)
    for row in rows:
        verdict = "disagrees: " if row["agrees"] is False else ""
        click.echo(f"{row['case']:<{width}}  {row['status']:<6}  {verdict}{row['summary'] or row['title']}".rstrip())
