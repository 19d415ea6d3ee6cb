"""The question ``length_series``: gap against length, the computed limit, and how far popular forms miss it."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from bandbook.analyses.analysis import Analysis, Asked, counted
from bandbook.analyses.length_series_figures import draw
from bandbook.analyses.piece_fields import CUT, LENGTHS, cut_of, inspect_piece
from bandbook.exhibits import KINDS, Column, Quantity, QuantityName, Table, typeset
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

    @property
    def limit(self) -> float | None:
        """Gap of the infinite system, eV: 0 where bands touch or overlap, ``None`` where no band is filled or empty."""
        series = self.series
        return None if series.kind == "insulator" and not series.band_gap else series.band_gap

    def miss(self, fit: Fit) -> float | None:
        """Return the limit of a fit less the computed one, eV, or ``None``."""
        return None if fit.limit is None or self.limit is None else fit.limit - self.limit


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
    limit = asked.quantity("band_gap", "difference", result.limit, "gap of the infinite system, from its bands")
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
        Column("parameters", "parameters", "parameters of the form, energies in eV, N in cells"),
        Column("remark", "remark", "why there is no fit"),
    )
    rows = tuple(
        (fit.form, FORMS[fit.form].formula, fit.limit, result.miss(fit), fit.window_error, fit.rms,
         fit.conjugation_length, _parameters(fit), fit.reason)
        for fit in result.fits
    )  # fmt: skip
    basis = "extended gap" if result.uses_extended else "gap"
    return Table("fits", f"Forms fitted to the {basis}, and how far each misses the computed limit.", heads, rows)


def _parameters(fit: Fit) -> str:
    """Return the parameters of a fit as text, with the decimals of a coefficient."""
    decimals = KINDS["coefficient"].decimals
    return ", ".join(f"{name} = {typeset(value, decimals)}" for name, value in fit.parameters.items())


def warn(asked: Asked, result: SeriesResult) -> tuple[str, ...]:
    """Return what a reader could be misled by."""
    series = result.series
    warnings = []
    for fit in result.fits:
        miss = abs(result.miss(fit) or 0.0)
        if miss > (fit.window_error or 0.0) + 1e-5:
            error = (
                f"its window error is {typeset(fit.window_error, 3)} eV"
                if fit.window_error is not None
                else "it has no window error"
            )
            warnings.append(f"The form {fit.form} misses the computed limit by {typeset(miss, 3)} eV; {error}.")
    if series.is_open_shell.any():
        warnings.append(
            f"{counted(int(series.is_open_shell.sum()), 'length')} with an open shell: left out of the fits."
        )
    if series.n_gap_levels:
        levels = counted(series.n_gap_levels, "gap level")
        warnings.append(f"Long pieces have {levels} in the fundamental gap; the fits rest on the extended gap.")
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
