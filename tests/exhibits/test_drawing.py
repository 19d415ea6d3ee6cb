"""The one style of figures: colours by property, words, ids of their own, and the same bytes every time."""

import os
import re
import subprocess
import sys
from typing import Any
from xml.etree import ElementTree as ET

import numpy as np
import pytest

from bandbook.exhibits import Figure
from bandbook.exhibits import drawing as pen

WORDS = ('Gap 1.4 eV & "more" <below>', "A caption with 1.4 eV.")
SVG = "{http://www.w3.org/2000/svg}"
X = np.linspace(0.0, 1.0, 50)


def figure(name: str = "bands", *, study: str = "bands", shift: float = 0.0, **size: Any) -> Figure:
    def strokes(axes: Any) -> None:
        panels = axes if size.get("columns", 1) > 1 else [axes]
        for number, dash in enumerate(pen.DASHES):
            panels[0].plot(X, np.sin(X + number) + shift, color=pen.SERIES[number], linestyle=dash, label=f"s{number}")
        panels[0].plot(X[::9], X[::9], pen.MARKERS[0], color=pen.SERIES[0], markerfacecolor=pen.PAPER)
        pen.energy_axis(panels[0], beta=-2.5, alpha=0.5)
        pen.rule(panels[0], 0.5, "Fermi energy")
        pen.key(panels[0])

    return pen.drawn(name, strokes, words=WORDS, study=study, **size)


def luminance(colour: str) -> float:
    """Return the relative luminance of WCAG 2.2."""
    parts = [int(colour[place : place + 2], 16) / 255 for place in (1, 3, 5)]
    linear = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(one: str, two: str) -> float:
    low, high = sorted((luminance(one), luminance(two)))
    return (high + 0.05) / (low + 0.05)


def test_every_colour_is_a_property_with_a_fallback() -> None:
    svg = figure().svg
    assert set(re.findall(r"#[0-9A-Fa-f]{6}\b", svg)) <= {light for _, _, light in pen.COLOURS.values()}
    properties = {prop: light for _, prop, light in pen.COLOURS.values()}
    for prop, light in re.findall(r"var\((--bb-[\w-]+), (#\w+)\)", svg):
        assert properties[prop] == light
    assert not re.search(r"\b(white|black|rgb)\b", re.sub(r">[^<]*<", "><", svg))


def test_series_can_be_told_apart() -> None:
    """3:1 against the paper (WCAG 1.4.11), a colour and a second sign each."""
    light = [pen.COLOURS[f"series-{number}"][2] for number in range(1, 9)]
    assert len(set(light)) == len(set(pen.SERIES)) == len(set(pen.DASHES)) == len(set(pen.MARKERS)) == 8
    assert all(contrast(colour, "#FBFAF6") >= 3 for colour in light)
    assert all(contrast(pen.COLOURS[role][2], "#FBFAF6") >= 4.5 for role in ("ink", "quiet", "accent"))


def test_words_are_there_and_escaped() -> None:
    root = ET.fromstring(figure().svg)  # noqa: S314 - our own figure
    assert root.get("role") == "img"
    assert root.get("aria-label") == WORDS[0]
    assert root.findtext(f"{SVG}title") == WORDS[0]
    assert figure().caption == WORDS[1]


def test_the_page_sets_the_width() -> None:
    root = ET.fromstring(figure().svg)  # noqa: S314 - our own figure
    assert root.get("width") is root.get("height") is None
    assert root.get("viewBox", "").startswith("0 0 374.4 ")


def test_text_is_text_in_the_font_of_the_page() -> None:
    svg = figure().svg
    assert ">energy E / eV</text>" in svg
    assert ">x = (E − α)/β</text>" in svg
    assert "var(--bb-font, sans-serif)" in svg
    assert "DejaVu" not in svg


def test_several_figures_stand_on_one_page() -> None:
    """Every id is unique, those of another case's figure of the same name too; every reference stays in its figure."""
    seen: set[str] = set()
    for one in (figure(), figure(study="other"), figure("series", columns=2), figure(height=3.0)):
        ids = re.findall(r'\bid="([^"]+)"', one.svg)
        used = re.findall(r'href="#([^"]+)"', one.svg) + re.findall(r"url\(#([^)]+)\)", one.svg)
        assert len(set(ids)) == len(ids)
        assert used
        assert set(used) <= set(ids)
        assert not seen & set(ids)
        seen |= set(ids)


def test_coordinates_are_short() -> None:
    tags = "".join(re.findall(r"<[^>]*>", figure().svg))
    assert not re.search(r"\d\.\d{3}", tags)
    assert "-0 " not in tags


def test_no_date_and_no_version() -> None:
    svg = figure().svg
    assert svg.startswith("<svg ")
    assert not re.search(r"metadata|matplotlib|\d{4}-\d\d-\d\d", svg)


def test_the_last_bits_do_not_show() -> None:
    assert figure().svg == figure(shift=1e-12).svg


def test_the_style_of_the_kernel_does_not_matter() -> None:
    """What an author's code sets stays set, and no figure of the book changes by it."""
    import matplotlib as mpl

    before = figure().svg
    with mpl.rc_context({"axes.grid": True, "lines.linewidth": 9.0, "font.size": 30.0, "svg.fonttype": "path"}):
        assert figure().svg == before
        assert mpl.rcParams["lines.linewidth"] == 9.0


def test_another_process_gives_the_same_bytes() -> None:
    code = (
        "from bandbook.exhibits import drawing as pen\n"
        "f = pen.drawn('x', lambda a: a.plot([0, 1], [0, 1], 'o-', color=pen.INK), words=('a', 'b'), study='s')\n"
        "import hashlib; print(hashlib.sha256(f.svg.encode()).hexdigest())"
    )
    found = {
        subprocess.run(
            [sys.executable, "-c", code], capture_output=True, check=True, env={**os.environ, "PYTHONHASHSEED": seed}
        ).stdout
        for seed in ("1", "2")
    }
    assert len(found) == 1


def test_energy_is_upward_and_x_counts_from_alpha() -> None:
    """With x = (E − α)/β: where β < 0, the bonding side, x > 0, is below."""
    heights: list[float] = []

    def strokes(axes: Any) -> None:
        axes.plot([0, 1], [-5.0, 5.0])
        pen.energy_axis(axes, beta=-2.5, alpha=0.5)
        axes.figure.canvas.draw()
        (right,) = axes.child_axes
        heights.extend(axes.transData.transform((0, energy))[1] for energy in (0.5, -4.5))
        heights.extend(right.transData.transform((0, x))[1] for x in (0.0, 2.0))

    pen.drawn("x", strokes, words=WORDS)
    origin, bonding, at_0, at_2 = heights
    assert bonding < origin
    assert (at_0, at_2) == pytest.approx((origin, bonding))


def test_without_beta_there_is_no_second_scale() -> None:
    svg = pen.drawn("x", lambda axes: pen.energy_axis(axes, beta=None), words=WORDS).svg
    assert "(E − α)/β" not in svg


@pytest.mark.parametrize("busy", ["right", "left", "above"])
def test_a_label_keeps_clear_of_the_curves(busy: str) -> None:
    held: list[tuple[float, int]] = []
    y = {"right": 0.5 + 0.02 * X, "left": 0.5 + 0.02 * X, "above": np.full(50, 0.55)}[busy]
    chosen = {"right": X > 0.5, "left": X < 0.5, "above": X >= 0}[busy]
    points = list(zip(X[chosen].tolist(), y[chosen].tolist(), strict=True))

    def strokes(axes: Any) -> None:
        axes.set_xlim(0, 1)
        axes.set_ylim(0, 1)
        pen.rule(axes, 0.5, "Fermi energy", clear_of=points)
        note = axes.texts[0]
        held.append((note.xy[0], 1 if note.get_verticalalignment() == "bottom" else -1))

    pen.drawn("x", strokes, words=WORDS)
    ((x, side),) = held
    assert {"right": x < 0.5, "left": x > 0.5, "above": side < 0}[busy]
