"""``bandbook list``: the cases, their state and key quantities."""

import json

import click

from bandbook import workflow
from bandbook.cli.door import settings_of


@click.command("list")
@click.option("--json", "as_json", is_flag=True, help="Print the list as JSON.")
@click.pass_context
def list_cases(context: click.Context, as_json: bool) -> None:  # noqa: FBT001 - a flag of the command line
    r"""List each case: fresh, stale or failed, with its key quantities. Runs nothing.

    \b
    Example:
      bandbook list
      bandbook list --json
    """
    rows = workflow.listing(settings_of(context))
    if as_json:
        click.echo(json.dumps(rows, indent=1, ensure_ascii=False))
        return
    width = max((len(row["case"]) for row in rows), default=0)
    for row in rows:
        click.echo(f"{row['case']:<{width}}  {row['status']:<6}  {row['summary'] or row['title']}".rstrip())
