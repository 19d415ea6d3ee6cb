"""The one style of every figure: tokens, Okabe–Ito series each with a second sign, SVG that follows light and dark.

Colours are drawn as sentinels and saved as custom properties with a light fallback, so that a figure inlined in a page
takes the page's colours and one opened alone is readable.
"""

import hashlib
import html
import io
import math
import re
from collections.abc import Callable, Sequence
from typing import Any, Final

from bandbook.exhibits.figure import Figure
from bandbook.exhibits.paper import Paper, in_use, renamed, saved
from bandbook.exhibits.slim import slimmed

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
    "series-7": ("#0C0D0E", "--bb-series-7", "#7A7A7A"),
    "series-8": ("#0D0E0F", "--bb-series-8", "#9C6632"),
}
INK, QUIET, LINE, ACCENT, PAPER = (COLOURS[role][0] for role in ("ink", "quiet", "line", "accent", "paper"))
SERIES: Final = tuple(COLOURS[f"series-{number}"][0] for number in range(1, 9))
DASHES: Final = ("-", "--", "-.", ":", (0, (5, 1, 1, 1, 1, 1)), (0, (8, 3)), (0, (1, 3)), (0, (8, 2, 2, 2)))
MARKERS: Final = ("o", "s", "^", "D", "v", "P", "<", ">")

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
#: Inches; narrow, so that the words are still read when a phone shrinks the figure. A page enlarges it a little.
WIDTH: Final = 5.2
#: Points of the smaller words of a figure.
SMALL: Final = 9.0
#: Inches of a sign in the key with the space around it, and of a letter of the smaller words.
_HANDLE: Final = 0.52
_LETTER: Final = 0.07
_TAG: Final = re.compile(r"<[^>]*>")
_NUMBER: Final = re.compile(r"-?\d+\.\d{3,}")
_ID: Final = re.compile(r'(\bid="|href="#|url\(#)([^")]+)')
#: Stands for what makes an id a figure's own, until its content is known.
_OWN: Final = "«own»"
_UPRIGHT: Final = re.compile(r' transform="rotate\(-?0 [^"]*"')
_FONT: Final = re.compile(r"'DejaVu Sans'(?:, [^;\"]*)?")

Point = tuple[float, float]


def drawn(
    name: str,
    strokes: Callable[[Any], None],
    *,
    words: tuple[str, str],
    study: str = "",
    height: float = 3.2,
    columns: int = 1,
) -> Figure:
    """Return the figure that ``strokes`` makes, in the one style whatever the style of the kernel is.

    Args:
        name: Its file name without ending, unique in its study.
        strokes: Takes the axes; the list of them where there are several columns.
        words: Alternative text and caption.
        study: The study; with it the ids inside are unique on a page.
        height: Inches.
        columns: Axes side by side, with one vertical scale.
    """
    import matplotlib as mpl
    from matplotlib.backends.backend_svg import FigureCanvasSVG
    from matplotlib.figure import Figure as Canvas

    with mpl.rc_context():
        mpl.rcdefaults()
        mpl.rcParams.update(STYLE)
        paper = in_use()
        if paper:
            return Figure(name, _on_paper(paper, strokes, height=height, columns=columns), *words)
        canvas = Canvas(figsize=(WIDTH, height), layout="constrained")
        FigureCanvasSVG(canvas)
        axes = canvas.subplots(1, columns, squeeze=False, sharey=True)[0]
        strokes(axes if columns > 1 else axes[0])
        out = io.StringIO()
        canvas.savefig(out, format="svg", metadata={"Date": None, "Creator": None, "Format": None, "Type": None})
    svg = finished(out.getvalue(), f"{study}-{name}" if study else name, words[0])
    return Figure(name, svg, *words)


def _on_paper(paper: Paper, strokes: Callable[[Any], None], *, height: float, columns: int) -> str:
    """Return a figure for a paper, packed: fixed light colours on white."""
    import matplotlib as mpl
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure as Canvas
    from matplotlib.layout_engine import ConstrainedLayoutEngine

    mpl.rcParams.update({"savefig.transparent": False})
    values = {sentinel: value for sentinel, _, value in COLOURS.values()} | {PAPER: "#FFFFFF"}
    with renamed(values):
        layout = ConstrainedLayoutEngine(wspace=0.08 if columns > 1 else 0.02)  # numbers of two axes stay apart
        canvas = Canvas(figsize=paper.canvas(WIDTH, height), layout=layout)
        FigureCanvasAgg(canvas)
        axes = canvas.subplots(1, columns, squeeze=False, sharey=True)[0]
        strokes(axes if columns > 1 else axes[0])
        return saved(canvas, paper)


def finished(svg: str, prefix: str, alt: str) -> str:
    """Return the SVG with properties for colours, short numbers, ids of its own, and its words.

    Args:
        svg: As matplotlib saves it.
        prefix: Put before every id, with a digest of the content.
        alt: What the figure shows.
    """
    svg = slimmed(re.sub(r"<metadata>.*?</metadata>\s*", "", svg[svg.index("<svg") :], flags=re.DOTALL))
    numbers: dict[str, int] = {}  # names that matplotlib makes from unrounded coordinates would show their last bits
    svg = _ID.sub(lambda use: f"{use[1]}{_OWN}{numbers.setdefault(use[2], len(numbers) + 1)}", svg)
    svg = _TAG.sub(lambda tag: _in_house(tag[0]), svg)
    digest = hashlib.sha256(f"{prefix} {svg}".encode()).hexdigest()[
        :8
    ]  # pictures of several cases may stand on one page
    svg = svg.replace(_OWN, f"f{digest}-")
    box = re.search(r'viewBox="[^"]+"', svg)
    head = f'<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink" {box[0] if box else ""}'
    label = f' role="img" aria-label="{html.escape(alt)}" data-figure="{html.escape(prefix)}">'
    title = f"<title>{html.escape(alt, quote=False)}</title>"
    return re.sub(r"<svg[^>]*>", lambda _: head + label + title, svg, count=1)


def _in_house(tag: str) -> str:
    """Return a tag with properties for colours and font, and short numbers."""
    for sentinel, prop, light in COLOURS.values():
        tag = re.sub(sentinel, f"var({prop}, {light})", tag, flags=re.IGNORECASE)
    tag = _NUMBER.sub(lambda number: f"{round(float(number[0]), 2) + 0.0:.2f}".rstrip("0").rstrip("."), tag)
    return _UPRIGHT.sub("", _FONT.sub("var(--bb-font, sans-serif)", tag))


def energy_axis(axes: Any, *, beta: float | None, alpha: float = 0.0) -> None:
    """Label the vertical axis as energy, upward, eV, with x in units of β at the right where β is known."""
    axes.set_ylabel("energy E / eV")
    if beta:
        right = axes.secondary_yaxis("right", functions=(lambda e: (e - alpha) / beta, lambda x: alpha + beta * x))
        right.set_ylabel("x = (E − α)/β")
        right.spines["right"].set_visible(True)


def key(axes: Any) -> None:
    """Name the signs of an axes above the figure, where nothing can lie below them."""
    handles, labels = axes.get_legend_handles_labels()
    if handles:
        widest = _HANDLE + _LETTER * max(len(label) for label in labels)
        most = max(1, min(len(handles), int(WIDTH / widest)))
        for columns in range(most, 0, -1):
            legend = axes.figure.legend(
                handles, labels, loc="outside upper left", ncols=columns, fontsize=SMALL, handlelength=1.8,
                columnspacing=1.2,
            )  # fmt: skip
            if columns == 1 or not in_use() or legend.get_window_extent().width <= axes.figure.bbox.width:
                return  # a paper may be narrow, and is measured
            legend.remove()


def hatching() -> Any:
    """Return a marker of slanted lines inside a circle, for what is negative: a second sign besides its colour."""
    from matplotlib.path import Path

    corners: list[Point] = []
    for offset in (-0.5, 0.0, 0.5):
        half = math.sqrt(1 - offset**2)
        ends = ((offset - half, -offset - half), (offset + half, -offset + half))
        corners += [(round(x / math.sqrt(2), 4), round(y / math.sqrt(2), 4)) for x, y in ends]
    return Path(corners, [Path.MOVETO, Path.LINETO] * 3)


def rule(axes: Any, energy: float, text: str, *, style: str = ":", clear_of: Sequence[Point] = ()) -> None:
    """Draw a horizontal rule with its label beside it, where the label is farthest from some points.

    Call it when the limits of the axes are set.

    Args:
        axes: The axes.
        energy: Where the rule lies.
        text: The label.
        style: Dotted for a Fermi energy, dashed for a limit.
        clear_of: Points that the label keeps away from.
    """
    axes.axhline(energy, color=QUIET, linestyle=style, linewidth=1.0, zorder=0)
    x, side = _clearest(axes, energy, reach=0.0098 * len(text), points=clear_of)
    axes.annotate(
        text, (x, energy), xycoords=("axes fraction", "data"), xytext=(0, 3 * side), textcoords="offset points",
        ha="center", va="bottom" if side > 0 else "top", fontsize=SMALL, color=QUIET,
    )  # fmt: skip


def _clearest(axes: Any, energy: float, *, reach: float, points: Sequence[Point]) -> tuple[float, int]:
    """Return the place along a rule, and the side of it, that is farthest from the points: right and above if even."""
    (left, right), (low, high) = axes.get_xlim(), axes.get_ylim()
    height = 0.05
    level = (energy - low) / (high - low)
    near = [((x - left) / (right - left), (y - low) / (high - low)) for x, y in points]
    best, found = (1.0 - reach, 1), -1.0
    for step in range(9):
        middle = 1.0 - reach - step * (1.0 - 2 * reach) / 8
        for side in (1, -1):
            centre = level + side * height
            misses = [abs(y - centre) for x, y in near if abs(x - middle) < reach + 0.01]
            clearance = round(min([*misses, 2 * height]), 3)
            if clearance > found and 0 < centre < 1:
                best, found = (round(middle, 4), side), clearance
    return best


def end_label(axes: Any, energy: float, text: str) -> None:
    """Write a rule's value at its right end, outside the axes."""
    axes.annotate(
        text, (1.0, energy), xycoords=("axes fraction", "data"), xytext=(4, 0), textcoords="offset points",
        ha="left", va="center", fontsize=SMALL, color=QUIET, annotation_clip=False,
    )  # fmt: skip
