"""The figure of the question ``length_series``: gap against N and against 1/N, with fits and the computed limit."""

from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from bandbook.analyses.analysis import Asked, drawable
from bandbook.exhibits import Figure, typeset
from bandbook.exhibits import drawing as pen

if TYPE_CHECKING:
    from bandbook.analyses.length_series import SeriesResult

Real = NDArray[np.float64]

#: Points of a fitted curve.
POINTS = 300
#: Largest N at which a curve against 1/N begins.
FARTHEST = 1e4


def draw(asked: Asked, result: "SeriesResult") -> tuple[Figure, ...]:
    """Return gap against N and against 1/N, side by side, with fits and limit."""
    words = series_words(result)
    forms = "; ".join(f"{fit.form} gives {typeset(fit.limit, 3)} eV" for fit in result.fits if fit.limit is not None)
    caption = f"{words}." + (f" Limits of the fits: {forms}." if forms else "")
    oscillators = int(asked.study["oscillators_per_cell"])
    limit = result.limit

    def strokes(axes: Any) -> None:
        for number, panel in enumerate(axes):
            _fits(panel, result, oscillators=oscillators, is_inverse=number == 1)
            _points(panel, result, is_inverse=number == 1)
            if limit is not None:
                panel.axhline(round(limit, 9), color=pen.QUIET, linestyle="--", linewidth=1.0, zorder=0)
            panel.margins(x=0.05)
        axes[0].set_ylabel("gap / eV")
        axes[0].set_ylim(*_heights(result))
        axes[0].set_xlabel("N / cells")
        axes[1].set_xlabel("1/N (N in cells)")
        axes[1].set_xlim(left=0.0)
        if limit is not None:
            pen.end_label(axes[1], round(limit, 9), f"limit\n{typeset(limit, 3)} eV")
        pen.key(axes[0])

    text = (f"Gap against length. {caption}", caption)
    return (pen.drawn("series", strokes, words=text, study=asked.name, height=4.2, columns=2),)


def series_words(result: "SeriesResult") -> str:
    """Return what the series says, in words with the numbers; open shells have no gap to speak of."""
    series = result.series
    name = "Extended gap" if result.uses_extended else "Gap"
    values = series.extended_gap if result.uses_extended else series.gap
    known = np.flatnonzero(result.fitted)
    limit = "the infinite system has " + (f"{typeset(result.limit, 3)} eV" if result.limit is not None else "no answer")
    if not known.size:
        return f"No closed-shell length has a gap; {limit}"
    first, last = (f"{typeset(values[at], 3)} eV at N = {series.n_cells[at]}" for at in (known[0], known[-1]))
    return f"{name} {first}; {limit}" if known.size == 1 else f"{name} from {first} to {last}; {limit}"


def _heights(result: "SeriesResult") -> tuple[float, float]:
    """Return the vertical scale: from 0 to a little above the highest point; curves may leave it."""
    series = result.series
    values = np.concatenate([series.gap, series.extended_gap, [series.band_gap]])
    highest = float(np.nanmax(values))  # the limit is never missing there
    return (-0.04 * highest, 1.06 * highest) if highest > 0 else (-0.05, 1.0)


def _points(axes: Any, result: "SeriesResult", *, is_inverse: bool) -> None:
    series, number = result.series, 0
    place = 1.0 / series.n_cells if is_inverse else series.n_cells.astype(float)
    closed = np.isfinite(series.gap) & ~series.is_open_shell
    sets = (
        [("extended gap", series.extended_gap, np.isfinite(series.extended_gap), "o")] if result.uses_extended else []
    )
    sets.append(("gap", series.gap, closed, "s" if result.uses_extended else "o"))
    sets.append(("gap, open shell", series.gap, np.isfinite(series.gap) & series.is_open_shell, "x"))
    for label, values, chosen, marker in sets:
        if chosen.any():
            is_first = number == 0
            axes.plot(
                place[chosen], drawable(values[chosen]), linestyle="none", marker=marker,
                color=pen.SERIES[0 if is_first else 1], markerfacecolor=pen.SERIES[0] if is_first else pen.PAPER,
                markersize=4.5, zorder=3, label=label,
            )  # fmt: skip
            number += 1


def _fits(axes: Any, result: "SeriesResult", *, oscillators: int, is_inverse: bool) -> None:
    known = result.series.n_cells[result.fitted]
    if not known.size:
        return
    first, last = float(known[0]), float(known[-1])
    n = 1.0 / np.linspace(1.0 / FARTHEST, 1.0 / first, POINTS) if is_inverse else np.linspace(first, last, POINTS)
    for number, fit in enumerate(result.fits):
        if fit.limit is not None:
            axes.plot(
                1.0 / n if is_inverse else n, drawable(fit.curve(n, oscillators=oscillators)), linewidth=1.1,
                color=pen.SERIES[(number + 2) % len(pen.SERIES)], linestyle=pen.DASHES[number % len(pen.DASHES)],
                label=fit.form,
            )  # fmt: skip
