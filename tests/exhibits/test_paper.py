"""Figures for a paper: the size that was asked, real text, fixed colours, the same bytes, and no trace afterwards."""

import re
import struct
import zlib
from collections.abc import Iterator
from typing import Any

import pytest

from bandbook.exhibits import drawing as pen
from bandbook.exhibits.paper import FORMATS, Paper, in_use, unpacked, use

NAMES = ("inverse", "inverse-square", "shifted-inverse-square", "kuhn", "exponential")


@pytest.fixture(autouse=True)
def pages_again() -> Iterator[None]:
    yield
    use(None)


def drawn(ending: str = "svg", *, width: float = 85 / 25.4, font_size: float = 8.0, columns: int = 1) -> bytes:
    def strokes(axes: Any) -> None:
        first = axes[0] if columns > 1 else axes
        for number, name in enumerate(NAMES):
            first.plot([0, 1], [number, 1], color=pen.SERIES[number], label=name)
        first.plot([0.5], [0.5], "o", color=pen.INK, markerfacecolor=pen.PAPER)
        pen.energy_axis(first, beta=-2.5)
        pen.key(first)

    use(Paper(width, font_size, ending).as_dict())
    found = unpacked(pen.drawn("x", strokes, words=("alt", "caption"), columns=columns).svg)
    assert found is not None
    return found


def test_the_svg_has_the_width_and_the_size_of_words() -> None:
    text = drawn().decode()
    assert ' width="85.00mm"' in text
    box = re.search(r'viewBox="0 0 ([\d.]+) ([\d.]+)"', text)
    assert box is not None
    # The words have 10 in the units of the viewBox; 85 mm are as many points as the box is wide, scaled.
    words = 10 * 85 / 25.4 * 72 / float(box[1])
    assert words == pytest.approx(8.0, abs=1e-3)
    assert re.search(r"font: 10px|font-size: 10px|font: 10\.?0?px", text)


def page_of(pdf: bytes) -> bytes:
    """Return what is drawn on the page of a PDF."""
    packed = re.findall(rb"FlateDecode[^>]*>>\s*stream\n(.*?)endstream", pdf, re.DOTALL)
    (page,) = [stream for stream in map(zlib.decompress, packed) if b" Tf" in stream]
    return page


def test_a_pdf_of_half_the_size_holds_the_same_strokes() -> None:
    whole, half = (page_of(drawn("pdf", width=width, font_size=size)) for width, size in ((6.0, 10.0), (3.0, 5.0)))
    assert half == whole.replace(b"\n1 0 0 1 0 0 cm\n", b"\n0.5 0 0 0.5 0 0 cm\n", 1)
    assert half != whole


@pytest.mark.parametrize(("millimetres", "size"), [(85, 8.0), (170, 9.0), (85, 6.5)])
def test_the_pdf_has_the_width_and_its_words_are_text(millimetres: float, size: float) -> None:
    data = drawn("pdf", width=millimetres / 25.4, font_size=size)
    box = re.search(rb"/MediaBox \[ 0 0 ([\d.]+) ([\d.]+) \]", data)
    assert box is not None
    assert float(box[1]) == pytest.approx(millimetres / 25.4 * 72, abs=1e-3)
    assert b"/Subtype /Type0" in data or b"/Subtype /TrueType" in data
    assert b"/FontFile2" in data
    page = page_of(data)
    assert re.search(rb"\A[^q]*?\n%s 0 0 %s 0 0 cm\n" % ((b"%g" % (size / 10),) * 2), page)
    assert re.search(rb" 10 Tf", page)


def test_the_png_has_the_width_at_its_dots() -> None:
    data = drawn("png")
    assert struct.unpack(">I", data[16:20])[0] == pytest.approx(85 / 25.4 * 600, abs=1)
    place = data.index(b"pHYs") + 4
    across, down, unit = struct.unpack(">IIB", data[place : place + 9])
    assert (across, down, unit) == (23622, 23622, 1)  # 600 dots an inch, by the metre


@pytest.mark.parametrize("ending", FORMATS)
def test_the_same_bytes_and_nothing_of_time_or_maker(ending: str) -> None:
    data = drawn(ending)
    assert data == drawn(ending)
    assert not re.search(rb"CreationDate|Matplotlib v|\d{4}-\d\d-\d\dT|Software", data)


def test_colours_are_fixed_and_light() -> None:
    text = drawn().decode()
    assert "var(" not in text
    found = {colour.upper() for colour in re.findall(r"#[0-9a-fA-F]{6}\b", text)}
    assert found <= {light.upper() for _, _, light in pen.COLOURS.values()} | {"#FFFFFF"}


@pytest.mark.parametrize("columns", [1, 2])
def test_the_key_fits_a_narrow_figure(columns: int) -> None:
    held: list[Any] = []

    def strokes(axes: Any) -> None:
        first = axes[0] if columns > 1 else axes
        for name in NAMES:
            first.plot([0, 1], [0, 1], label=name)
        pen.key(first)
        held.append(first.figure)

    use(Paper(85 / 25.4, 8.0, "png").as_dict())
    pen.drawn("x", strokes, words=("alt", "caption"), columns=columns)
    (figure,) = held
    (legend,) = figure.legends
    extent = legend.get_window_extent()
    assert extent.x0 >= 0
    assert extent.x1 <= figure.bbox.x1
    assert [text.get_text() for text in legend.get_texts()] == list(NAMES)


def test_pages_are_as_before() -> None:
    def figure() -> str:
        return pen.drawn("x", lambda axes: axes.plot([0, 1], color=pen.INK), words=("a", "c")).svg

    before = figure()
    drawn("pdf")
    use(None)
    assert in_use() is None
    assert figure() == before
    assert "var(--bb-ink" in before


def test_a_text_that_holds_no_drawing() -> None:
    for text in ("<svg/>", "data:text/html;base64,AAAA", "data:image/png;base64,%%%", ""):
        assert unpacked(text) is None
