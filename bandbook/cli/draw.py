"""``bandbook draw``: one figure of a case for a paper."""

from pathlib import Path

import click

from bandbook import workflow
from bandbook.cli.door import EXIT_HELP, Command, progress, settings_of, writable


@click.command(cls=Command, epilog=EXIT_HELP)
@click.argument("case")
@click.argument("figure")
@click.option(
    "--to", metavar="FILE", required=True, type=click.Path(path_type=Path), help="An .svg, .pdf or .png file."
)
@click.option("--width", default="85mm", show_default=True, help="A number with mm, cm, in or pt.")
@click.option("--font-size", type=float, default=8.0, show_default=True, help="Of axis labels and numbers, in pt.")
@click.pass_context
def draw(context: click.Context, case: str, figure: str, *, to: Path, width: str, font_size: float) -> None:
    r"""Draw one figure of a case for a paper, its table as CSV beside it. Runs the case up to the figure.

    \b
    Example:
      bandbook draw butadiene levels.diagram --to levels.pdf
      bandbook draw butadiene levels.on-bands --to bands.png --width 170mm --font-size 9
    """
    asked = workflow.Drawing(case, figure, writable(to.absolute()), width, font_size)
    told = progress()
    written = workflow.draw(settings_of(context), asked, progress=told)
    told("")
    for path in written:
        click.echo(path)
