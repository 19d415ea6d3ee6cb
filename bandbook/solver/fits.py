"""Popular forms of gap against length, fitted to computed series: how far each misses the limit that is known.

A computed series has no noise, so no standard errors: the window error is the spread of the limit when the shortest
pieces are dropped.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]

#: Shortest pieces that are dropped, one after the other, for the window error.
WINDOWS: Final = 3
#: The effective conjugation length is where the gap is within this part of E₁ − E∞ of its limit.
CONJUGATION: Final = 0.01


@dataclass(frozen=True)
class Form:
    """A form of gap against N.

    Attributes:
        name: Its word in ``fits``.
        formula: As a page shows it.
        parameters: Their names, the limit's own not among them.
        curve: ``(N, parameters) → gap``.
        start: ``(N, gap) → parameters`` to start from.
        limit: ``parameters → gap`` of the infinite system.
    """

    name: str
    formula: str
    parameters: tuple[str, ...]
    curve: Callable[[Real, Real], Real]
    start: Callable[[Real, Real], Real]
    limit: Callable[[Real], float]
    is_linear: bool = False


@dataclass(frozen=True)
class Fit:
    """One form fitted to one series.

    Attributes:
        form: Its name.
        limit: Gap of the infinite system, eV, or ``None``.
        parameters: Name → value.
        rms: Root mean square deviation, eV, or ``None``.
        window_error: Spread of the limit over the windows, eV, or ``None``.
        conjugation_length: Cells at which the exponential form is within 1 % of E₁ − E∞ of its limit, or ``None``.
        reason: Why there is no fit; empty otherwise.
    """

    form: str
    limit: float | None
    parameters: Mapping[str, float]
    rms: float | None
    window_error: float | None
    conjugation_length: float | None = None
    reason: str = ""

    def curve(self, n_cells: Real, *, oscillators: int = 1) -> Real:
        """Return the fitted gap at some lengths, eV."""
        values = np.array([self.parameters[name] for name in FORMS[self.form].parameters])
        return FORMS[self.form].curve(form_lengths(self.form, n_cells, oscillators), values)


def form_lengths(form: str, n_cells: Real, oscillators: int) -> Real:
    """Return the lengths as a form counts them: oscillators for the Kuhn form, otherwise cells."""
    numbers = np.asarray(n_cells, dtype=np.float64)
    return numbers * oscillators if form == "kuhn" else numbers


def _line(n: Real, gap: Real, power: int) -> Real:
    return np.asarray(np.polynomial.polynomial.polyfit(n ** (-float(power)), gap, 1), dtype=np.float64)


def _kuhn(n: Real, p: Real) -> Real:
    return np.asarray(p[0] * np.sqrt(np.maximum(1 + 2 * p[1] * np.cos(np.pi / (n + 1)), 1e-12)), dtype=np.float64)


def _shifted_start(n: Real, gap: Real) -> Real:
    line = _line(n + 0.5, gap, 2)
    return np.array([line[0], line[1], 0.5])


def _quadratic_start(n: Real, gap: Real) -> Real:
    return np.asarray(np.polynomial.polynomial.polyfit(1 / n, gap, 2), dtype=np.float64)


def _exponential_start(n: Real, gap: Real) -> Real:
    del n
    return np.array([gap[-1], gap[0] * 1.05, 0.5])


FORMS: Final[Mapping[str, Form]] = {
    form.name: form
    for form in (
        Form(
            "inverse", "A + B/N", ("A", "B"),
            lambda n, p: p[0] + p[1] / n, lambda n, gap: _line(n, gap, 1), lambda p: float(p[0]), is_linear=True,
        ),
        Form(
            "inverse-square", "A + B/N²", ("A", "B"),
            lambda n, p: p[0] + p[1] / n**2, lambda n, gap: _line(n, gap, 2), lambda p: float(p[0]), is_linear=True,
        ),
        Form(
            "shifted-inverse-square", "A + B/(N + δ)²", ("A", "B", "delta"),
            lambda n, p: p[0] + p[1] / (n + p[2]) ** 2, _shifted_start, lambda p: float(p[0]),
        ),
        Form(
            "quadratic", "A + B/N + C/N²", ("A", "B", "C"),
            lambda n, p: p[0] + p[1] / n + p[2] / n**2,
            _quadratic_start, lambda p: float(p[0]), is_linear=True,
        ),
        Form(
            "kuhn", "E₀ √(1 + 2r cos(π/(N + 1)))", ("E0", "r"),
            _kuhn, lambda _, gap: np.array([1.05 * gap.max(), -0.4]),
            lambda p: float(p[0] * np.sqrt(max(1 + 2 * p[1], 0.0))),
        ),
        Form(
            "exponential", "E∞ + (E₁ − E∞) exp(−c(N − 1))", ("Einf", "E1", "c"),
            lambda n, p: p[0] + (p[1] - p[0]) * np.exp(-p[2] * (n - 1)), _exponential_start, lambda p: float(p[0]),
        ),
    )
}  # fmt: skip


def fit_series(form: str, n_cells: Real, gap: Real, *, oscillators: int = 1) -> Fit:
    """Fit a form to a computed series.

    Args:
        form: A name of :data:`FORMS`.
        n_cells: Lengths, ascending, ``(length,)``.
        gap: Gaps, eV, finite, ``(length,)``.
        oscillators: Oscillators per cell, for the Kuhn form.

    >>> fit_series("inverse", np.array([1.0, 2.0, 4.0]), np.array([3.0, 2.0, 1.5])).limit.__round__(9)
    1.0
    """
    chosen = FORMS[form]
    n = form_lengths(form, n_cells, oscillators)
    if len(n) <= len(chosen.parameters):
        reason = f"{len(n)} lengths, and the form has {len(chosen.parameters)} parameters"
        return Fit(form, None, {}, None, None, reason=reason)
    values = _fitted(chosen, n, gap)
    if values is None:
        return Fit(form, None, {}, None, None, reason="the fit does not converge")
    windows = [
        _fitted(chosen, n[first:], gap[first:])
        for first in range(1, WINDOWS + 1)
        if len(n) - first > len(chosen.parameters)
    ]
    limits = [chosen.limit(values), *(chosen.limit(window) for window in windows if window is not None)]
    return Fit(
        form,
        chosen.limit(values),
        dict(zip(chosen.parameters, (float(value) for value in values), strict=True)),
        float(np.sqrt(np.mean((chosen.curve(n, values) - gap) ** 2))),
        float(max(limits) - min(limits)) if len(limits) > 1 else None,
        _conjugation_length(values) if form == "exponential" else None,
    )


def _fitted(form: Form, n: Real, gap: Real) -> Real | None:
    """Return the parameters of the least-squares fit, or ``None`` where it does not converge."""
    start = form.start(n, gap)
    if form.is_linear:
        return start
    from scipy import optimize

    found = optimize.least_squares(
        _misses(form, n, gap), start, method="lm", x_scale=np.maximum(np.abs(start), 0.1),
        xtol=1e-14, ftol=1e-14, gtol=1e-14, max_nfev=20_000,
    )  # fmt: skip
    return np.asarray(found.x) if found.success and np.isfinite(found.x).all() else None


def _misses(form: Form, n: Real, gap: Real) -> Callable[[Real], Real]:
    def misses(values: Real) -> Real:
        return form.curve(n, values) - gap

    return misses


def _conjugation_length(values: Real) -> float | None:
    """Return N at which E(N) − E∞ is 1 % of E₁ − E∞: 1 + ln(100)/c."""
    return float(1 + np.log(1 / CONJUGATION) / values[2]) if values[2] > 0 else None
