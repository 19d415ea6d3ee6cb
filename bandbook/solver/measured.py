"""Popular forms of gap against length fitted to a measured series: standard errors, and how the forms compare.

With standard uncertainties u the fit is weighted by 1/u² and χ² is absolute; without, all points weigh the same and the
scale of the errors is that of the residuals, so that a coverage needs Student's t with n − p degrees of freedom.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.solver.fits import FORMS, Form, form_lengths

Real = NDArray[np.float64]
#: Points that a form needs besides its parameters: below, the corrected criterion has no meaning.
MORE_POINTS: Final = 3
#: Coverage that Student's factor is for.
_COVERAGE: Final = 0.95


@dataclass(frozen=True)
class MeasuredFit:
    """One form fitted to a measured series.

    Attributes:
        form: Its name.
        limit: Extrapolated to infinite length, eV, or ``None``.
        limit_error: Its standard error, eV.
        parameters: Name → value and standard error.
        chi2: Weighted sum of squares, with u; otherwise ``None``.
        rms: Root mean square deviation, eV.
        aicc: Akaike's criterion, corrected for few points; smaller is better.
        weight: Its weight among the forms that were fitted; they add up to 1.
        reason: Why there is no fit; empty otherwise.
    """

    form: str
    limit: float | None = None
    limit_error: float | None = None
    parameters: Mapping[str, tuple[float, float]] | None = None
    chi2: float | None = None
    rms: float | None = None
    aicc: float | None = None
    weight: float | None = None
    reason: str = ""


def points_needed(form: str) -> int:
    """Return how many measured points a form needs: three more than its parameters.

    >>> points_needed("inverse")
    5
    """
    return len(FORMS[form].parameters) + MORE_POINTS


def fit_measured(
    forms: Sequence[str], n_cells: Real, gap: Real, u: Real | None = None, *, oscillators: int = 1
) -> tuple[MeasuredFit, ...]:
    """Fit forms to a measured series and weigh them against one another.

    AICc = χ² + 2p + 2p(p + 1)/(n − p − 1) with u, and n ln(RSS/n) + 2q + 2q(q + 1)/(n − q − 1), q = p + 1, without; a
    weight is exp(−Δ/2) over the sum of those of all forms.

    Args:
        forms: Names of :data:`FORMS`.
        n_cells: Lengths, ``(point,)``.
        gap: Measured gaps, eV, ``(point,)``.
        u: Standard uncertainties, eV, ``(point,)``, or ``None``.
        oscillators: Oscillators per cell, for the Kuhn form.

    Source: burnham2002.

    >>> fits = fit_measured(["inverse"], np.arange(1.0, 7.0), 1 + 2 / np.arange(1.0, 7.0), np.full(6, 0.1))
    >>> round(fits[0].limit, 6), round(fits[0].chi2, 6), fits[0].weight
    (1.0, 0.0, 1.0)
    """
    found = [_fit(FORMS[name], form_lengths(name, n_cells, oscillators), gap, u) for name in forms]
    known = [fit.aicc for fit in found if fit.aicc is not None]
    if not known:
        return tuple(found)
    best = min(known)
    total = sum(float(np.exp(-(value - best) / 2)) for value in known)
    return tuple(
        fit if fit.aicc is None else _with_weight(fit, float(np.exp(-(fit.aicc - best) / 2)) / total) for fit in found
    )


def student_factor(n_points: int, n_parameters: int) -> float:
    """Return by how much a standard error is multiplied for 95 % coverage without known uncertainties.

    >>> round(student_factor(7, 2), 3)
    2.571
    """
    from scipy import stats

    return float(stats.t.ppf((1 + _COVERAGE) / 2, n_points - n_parameters))


def in_ev(wavelength: Real, u: Real | None) -> tuple[Real, Real | None]:
    """Return wavelengths in nm as energies in eV, with their uncertainties.

    >>> round(float(in_ev(np.array([500.0]), None)[0][0]), 6)
    2.479684
    """
    from scipy import constants

    hc = constants.h * constants.c / constants.e * 1e9
    return hc / wavelength, None if u is None else hc * u / wavelength**2


def _with_weight(fit: MeasuredFit, weight: float) -> MeasuredFit:
    return replace(fit, weight=weight)


def _fit(form: Form, n: Real, gap: Real, u: Real | None) -> MeasuredFit:
    n_points, n_parameters = len(n), len(form.parameters)
    if n_points < n_parameters + MORE_POINTS:
        return MeasuredFit(form.name, reason=f"{n_points} points; the form needs {n_parameters + MORE_POINTS}")
    sigma = np.ones(n_points) if u is None else u
    solved = _solved(form, n, gap, sigma)
    if solved is None:
        return MeasuredFit(form.name, reason="the fit does not converge")
    values, covariance = solved
    squares = float(np.sum(((form.curve(n, values) - gap) / sigma) ** 2))
    if u is None:
        covariance = covariance * (squares / (n_points - n_parameters))
    errors = np.sqrt(np.maximum(np.diag(covariance), 0.0))
    slope = _slope(form, values)
    return MeasuredFit(
        form.name,
        limit=form.limit(values),
        limit_error=float(np.sqrt(max(float(slope @ covariance @ slope), 0.0))),
        parameters={
            name: (float(value), float(error))
            for name, value, error in zip(form.parameters, values, errors, strict=True)
        },
        chi2=None if u is None else squares,
        rms=float(np.sqrt(np.mean((form.curve(n, values) - gap) ** 2))),
        aicc=_aicc(squares, n_points, n_parameters, has_u=u is not None),
    )


def _solved(form: Form, n: Real, gap: Real, sigma: Real) -> tuple[Real, Real] | None:
    """Return parameters and their covariance for errors ``sigma``; ``None`` where the fit does not converge."""
    from scipy import optimize

    def misses(values: Real) -> Real:
        return (form.curve(n, values) - gap) / sigma

    start = form.start(n, gap)
    found = optimize.least_squares(
        misses, start, method="lm", x_scale=np.maximum(np.abs(start), 0.1),
        xtol=1e-14, ftol=1e-14, gtol=1e-14, max_nfev=20_000,
    )  # fmt: skip
    slopes = np.asarray(found.jac, dtype=np.float64)
    curvature = slopes.T @ slopes
    if not found.success or not np.isfinite(found.x).all() or np.linalg.cond(curvature) > 1e15:
        return None
    return np.asarray(found.x, dtype=np.float64), np.asarray(np.linalg.inv(curvature), dtype=np.float64)


def _slope(form: Form, values: Real) -> Real:
    """Return the derivatives of the limit by the parameters, by central differences."""
    slope = np.zeros(len(values))
    for number, value in enumerate(values):
        step = 1e-6 * max(abs(float(value)), 1e-3)
        up, down = values.copy(), values.copy()
        up[number] += step
        down[number] -= step
        slope[number] = (form.limit(up) - form.limit(down)) / (2 * step)
    return slope


def _aicc(squares: float, n_points: int, n_parameters: int, *, has_u: bool) -> float | None:
    count = n_parameters if has_u else n_parameters + 1
    rest = n_points - count - 1
    if rest < 1:
        return None
    misfit = squares if has_u else n_points * float(np.log(max(squares / n_points, 1e-300)))
    return misfit + 2 * count + 2 * count * (count + 1) / rest
