"""The question ``length_series``: gap against length, the computed limit, and how far popular forms miss it."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from bandbook.analyses.analysis import Analysis, Asked, counted
from bandbook.analyses.length_series_figures import draw
from bandbook.analyses.measured_series import (
    MEASURED,
    Measured,
    inspect_measured,
    measured_of,
    measured_quantities,
    measured_tables,
)
from bandbook.analyses.piece_fields import CUT, LENGTHS, cut_of, inspect_piece
from bandbook.exhibits import KINDS, Column, Quantity, QuantityName, Table, typeset
from bandbook.model import Model
from bandbook.parameters import Field, Problem
from bandbook.solver import Levels, Places, place_on_bands, solve_levels
from bandbook.solver.fits import FORMS, Fit, fit_series
from bandbook.solver.series import Cut, Series, gap_series

FITS = Field("fits", "choices", "forms to fit", default=("inverse", "inverse-square"), choices=tuple(FORMS))
#: Lengths whose levels the picture on the band shows, where the study has them, and sites of the longest.
SHOWN = (2, 4, 6, 10, 20)
MOST_ON_BAND = 60
OSCILLATORS = Field("oscillators_per_cell", "integer", "oscillators of a cell, for the Kuhn form", default=1, least=1)


@dataclass(frozen=True, eq=False)
class Family:
    """Lengths that lie on one curve, and the forms fitted to them.

    Attributes:
        name: ``""`` for all lengths; of rings ``"4m"``, ``"4m+2"`` or ``"odd"``, by their electrons.
        fitted: Which lengths the fits rest on, ``(length,)``.
        fits: A fit for each form that was asked.
    """

    name: str
    fitted: NDArray[np.bool_]
    fits: tuple[Fit, ...]


@dataclass(frozen=True, eq=False)
class SeriesResult:
    """What the question gave.

    Attributes:
        series: The gaps.
        families: One, or of rings one for each residue of the electrons that has a closed shell.
        uses_extended: Whether the fits rest on the extended gap.
        measured: The measured series, or ``None``.
        on_band: A few of the lengths with their levels, for the picture of levels on the band.
    """

    series: Series
    families: tuple[Family, ...]
    uses_extended: bool
    measured: Measured | None = None
    on_band: tuple[tuple[int, Levels, Places], ...] = ()

    @property
    def fits(self) -> tuple[tuple[str, Fit], ...]:
        """Every fit with the name of its family, which is empty where there is one."""
        one = len(self.families) == 1
        return tuple(("" if one else family.name, fit) for family in self.families for fit in family.fits)

    @property
    def fitted(self) -> NDArray[np.bool_]:
        """Which lengths fits rest on, ``(length,)``."""
        return np.asarray(np.any([family.fitted for family in self.families], axis=0))

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
    return [*inspect_piece(one, model), *inspect_measured(study)]


def compute(asked: Asked) -> SeriesResult:
    """Solve every length and fit every form."""
    study = asked.study
    keys = cut_of(study)
    cut = Cut(keys["ends"], tuple(keys["add"]), tuple(keys["drop"]), tuple(keys["changes"]))
    series = gap_series(asked.model, lengths=study["cells"], cut=cut)
    uses_extended = bool(series.n_gap_levels)
    values = series.extended_gap if uses_extended else series.gap
    closed = np.isfinite(values) & ~series.is_open_shell
    families = tuple(
        Family(name, fitted, tuple(
            fit_series(
                form, series.n_cells[fitted].astype(float), values[fitted], oscillators=study["oscillators_per_cell"]
            )
            for form in study["fits"]
        ))
        for name, fitted in _families(series, closed, is_ring=keys["ends"] == "ring")
    )  # fmt: skip
    return SeriesResult(series, families, uses_extended, measured_of(study), _on_band(asked.model, study["cells"], cut))


def _families(series: Series, closed: NDArray[np.bool_], *, is_ring: bool) -> list[tuple[str, NDArray[np.bool_]]]:
    """Return which closed-shell lengths lie on one curve: all, or of rings those of 4m, 4m + 2 and odd electrons.

    Source: hueckel1931.
    """
    if not is_ring:
        return [("", closed)]
    rest = series.electrons % 4
    found = [("4m", closed & (rest == 0)), ("4m+2", closed & (rest == 2)), ("odd", closed & (rest % 2 == 1))]
    return [(name, chosen) for name, chosen in found if chosen.any()] or [("", closed)]


def _on_band(model: Model, lengths: Sequence[int], cut: Cut) -> tuple[tuple[int, Levels, Places], ...]:
    """Return a few short lengths with their levels and the place of these on the bands."""
    short = [n for n in sorted(lengths) if n > 1 and n * model.n_sites <= MOST_ON_BAND]
    chosen = [n for n in SHOWN if n in short][:4] or short[:3]
    found = []
    for n_cells in chosen:
        piece = cut.piece(model, n_cells)
        levels = solve_levels(piece)
        found.append((n_cells, levels, place_on_bands(model, piece, levels)))
    return tuple(found)


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
        asked.quantity(
            f"limit_{fit.form}{'_' if family else ''}{family}", "fit", fit.limit,
            f"limit of the form {FORMS[fit.form].formula}" + (f", rings of {family} electrons" if family else ""),
        )
        for family, fit in result.fits
    )  # fmt: skip
    measured = measured_quantities(asked, result.measured) if result.measured else ()
    return (limit, *fits, *measured, *gaps)


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
    if result.measured:
        computed = {int(n): float(gap) for n, gap in zip(series.n_cells, series.gap, strict=True) if np.isfinite(gap)}
        tables += measured_tables(result.measured, computed)
    return tuple(tables)


def _fits_table(result: SeriesResult) -> Table:
    heads = (
        Column("family", "rings of", "electrons of the rings that lie on one curve"),
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
        (family, fit.form, FORMS[fit.form].formula, fit.limit, result.miss(fit), fit.window_error, fit.rms,
         fit.conjugation_length, _parameters(fit), fit.reason)
        for family, fit in result.fits
    )  # fmt: skip
    basis = "extended gap" if result.uses_extended else "gap"
    if len(result.families) == 1:
        return Table("fits", _fits_caption(basis), heads[1:], tuple(row[1:] for row in rows))
    return Table("fits", _fits_caption(basis), heads, rows)


def _fits_caption(basis: str) -> str:
    return f"Forms fitted to the {basis}, and how far each misses the computed limit."


def _parameters(fit: Fit) -> str:
    """Return the parameters of a fit as text, with the decimals of a coefficient."""
    decimals = KINDS["coefficient"].decimals
    return ", ".join(f"{name} = {typeset(value, decimals)}" for name, value in fit.parameters.items())


def warn(asked: Asked, result: SeriesResult) -> tuple[str, ...]:
    """Return what a reader could be misled by."""
    series = result.series
    warnings = []
    for family, fit in result.fits:
        miss = abs(result.miss(fit) or 0.0)
        if miss > (fit.window_error or 0.0) + 1e-5:
            error = (
                f"its window error is {typeset(fit.window_error, 3)} eV"
                if fit.window_error is not None
                else "it has no window error"
            )
            where = f" for rings of {family} electrons" if family else ""
            warnings.append(f"The form {fit.form} misses the computed limit{where} by {typeset(miss, 3)} eV; {error}.")
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
        warnings.append("Rings fall into families by electrons mod 4, and each has fits of its own.")
    if result.measured:
        warnings.append(
            "What was measured is no one-electron gap: excitons, solvent, twisting and end groups stand between them."
        )
    return tuple(warnings)


LENGTH_SERIES = Analysis(
    question="length_series",
    meaning="gap against the number of cells, the computed limit, and how far popular forms miss it",
    example='question = "length_series"\ncells = "1..40"\nfits = ["inverse", "inverse-square", "kuhn"]\n',
    fields=(LENGTHS, *CUT, FITS, OSCILLATORS, MEASURED),
    quantities=(
        QuantityName("band_gap", "difference", "gap of the infinite system, from its bands"),
        QuantityName(
            "limit_<fit>", "fit", "limit of a fitted form; of several families of rings with their name after it"
        ),
        QuantityName("measured_limit_<fit>", "fit", "limit of a form fitted to the measured series"),
        QuantityName("measured_limit_<fit>_error", "fit", "standard error of that limit"),
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
