"""``bandbook show``: one record in the terminal."""

import json
from typing import Any

import click

from bandbook import workflow
from bandbook.cli.door import Command, settings_of


@click.command(cls=Command)
@click.argument("case")
@click.option("--json", "as_json", is_flag=True, help="Print record.json.")
@click.pass_context
def show(context: click.Context, case: str, as_json: bool) -> None:  # noqa: FBT001 - a flag of the command line
    r"""Print the record of a case: quantities, reference values, warnings, key. Runs nothing.

    \b
    Example:
      bandbook show polyenes/butadiene
      bandbook show polyenes/butadiene --json
    """
    record = workflow.record_of(settings_of(context), case)
    if as_json:
        click.echo(json.dumps(record, indent=1, ensure_ascii=False))
        return
    print_record(record)


def print_record(record: dict[str, Any]) -> None:
    """Print a record as text: a line a quantity."""
    click.echo(f"{record['title']}  ({record['case']})")
    width = max((len(row["name"]) for row in record["quantities"]), default=0)
    for row in record["quantities"]:
        value = "no answer" if row["value"] is None else f"{row['value']:.6g} {row['unit']}".rstrip()
        in_beta = "" if row["in_beta"] is None else f"  {row['in_beta']:.6g} β"
        recorded = "  (recorded, not recomputed)" if row["recorded"] else ""
        click.echo(f"  {row['name']:<{width}}  {value}{in_beta}{recorded}")
    for row in record["references"]:
        verdict = "agrees" if row["agrees"] else "DISAGREES"
        unit = "β" if row["unit"] == "beta" else row["unit"]
        basis = row["source"] or row["note"]
        reference = f"reference {row['value']} ± {row['within']} ({basis})"
        click.echo(f"  {verdict}: {row['quantity']} is {row['found']} {unit}, {reference}")
    for warning in record["warnings"]:
        click.echo(f"  warning: {warning}")
    click.echo(f"  {record['key']}")
