"""The measured part of a length series: its field, its fits, its quantities and tables."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from bandbook.analyses.analysis import Asked
from bandbook.exhibits import Column, Quantity, Table, typeset
from bandbook.parameters import Field, Problem
from bandbook.solver.fits import FORMS
from bandbook.solver.measured import MeasuredFit, fit_measured, in_ev, points_needed, student_factor

Real = NDArray[np.float64]

MEASURED = Field("measured", "row", "a measured series, from a file or written here", default=None, fields=(
    Field("file", "text", "CSV file below the content folder, such as data/gaps.csv", default=None),
    Field("length", "text", "its column of lengths, in cells", default="N"),
    Field("gap", "text", "its column of gaps", default="gap"),
    Field("u", "text", "its column of standard uncertainties", default=None),
    Field("unit", "choice", "unit of gaps and uncertainties; nm are wavelengths", default="eV", choices=("eV", "nm")),
    Field("label", "text", "what was measured, for figures and tables", default="measured"),
    Field("lengths", "integers", "the lengths, without a file", default=None, least=1, length=(1, 10_000)),
    Field("gaps", "numbers", "the gaps, without a file", default=None, above=0, length=(1, 10_000)),
    Field("errors", "numbers", "standard uncertainties, without a file", default=None, above=0, length=(1, 10_000)),
))  # fmt: skip


@dataclass(frozen=True, eq=False)
class Measured:
    """A measured series in eV.

    Attributes:
        n_cells: Lengths, ascending, ``(point,)``.
        gap: eV, ``(point,)``.
        u: Standard uncertainties, eV, ``(point,)``, or ``None``.
        label: What was measured.
        fits: A fit for each form that was asked.
    """

    n_cells: NDArray[np.intp]
    gap: Real
    u: Real | None
    label: str
    fits: tuple[MeasuredFit, ...]


def inspect_measured(study: Mapping[str, Any]) -> list[Problem]:
    """Return what is wrong with the measured series: lists of different lengths, a length twice, too few points."""
    given = study["measured"]
    if given is None:
        return []
    lengths, gaps, errors = given["lengths"], given["gaps"], given["errors"]
    if lengths is None or gaps is None:
        return [
            Problem("a measured series without numbers", "a file, or lengths and gaps", "add file = …", ("measured",))
        ]
    if len(gaps) != len(lengths) or (errors is not None and len(errors) != len(lengths)):
        sizes = [f"{len(lengths)} lengths", f"{len(gaps)} gaps"] + ([] if errors is None else [f"{len(errors)} errors"])
        return [Problem(" and ".join(sizes), "as many of each", "correct the lists", ("measured",))]
    if len(set(lengths)) != len(lengths):
        return [Problem("a length stands twice", "each length once", "take the mean", ("measured", "lengths"))]
    return [_few(form, len(lengths)) for form in study["fits"] or () if len(lengths) < points_needed(form)]


def _few(form: str, n_points: int) -> Problem:
    found = f"{n_points} measured points for the form {form}"
    allowed = f"it needs {points_needed(form)}: three more than its parameters"
    return Problem(found, allowed, "take the form out of fits, or measure more lengths", ("fits",))


def measured_of(study: Mapping[str, Any]) -> Measured | None:
    """Return the measured series of a study with its fits; nm become eV by E = hc/λ, u_E = hc u_λ/λ²."""
    given = study["measured"]
    if given is None:
        return None
    order = np.argsort(np.array(given["lengths"], dtype=np.intp), kind="stable")
    n_cells = np.array(given["lengths"], dtype=np.intp)[order]
    gap = np.array(given["gaps"], dtype=np.float64)[order]
    u = None if given["errors"] is None else np.array(given["errors"], dtype=np.float64)[order]
    if given["unit"] == "nm":
        gap, u = in_ev(gap, u)
    fits = fit_measured(study["fits"], n_cells.astype(float), gap, u, oscillators=study["oscillators_per_cell"])
    return Measured(n_cells, gap, u, str(given["label"]), fits)


def measured_quantities(asked: Asked, measured: Measured) -> tuple[Quantity, ...]:
    """Return the extrapolated limits and their standard errors."""
    found = []
    for fit in measured.fits:
        meaning = f"limit of {FORMS[fit.form].formula}, fitted to the measured series"
        limit = asked.quantity(f"measured_limit_{fit.form}", "fit", fit.limit, meaning)
        error = asked.quantity(
            f"measured_limit_{fit.form}_error", "fit", fit.limit_error, f"standard error of the {meaning}"
        )
        found += [limit, error]
    return tuple(found)


def measured_tables(measured: Measured, computed: Mapping[int, float]) -> tuple[Table, ...]:
    """Return measured and computed gaps side by side, and the fits with their weights."""
    heads = (
        Column("cells", "N", "number of cells"),
        Column("measured", "measured", "measured gap", "eV", 6, 4),
        Column("u", "u", "standard uncertainty", "eV", 6, 4),
        Column("computed", "computed", "computed gap", "eV", 6, 4),
        Column("difference", "difference", "measured less computed", "eV", 6, 4),
    )
    errors: Sequence[float | None] = (
        [None] * len(measured.gap) if measured.u is None else [float(u) for u in measured.u]
    )
    rows = tuple(
        (int(n), float(gap), u, computed.get(int(n)), None if int(n) not in computed else float(gap) - computed[int(n)])
        for n, gap, u in zip(measured.n_cells, measured.gap, errors, strict=True)
    )
    chosen = [place for place, head in enumerate(heads) if head.name != "u" or measured.u is not None]
    compared = Table(
        "measured", f"Measured ({measured.label}) and computed gaps.", tuple(heads[place] for place in chosen),
        tuple(tuple(row[place] for place in chosen) for row in rows),
    )  # fmt: skip
    return (compared, _fits_table(measured)) if measured.fits else (compared,)


def _fits_table(measured: Measured) -> Table:
    heads = (
        Column("form", "form", "name of the form"),
        Column("limit", "limit", "gap at infinite length", "eV", 5, 4),
        Column("error", "standard error", "standard error of the limit", "eV", 5, 4),
        Column("factor", "t", "factor for 95 % coverage of a standard error from the residuals", "", 3, 2),
        Column("chi2", "χ²", "weighted sum of squares", "", 4, 2),
        Column("rms", "rms", "root mean square deviation", "eV", 5, 4),
        Column("aicc", "AICc", "criterion of Akaike, corrected for few points; smaller is better", "", 3, 1),
        Column("weight", "weight", "weight among these forms", "", 6, 3),
        Column("parameters", "parameters", "parameters of the form with standard errors, energies in eV"),
        Column("remark", "remark", "why there is no fit"),
    )
    rows = []
    for fit in measured.fits:
        factor = (
            None
            if measured.u is not None or fit.limit is None
            else student_factor(len(measured.gap), len(FORMS[fit.form].parameters))
        )
        words = ", ".join(
            f"{name} = {typeset(value, 4, error)}" for name, (value, error) in (fit.parameters or {}).items()
        )
        rows.append(
            (fit.form, fit.limit, fit.limit_error, factor, fit.chi2, fit.rms, fit.aicc, fit.weight, words, fit.reason)
        )
    chosen = [
        place for place, head in enumerate(heads)
        if head.decimals is None or any(row[place] is not None for row in rows)
    ]  # fmt: skip
    scale = "the given uncertainties" if measured.u is not None else "the residuals; multiply by t for 95 %"
    return Table(
        "measured-fits", f"Forms fitted to the measured series; standard errors by {scale}.",
        tuple(heads[place] for place in chosen), tuple(tuple(row[place] for place in chosen) for row in rows),
    )  # fmt: skip
