"""Figures for a paper: a width, a font size and a format in place of the page's style.

A kernel that draws for a paper is told so once, by :func:`use`; every figure of a study then holds, in place of its
SVG, the drawing as a data address (:func:`packed`), which the host unpacks. Everything in a figure is scaled together,
so that marks, lines and words keep their proportions.
"""

import base64
import binascii
import contextlib
import io
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any, Final

#: Ending → media type of what a figure can be drawn as.
FORMATS: Final = {"svg": "image/svg+xml", "pdf": "application/pdf", "png": "image/png"}
#: Points per inch.
POINTS: Final = 72.0
#: Dots per inch of a picture made of dots.
DOTS: Final = 600.0
#: Size of the words in the page's style, points.
BASE: Final = 10.0
#: Least height of a figure, in widths.
LEAST_HEIGHT: Final = 0.72
_SIZE: Final = re.compile(r'(<svg[^>]*?) width="[^"]*"', flags=re.DOTALL)
_HEIGHT: Final = re.compile(r'(<svg[^>]*?) height="[^"]*"', flags=re.DOTALL)
_OWN: Final = {"svg": ("Date", "Creator", "Format", "Type"), "pdf": ("CreationDate", "Creator", "Producer")}


@dataclass(frozen=True)
class Paper:
    """How a figure is drawn for a paper.

    Attributes:
        width: Inches.
        font_size: Of axis labels and numbers, points; remarks in a figure are a little smaller.
        format: ``"svg"``, ``"pdf"`` or ``"png"``.
    """

    width: float
    font_size: float
    format: str

    @property
    def scale(self) -> float:
        """What everything is multiplied with."""
        return self.font_size / BASE

    def canvas(self, width: float, height: float) -> tuple[float, float]:
        """Return width and height to draw on before all is scaled, inches, of a figure that has these on a page."""
        own = self.width / self.scale
        return own, own * max(height / width, LEAST_HEIGHT)

    def as_dict(self) -> dict[str, Any]:
        """Return it as plain JSON."""
        return {"width": self.width, "font_size": self.font_size, "format": self.format}


class _InUse:
    """What this kernel draws for: nothing, or a paper."""

    paper: Paper | None = None


def use(given: Mapping[str, Any] | None) -> None:
    """Draw for a paper from now on, or for pages again."""
    _InUse.paper = Paper(**given) if given else None


def in_use() -> Paper | None:
    """Return what is drawn for."""
    return _InUse.paper


@contextlib.contextmanager
def renamed(colours: Mapping[str, str]) -> Iterator[None]:
    """Let colour names stand for others for a while.

    Args:
        colours: Name → colour.
    """
    from matplotlib.colors import get_named_colors_mapping

    names = get_named_colors_mapping()
    for name, colour in colours.items():  # one by one: each makes matplotlib forget what it looked up
        names[name] = colour
    try:
        yield
    finally:
        for name in colours:
            del names[name]


def saved(canvas: Any, paper: Paper) -> str:
    """Return a matplotlib figure, scaled and packed; the same bytes for the same figure."""
    import matplotlib as mpl

    write = {"svg": _svg, "pdf": _pdf, "png": _png}[paper.format]
    style = {"svg.hashsalt": "bandbook", "svg.fonttype": "none", "pdf.fonttype": 42, "savefig.bbox": None}
    with mpl.rc_context(style):
        canvas.set_facecolor("white")
        return packed(write(canvas, paper), paper.format)


def _svg(canvas: Any, paper: Paper) -> bytes:
    out = io.StringIO()
    canvas.savefig(out, format="svg", transparent=False, metadata=dict.fromkeys(_OWN["svg"]))
    width, height = (paper.scale * size for size in canvas.get_size_inches())
    text = re.sub(r"<metadata>.*?</metadata>\s*", "", out.getvalue(), flags=re.DOTALL)
    text = _SIZE.sub(rf'\1 width="{25.4 * width:.2f}mm"', text, count=1)
    return _HEIGHT.sub(rf'\1 height="{25.4 * height:.2f}mm"', text, count=1).encode()


def _png(canvas: Any, paper: Paper) -> bytes:
    out = io.BytesIO()
    dots = {"dpi": (DOTS, DOTS)}
    canvas.savefig(
        out, format="png", dpi=DOTS * paper.scale, transparent=False, metadata={"Software": None}, pil_kwargs=dots
    )
    return out.getvalue()


def _pdf(canvas: Any, paper: Paper) -> bytes:
    """Return a PDF whose one page is scaled as a whole, which ``savefig`` cannot do."""
    from matplotlib.backends.backend_pdf import FigureCanvasPdf, Op, PdfFile, RendererPdf

    out, scale = io.BytesIO(), paper.scale
    FigureCanvasPdf(canvas)
    canvas.set_dpi(POINTS)
    width, height = canvas.get_size_inches()
    file = PdfFile(out, metadata=dict.fromkeys(_OWN["pdf"]))
    try:
        file.newPage(width * scale, height * scale)
        file.width, file.height = width, height  # what lies outside is left out, and that is measured before scaling
        file.output(scale, 0, 0, scale, 0, 0, Op.concat_matrix)
        renderer = RendererPdf(file, POINTS, height, width)
        canvas.draw(renderer)
        renderer.finalize()
        file.finalize()
    finally:
        file.close()
    return out.getvalue()


def packed(data: bytes, ending: str) -> str:
    """Return a drawing as the text that takes the place of a figure's SVG.

    >>> unpacked(packed(b"drawn", "pdf"))
    b'drawn'
    """
    return f"data:{FORMATS[ending]};base64,{base64.b64encode(data).decode()}"


def unpacked(text: str) -> bytes | None:
    """Return the drawing in a text; nothing where it holds none.

    >>> unpacked("<svg/>") is None
    True
    """
    head, _, body = text.partition(";base64,")
    if head.removeprefix("data:") not in FORMATS.values() or not head.startswith("data:"):
        return None
    try:
        return base64.b64decode(body, validate=True)
    except binascii.Error:
        return None


def pack_displays(formatters: Any, paper: Paper) -> None:
    """Let the figures that an author's code shows come out for the paper: its width, its own proportions.

    Args:
        formatters: IPython's formatters by media type.
        paper: What is drawn for.
    """
    import matplotlib as mpl
    from matplotlib.figure import Figure as Canvas

    width = paper.width / paper.scale
    mpl.rcParams.update({"figure.figsize": (width, width * LEAST_HEIGHT), "figure.constrained_layout.use": True})
    formatters["image/svg+xml"].for_type(Canvas, lambda figure: _shown(figure, paper))


def _shown(figure: Any, paper: Paper) -> str:
    width, height = figure.get_size_inches()
    own = paper.width / paper.scale
    figure.set_size_inches(own, own * height / width)
    return saved(figure, paper)
