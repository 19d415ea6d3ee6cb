"""``bandbook bind``: run what is stale, then write the web pages."""

from pathlib import Path

import click

from bandbook import workflow
from bandbook.cli.door import EXIT_HELP, Command, progress, settings_of, tell, writable
from bandbook.website import build_site, check_folder


@click.command(cls=Command, epilog=EXIT_HELP)
@click.option("--to", metavar="DIR", type=click.Path(file_okay=False), help="Where the pages go (default: site_dir).")
@click.option("--again", is_flag=True, help="Run also what is fresh.")
@click.option(
    "--junit", metavar="FILE", type=click.Path(path_type=Path), help="Write the reference values as a test report."
)
@click.pass_context
def bind(context: click.Context, to: str | None, again: bool, junit: Path | None) -> None:  # noqa: FBT001 - a flag of the command line
    r"""Run what is stale, then write the web pages. A failing case never stops the others.

    \b
    Example:
      bandbook bind
      bandbook bind --to pages --junit report.xml
    """
    settings = settings_of(context)
    folder = check_folder(Path(to).resolve() if to else settings.site)
    target = writable(junit.absolute()) if junit else None
    told = progress()
    finished = workflow.run(settings, (), again=again, progress=told)
    told("")
    for message in finished.messages:
        tell(message)
    if target:
        workflow.write_report(settings, finished, target)
    tree = workflow.write_pages(settings, finished)
    build_site(settings, tree, site_dir=folder if to else None)
    click.echo(finished.summary)
    context.exit(finished.exit_status)
