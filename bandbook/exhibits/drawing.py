"""The one style of every figure: tokens, Okabe–Ito series each with a second sign, SVG that follows light and dark.

Colours are drawn as sentinels and saved as custom properties with a light fallback, so that a figure inlined in a page
takes the page's colours and one opened alone is readable.
"""

import html
import io
import re
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Any, Final

from bandbook.exhibits.figure import Figure

#: Role → (sentinel colour while drawing, custom property, light value).
COLOURS: Final = {
    "ink": ("#010203", "--bb-ink", "#1D2733"),
    "quiet": ("#020304", "--bb-quiet", "#56616E"),
    "line": ("#030405", "--bb-line", "#C9CDD2"),
    "accent": ("#040506", "--bb-accent", "#2B5C8A"),
    "paper": ("#050607", "--bb-paper", "#FBFAF6"),
    "series-1": ("#060708", "--bb-series-1", "#0072B2"),
    "series-2": ("#070809", "--bb-series-2", "#B84A00"),
    "series-3": ("#08090A", "--bb-series-3", "#00785A"),
    "series-4": ("#090A0B", "--bb-series-4", "#A4467C"),
    "series-5": ("#0A0B0C", "--bb-series-5", "#8A6A00"),
    "series-6": ("#0B0C0D", "--bb-series-6", "#2C7FA8"),
}
INK, QUIET, LINE, ACCENT, PAPER = (COLOURS[role][0] for role in ("ink", "quiet", "line", "accent", "paper"))
SERIES: Final = tuple(COLOURS[f"series-{number}"][0] for number in range(1, 7))
DASHES: Final = ("-", "--", "-.", ":", (0, (5, 1, 1, 1, 1, 1)), (0, (8, 3)))
MARKERS: Final = ("o", "s", "^", "D", "v", "P")

STYLE: Final[dict[str, Any]] = {
    "svg.fonttype": "none",
    "svg.hashsalt": "bandbook",
    "svg.id": None,
    "font.family": "DejaVu Sans",
    "font.size": 10.0,
    "axes.edgecolor": QUIET,
    "axes.labelcolor": INK,
    "axes.linewidth": 0.8,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.unicode_minus": True,
    "xtick.color": QUIET,
    "ytick.color": QUIET,
    "xtick.labelcolor": INK,
    "ytick.labelcolor": INK,
    "text.color": INK,
    "lines.linewidth": 1.4,
    "lines.color": INK,
    "legend.frameon": False,
    "figure.dpi": 72,
    "savefig.transparent": True,
    "mathtext.fontset": "dejavusans",
    "path.simplify": False,
}
WIDTH: Final = 6.4
_NUMBER: Final = re.compile(r"-?\d+\.\d{3,}(?:e-?\d+)?")


@contextmanager
def drawing(name: str, *, alt: str, caption: str, height: float = 3.8, columns: int = 1) -> Iterator[Any]:
    """Yield a blank figure's axes and a box that holds the finished :class:`Figure` afterwards.

    Args:
        name: Its file name without ending.
        alt: What it shows, with the numbers.
        caption: What it says.
        height: Inches; the width is 6.4.
        columns: Axes side by side.
    """
    import matplotlib as mpl
    from matplotlib.backends.backend_svg import FigureCanvasSVG
    from matplotlib.figure import Figure as Canvas

    with mpl.rc_context(STYLE):
        canvas = Canvas(figsize=(WIDTH, height), layout="constrained")
        FigureCanvasSVG(canvas)
        sheet = Sheet(canvas, canvas.subplots(1, columns, squeeze=False)[0])
        yield sheet
        out = io.StringIO()
        canvas.savefig(out, format="svg", metadata={"Date": None, "Creator": None, "Format": None, "Type": None})
        sheet.figure = Figure(name, finished(out.getvalue(), name, alt), alt, caption)


class Sheet:
    """A figure while it is drawn.

    Attributes:
        axes: Its axes.
        figure: The finished figure, after the drawing.
    """

    figure: Figure

    def __init__(self, canvas: Any, axes: Any) -> None:
        self.canvas = canvas
        self.axes = axes


def drawn(name: str, draw: Callable[[Any], None], *, words: tuple[str, str], **size: Any) -> Figure:
    """Return the figure that ``draw`` makes on one pair of axes.

    Args:
        name: Its file name without ending.
        draw: Takes the axes.
        words: Alternative text and caption.
        size: ``height`` and ``columns`` of :func:`drawing`; with several columns ``draw`` takes the list of axes.
    """
    with drawing(name, alt=words[0], caption=words[1], **size) as sheet:
        draw(sheet.axes if size.get("columns", 1) > 1 else sheet.axes[0])
    figure: Figure = sheet.figure
    return figure


def finished(svg: str, name: str, alt: str) -> str:
    """Return the SVG with properties for colours, short numbers, ids of its own, and its words."""
    svg = svg[svg.index("<svg") :]
    svg = re.sub(r"<metadata>.*?</metadata>", "", svg, flags=re.DOTALL)
    for sentinel, prop, light in COLOURS.values():
        svg = re.sub(sentinel, f"var({prop}, {light})", svg, flags=re.IGNORECASE)
    svg = re.sub(r'"[^"]*"', lambda quoted: _NUMBER.sub(_short, quoted[0]), svg)
    svg = re.sub(r'\bid="([^"]+)"', rf'id="{name}-\1"', svg)
    svg = re.sub(r'(href="#|url\(#)([^")]+)', rf"\1{name}-\2", svg)
    svg = re.sub(r"font: ([\d.]+)px 'DejaVu Sans'[^;\"]*", r"font: \1px var(--bb-font, sans-serif)", svg)
    svg = svg.replace("'DejaVu Sans'", "var(--bb-font, sans-serif)")
    box = re.search(r'viewBox="[^"]+"', svg)
    head = f'<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink" {box[0] if box else ""}'
    words = f' role="img" aria-label="{html.escape(alt, quote=True)}" data-figure="{html.escape(name, quote=True)}">'
    return re.sub(r"<svg[^>]*>", lambda _: head + words, svg, count=1)


def _short(match: re.Match[str]) -> str:
    return f"{round(float(match[0]), 2) + 0.0:g}" if abs(float(match[0])) < 1e6 else match[0]


def energy_axis(axes: Any, *, beta: float | None, alpha: float = 0.0) -> None:
    """Label the vertical axis as energy, upward, eV, with x in units of β at the right where β is known."""
    axes.set_ylabel("energy E / eV")
    if beta:
        right = axes.secondary_yaxis("right", functions=(lambda e: (e - alpha) / beta, lambda x: alpha + beta * x))
        right.set_ylabel("x = (E − α)/β")
        right.spines["right"].set_visible(True)


def rule(axes: Any, energy: float, text: str, *, style: str = ":") -> None:
    """Draw a horizontal rule with its label at the right end, inside the axes."""
    axes.axhline(energy, color=QUIET, linestyle=style, linewidth=1.0, zorder=0)
    axes.annotate(
        text, (1.0, energy), xycoords=("axes fraction", "data"), xytext=(-3, 3), textcoords="offset points",
        ha="right", va="bottom", fontsize=8.5, color=QUIET,
        bbox={"boxstyle": "square,pad=0.1", "facecolor": PAPER, "edgecolor": "none", "alpha": 0.85},
    )  # fmt: skip
