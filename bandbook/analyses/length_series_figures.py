"""Figures of the question ``length_series``: gap against N and 1/N, the limits of the forms, levels on the band."""

import re
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from bandbook.analyses.analysis import Asked, drawable
from bandbook.exhibits import Figure, typeset
from bandbook.exhibits import drawing as pen
from bandbook.solver.fits import Fit
from bandbook.solver.hamiltonian import band_energies

if TYPE_CHECKING:
    from bandbook.analyses.length_series import SeriesResult

Real = NDArray[np.float64]

#: Points of a fitted curve.
POINTS = 90
#: Largest N at which a curve against 1/N begins.
FARTHEST = 1e4
#: Lengths above which marks are left out evenly.
MOST_MARKS = 60


def draw(asked: Asked, result: "SeriesResult") -> tuple[Figure, ...]:
    """Return gap against N and 1/N, the limits of the fits beside the computed one, levels of a few N on the band."""
    figures = [_gaps(asked, result)]
    if any(fit.limit is not None for _, fit in result.fits):
        figures.append(_limits(asked, result))
    if result.on_band:
        figures.append(_on_band(asked, result))
    return tuple(figures)


def _gaps(asked: Asked, result: "SeriesResult") -> Figure:
    caption = f"{series_words(result)}.{_forms_words(result)}"
    if result.measured:
        caption += f" Triangles: {result.measured.label}."
    oscillators = int(asked.study["oscillators_per_cell"])
    limit = result.limit

    def strokes(axes: Any) -> None:
        for number, panel in enumerate(axes):
            _fits(panel, result, oscillators=oscillators, is_inverse=number == 1)
            _points(panel, result, is_inverse=number == 1)
            _measured(panel, result, is_inverse=number == 1)
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
    return pen.drawn("series", strokes, words=text, study=asked.name, height=3.2 + 0.08 * len(result.fits), columns=2)


def _forms_words(result: "SeriesResult") -> str:
    told = [
        f"{fit.form}{f' ({family})' if family else ''} {typeset(fit.limit, 3)} eV"
        for family, fit in result.fits
        if fit.limit is not None
    ]
    return f" The forms end at: {', '.join(told)}." if told else ""


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
    measured = result.measured.gap if result.measured else np.zeros(0)
    values = np.concatenate([series.gap, series.extended_gap, [series.band_gap], measured])
    highest = float(np.nanmax(values))  # the limit is never missing there
    return (-0.04 * highest, 1.06 * highest) if highest > 0 else (-0.05, 1.0)


def _points(axes: Any, result: "SeriesResult", *, is_inverse: bool) -> None:
    series = result.series
    place = 1.0 / series.n_cells if is_inverse else series.n_cells.astype(float)
    closed = np.isfinite(series.gap) & ~series.is_open_shell
    sets = (
        [("extended gap", series.extended_gap, np.isfinite(series.extended_gap))]
        if result.uses_extended
        else [("gap" + _of(family.name, result), series.gap, family.fitted) for family in result.families]
    )
    sets += [("gap", series.gap, closed)] if result.uses_extended else []
    sets.append(("gap, open shell", series.gap, np.isfinite(series.gap) & series.is_open_shell))
    markers = [*("o", "s", "D")[: len(sets) - 1], "x"]
    for number, ((label, values, chosen), marker) in enumerate(zip(sets, markers, strict=True)):
        rows = np.flatnonzero(chosen)
        rows = rows[:: -(-len(rows) // MOST_MARKS)] if rows.size else rows
        if rows.size:
            axes.plot(
                place[rows], drawable(values[rows]), linestyle="none", marker=marker,
                color=pen.SERIES[min(number, 1)], markerfacecolor=pen.PAPER if number else pen.SERIES[0],
                markersize=4.5, zorder=3, label=label,
            )  # fmt: skip


def _of(family: str, result: "SeriesResult") -> str:
    return f" of {family} electrons" if len(result.families) > 1 else ""


def _measured(axes: Any, result: "SeriesResult", *, is_inverse: bool) -> None:
    measured = result.measured
    if measured is None:
        return
    place = 1.0 / measured.n_cells if is_inverse else measured.n_cells.astype(float)
    if measured.u is not None:
        axes.vlines(
            place,
            drawable(measured.gap - measured.u),
            drawable(measured.gap + measured.u),
            color=pen.INK,
            linewidth=1.0,
        )
    axes.plot(
        place, drawable(measured.gap), "^", color=pen.INK, markerfacecolor=pen.PAPER, markersize=6.0, zorder=4,
        linestyle="none", label=measured.label,
    )  # fmt: skip


def _fits(axes: Any, result: "SeriesResult", *, oscillators: int, is_inverse: bool) -> None:
    for family in result.families:
        known = result.series.n_cells[family.fitted]
        if not known.size:
            continue
        first, last = float(known[0]), float(known[-1])
        n = 1.0 / np.linspace(1.0 / FARTHEST, 1.0 / first, POINTS) if is_inverse else np.linspace(first, last, POINTS)
        for number, fit in enumerate(family.fits):
            if fit.limit is not None:
                is_named = family is result.families[0]
                _curve(axes, fit, n, number=number, look=(oscillators, is_inverse, is_named))


def _curve(axes: Any, fit: Fit, n: Real, *, number: int, look: tuple[int, bool, bool]) -> None:
    oscillators, is_inverse, is_named = look
    colour = pen.SERIES[(number + 2) % len(pen.SERIES)]
    axes.plot(
        1.0 / n if is_inverse else n, drawable(fit.curve(n, oscillators=oscillators)), linewidth=1.1, color=colour,
        linestyle=pen.DASHES[number % len(pen.DASHES)], label=fit.form if is_named else None,
    )  # fmt: skip
    if is_inverse:
        axes.plot([0.0], [round(fit.limit or 0.0, 9)], marker="_", color=colour, markersize=9, clip_on=False, zorder=4)


def _limits(asked: Asked, result: "SeriesResult") -> Figure:
    """Return where each form ends, with its window error, beside the computed limit and what was measured."""
    found = [(family, fit, fit.limit) for family, fit in result.fits if fit.limit is not None]
    limit = result.limit
    names = [f"{fit.form}{f' {family}' if family else ''}" for family, fit, _ in found]

    def strokes(axes: Any) -> None:
        for row, (_, fit, value) in enumerate(found):
            _bar(axes, row, value, fit.window_error, look=("o", pen.SERIES[0], "" if row else "computed series"))
        for row, value, error in _measured_limits(result, [fit.form for _, fit, _ in found]):
            _bar(axes, row + 0.22, value, error, look=("^", pen.INK, "measured series"))
        axes.set_xticks(range(len(found)), [re.sub(r"[- ]", "\n", name) for name in names], fontsize=pen.SMALL)
        axes.set_xlim(-0.6, len(found) - 0.3)
        axes.set_ylabel("limit / eV")
        if limit is not None:
            points = [(float(row), value) for row, (*_, value) in enumerate(found)]
            pen.rule(axes, round(limit, 9), f"computed {typeset(limit, 3)} eV", style="--", clear_of=points)
        pen.key(axes)

    words = _limits_words(result)
    return pen.drawn("limits", strokes, words=(f"Where the forms end. {words}", words), study=asked.name, height=2.6)


def _bar(axes: Any, x: float, value: float, error: float | None, *, look: tuple[str, str, str]) -> None:
    """Draw a limit with its error; a name stands in the key once."""
    marker, colour, name = look
    low, high = drawable(np.array([value - (error or 0.0), value + (error or 0.0)]))
    axes.vlines([x], low, high, color=colour, linewidth=1.3)
    is_named = name in axes.get_legend_handles_labels()[1]
    face = colour if marker == "o" else pen.PAPER
    axes.plot(
        [x], drawable(np.array([value])), marker, color=colour, markerfacecolor=face, markersize=6, linestyle="none",
        label=name if name and not is_named else None,
    )  # fmt: skip


def _measured_limits(result: "SeriesResult", forms: list[str]) -> list[tuple[int, float, float | None]]:
    fits = {fit.form: fit for fit in result.measured.fits} if result.measured else {}
    found = ((row, fits.get(form)) for row, form in enumerate(forms))
    return [(row, fit.limit, fit.limit_error) for row, fit in found if fit is not None and fit.limit is not None]


def _limits_words(result: "SeriesResult") -> str:
    misses = [
        f"{fit.form}{f' ({family})' if family else ''} by {typeset(result.miss(fit), 3)} eV"
        for family, fit in result.fits
        if result.miss(fit) is not None
    ]
    if not misses:
        return f"The forms end at {_forms_words(result).removeprefix(' The forms end at: ')} Bars: the window error."
    told = (
        f"Limits of the forms against the computed {typeset(result.limit, 3)} eV, which they miss: {', '.join(misses)}."
    )
    return f"{told} Bars: the window error" + (", or the standard error." if result.measured else ".")


def _on_band(asked: Asked, result: "SeriesResult") -> Figure:
    """Return the levels of a few lengths together on the band that they fill in to."""
    sizes = [n_cells for n_cells, _, _ in result.on_band]
    counts = [sum(k is not None for k in places.k) for _, _, places in result.on_band]
    told = ", ".join(f"N = {size}: {count} on the bands" for size, count in zip(sizes, counts, strict=True))
    words = f"Levels of a few lengths on the bands of the infinite system ({told}); with N they fill the bands in."

    def strokes(axes: Any) -> None:
        k = np.linspace(0.0, 1.0, 121)
        for band in drawable(band_energies(asked.model, k[:, None])).T:
            axes.plot(k, band, color=pen.QUIET, linewidth=1.0, zorder=1)
        for number, (n_cells, levels, places) in enumerate(result.on_band):
            found = [row for row, one in enumerate(places.k) if one is not None]
            marks = [(places.k[row], levels.energy[row]) for row in found]
            marks += [(-0.04 * (number + 1), levels.energy[row]) for row in np.flatnonzero(places.is_gap_level)]
            if not marks:
                continue
            x, y = np.array(marks, dtype=np.float64).T
            axes.plot(
                x, drawable(y), linestyle="none", marker=pen.MARKERS[number], color=pen.SERIES[number],
                markerfacecolor=pen.PAPER, markersize=8.5 - 1.5 * number, markeredgewidth=1.4, zorder=3 + number,
                clip_on=False, label=f"N = {n_cells}",
            )  # fmt: skip
        has_outside = any(places.is_gap_level.any() for _, _, places in result.on_band)
        axes.set_xlim(-0.04 * (len(sizes) + 1) if has_outside else -0.02, 1.02)
        axes.set_xticks([0, 0.25, 0.5, 0.75, 1.0], ["Γ  0", "1/4", "1/2", "3/4", "X  1"])
        axes.set_xlabel("k / (π/a)")
        pen.energy_axis(axes, beta=asked.model.beta_unit, alpha=asked.model.alpha_unit)
        pen.key(axes)

    outside = sum(int(places.is_gap_level.sum()) for _, _, places in result.on_band)
    words += " Gap levels stand at the left margin, not on a band." if outside else ""
    return pen.drawn("on-band", strokes, words=(f"Levels on the band. {words}", words), study=asked.name, height=3.4)
