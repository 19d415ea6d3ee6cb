"""The question ``length_series``: gap against length, the computed limit, and how far popular forms miss it."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from bandbook.analyses.analysis import Analysis, Asked
from bandbook.analyses.piece_fields import CUT, LENGTHS, cut_of, inspect_piece
from bandbook.exhibits import Column, Figure, Quantity, QuantityName, Table, typeset
from bandbook.exhibits import drawing as pen
from bandbook.model import Model
from bandbook.parameters import Field, Problem
from bandbook.solver.fits import FORMS, Fit, fit_series
from bandbook.solver.series import Cut, Series, gap_series

FITS = Field("fits", "choices", "forms to fit", default=("inverse", "inverse-square"), choices=tuple(FORMS))
OSCILLATORS = Field("oscillators_per_cell", "integer", "oscillators of a cell, for the Kuhn form", default=1, least=1)


@dataclass(frozen=True, eq=False)
class SeriesResult:
    """What the question gave.

    Attributes:
        series: The gaps.
        fits: A fit for each form that was asked.
        uses_extended: Whether the fits rest on the extended gap.
        fitted: Which lengths they rest on.
    """

    series: Series
    fits: tuple[Fit, ...]
    uses_extended: bool
    fitted: Any


def inspect(study: Mapping[str, Any], model: Model | None) -> list[Problem]:
    """Return what is wrong with the pieces; the series needs one dimension."""
    if model is not None and model.dimension != 1:
        found = f"the system has {model.dimension} lattice vectors"
        return [Problem(found, "a length series needs one", "ask another question", ("question",))]
    one = {**study, "cells": (study["cells"] or [1])[0]}
    return inspect_piece(one, model)


def compute(asked: Asked) -> SeriesResult:
    """Solve every length and fit every form."""
    study = asked.study
    keys = cut_of(study)
    cut = Cut(keys["ends"], tuple(keys["add"]), tuple(keys["drop"]), tuple(keys["changes"]))
    series = gap_series(asked.model, lengths=study["cells"], cut=cut)
    uses_extended = bool(series.n_gap_levels)
    values = series.extended_gap if uses_extended else series.gap
    fitted = np.isfinite(values) & ~series.is_open_shell
    fits = tuple(
        fit_series(
            form, series.n_cells[fitted].astype(float), values[fitted], oscillators=study["oscillators_per_cell"]
        )
        for form in study["fits"]
    )
    return SeriesResult(series, fits, uses_extended, fitted)


def report(asked: Asked, result: SeriesResult) -> tuple[Quantity, ...]:
    """Return the quantities."""
    series = result.series
    rows = zip(series.n_cells, series.gap, series.extended_gap, strict=True)
    gaps = tuple(
        quantity
        for n_cells, gap, extended in rows
        for quantity in (
            asked.quantity(f"gap_{n_cells}", "difference", _known(gap), f"HOMO–LUMO distance of {n_cells} cells"),
            asked.quantity(
                f"extended_gap_{n_cells}", "difference", _known(extended), f"gap of {n_cells} cells without gap levels"
            ),
        )
    )
    limit = asked.quantity("band_gap", "difference", series.band_gap, "gap of the infinite system, from its bands")
    fits = tuple(
        asked.quantity(f"limit_{fit.form}", "fit", fit.limit, f"limit of the form {FORMS[fit.form].formula}")
        for fit in result.fits
    )
    return (limit, *fits, *gaps)


def _known(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None


def tabulate(asked: Asked, result: SeriesResult) -> tuple[Table, ...]:
    """Return the gaps, and the fits with what they miss."""
    del asked
    series = result.series
    heads = (
        Column("cells", "N", "number of cells"),
        Column("sites", "sites", "number of sites"),
        Column("electrons", "electrons", "number of electrons"),
        Column("gap", "gap", "HOMO–LUMO distance", "eV", 6, 4),
        Column("extended_gap", "extended gap", "gap without gap levels", "eV", 6, 4),
        Column("open_shell", "open shell", "whether the highest group is partly filled"),
        Column("fitted", "fitted", "whether the fits rest on it"),
    )
    columns = (series.n_cells, series.n_sites, series.electrons, series.gap, series.extended_gap)
    flags = zip(series.is_open_shell, result.fitted, strict=True)
    rows = tuple(
        (int(n), int(sites), int(electrons), _known(gap), _known(extended), bool(is_open), bool(is_fitted))
        for (n, sites, electrons, gap, extended), (is_open, is_fitted) in zip(
            zip(*columns, strict=True), flags, strict=True
        )
    )
    tables = [Table("gaps", "Gap against length.", heads, rows)]
    if result.fits:
        tables.append(_fits_table(result))
    return tuple(tables)


def _fits_table(result: SeriesResult) -> Table:
    heads = (
        Column("form", "form", "name of the form"),
        Column("formula", "E(N)", "the form"),
        Column("limit", "limit", "gap at infinite length", "eV", 5, 4),
        Column("miss", "miss", "limit less the computed one", "eV", 5, 4),
        Column("window_error", "window error", "spread of the limit when the shortest pieces are dropped", "eV", 5, 4),
        Column("rms", "rms", "root mean square deviation", "eV", 5, 4),
        Column("conjugation_length", "ECL", "effective conjugation length, within 1 % of E₁ − E∞", "cells", 3, 1),
        Column("remark", "remark", "why there is no fit"),
    )
    limit = result.series.band_gap
    rows = tuple(
        (fit.form, FORMS[fit.form].formula, fit.limit, None if fit.limit is None else fit.limit - limit,
         fit.window_error, fit.rms, fit.conjugation_length, fit.reason)
        for fit in result.fits
    )  # fmt: skip
    basis = "extended gap" if result.uses_extended else "gap"
    return Table("fits", f"Forms fitted to the {basis}, and how far each misses the computed limit.", heads, rows)


def _words(result: SeriesResult) -> str:
    series = result.series
    name = "Extended gap" if result.uses_extended else "Gap"
    values = series.extended_gap if result.uses_extended else series.gap
    known = np.flatnonzero(np.isfinite(values))
    if not known.size:
        return f"No length has a gap; the limit of the infinite system is {typeset(series.band_gap, 3)} eV"
    first, last = known[0], known[-1]
    return (
        f"{name} from {typeset(values[first], 3)} eV at N = {series.n_cells[first]} to {typeset(values[last], 3)} eV at"
        f" N = {series.n_cells[last]}; the infinite system has {typeset(series.band_gap, 3)} eV"
    )


def draw(asked: Asked, result: SeriesResult) -> tuple[Figure, ...]:
    """Return gap against N and against 1/N, side by side, with fits and limit."""
    words = _words(result)
    forms = "; ".join(f"{fit.form} gives {typeset(fit.limit, 3)} eV" for fit in result.fits if fit.limit is not None)
    caption = f"{words}." + (f" Limits of the fits: {forms}." if forms else "")
    oscillators = asked.study["oscillators_per_cell"]

    def strokes(axes: Any) -> None:
        _panel(axes[0], result, oscillators=oscillators, is_inverse=False)
        _panel(axes[1], result, oscillators=oscillators, is_inverse=True)
        axes[0].set_ylabel("gap / eV")
        axes[0].legend(fontsize=8, loc="upper right")

    name = "series" if asked.name == "length_series" else f"{asked.name}-series"
    return (pen.drawn(name, strokes, words=(f"Gap against length. {caption}", caption), height=3.8, columns=2),)


def _panel(axes: Any, result: SeriesResult, *, oscillators: int, is_inverse: bool) -> None:
    series = result.series
    place = 1.0 / series.n_cells if is_inverse else series.n_cells
    if result.uses_extended:
        axes.plot(place, series.extended_gap, "o", color=pen.SERIES[0], markersize=4.5, label="extended gap")
    axes.plot(
        place, series.gap, "s" if result.uses_extended else "o", color=pen.SERIES[1 if result.uses_extended else 0],
        markerfacecolor=pen.PAPER, markersize=4.5, label="gap",
    )  # fmt: skip
    n = (
        1.0 / np.linspace(1e-4, 1.0 / series.n_cells[0], 300)
        if is_inverse
        else np.linspace(series.n_cells[0], series.n_cells[-1], 300)
    )
    for number, fit in enumerate(result.fits):
        if fit.limit is not None:
            style = {
                "color": pen.SERIES[(number + 2) % len(pen.SERIES)],
                "linestyle": pen.DASHES[number % len(pen.DASHES)],
            }
            axes.plot(
                1.0 / n if is_inverse else n,
                fit.curve(n, oscillators=oscillators),
                linewidth=1.1,
                label=fit.form,
                **style,
            )
    limit = f"limit {typeset(series.band_gap, 3)}"
    pen.rule(axes, series.band_gap, limit, style="--") if not is_inverse else axes.axhline(
        series.band_gap, color=pen.QUIET, linestyle="--", linewidth=1.0
    )
    axes.set_xlabel("1/N (N in cells)" if is_inverse else "N / cells")
    axes.set_ylim(bottom=min(0.0, float(np.nanmin(series.gap)) if np.isfinite(series.gap).any() else 0.0))


def warn(asked: Asked, result: SeriesResult) -> tuple[str, ...]:
    """Return what a reader could be misled by."""
    series = result.series
    warnings = []
    for fit in result.fits:
        miss = None if fit.limit is None else abs(fit.limit - series.band_gap)
        if miss is not None and miss > (fit.window_error or 0.0) + 1e-5:
            error = (
                f"its window error is {typeset(fit.window_error, 3)} eV"
                if fit.window_error is not None
                else "it has no window error"
            )
            warnings.append(f"The form {fit.form} misses the computed limit by {typeset(miss, 3)} eV; {error}.")
    if series.is_open_shell.any():
        warnings.append(f"{int(series.is_open_shell.sum())} lengths have an open shell and are left out of the fits.")
    if series.n_gap_levels:
        warnings.append(f"Long pieces have {series.n_gap_levels} gap levels; the fits rest on the extended gap.")
    elif series.reason:
        warnings.append(f"There is no extended gap: {series.reason}.")
    if asked.study["ends"] == "ring":
        warnings.append(
            "Rings fall into families by electrons mod 4; one smooth curve through all of them means nothing."
        )
    return tuple(warnings)


LENGTH_SERIES = Analysis(
    question="length_series",
    meaning="gap against the number of cells, the computed limit, and how far popular forms miss it",
    example='question = "length_series"\ncells = "1..40"\nfits = ["inverse", "inverse-square", "kuhn"]\n',
    fields=(LENGTHS, *CUT, FITS, OSCILLATORS),
    quantities=(
        QuantityName("band_gap", "difference", "gap of the infinite system, from its bands"),
        QuantityName("limit_<fit>", "fit", "limit of a fitted form"),
        QuantityName("gap_<N>", "difference", "HOMO–LUMO distance of N cells"),
        QuantityName("extended_gap_<N>", "difference", "gap of N cells without gap levels"),
    ),
    inspect=inspect,
    compute=compute,
    report=report,
    tabulate=tabulate,
    draw=draw,
    warn=warn,
)
