"""Fits to measured series: closed-form linear regression, an independent optimiser, and what the criterion is made of."""

import math

import numpy as np
import pytest
from scipy import constants, optimize, stats

from bandbook.solver.fits import FORMS
from bandbook.solver.measured import fit_measured, in_ev, points_needed, student_factor

N = np.array([2.0, 3, 4, 5, 6, 8, 10, 14])
NOISE = np.array([0.011, -0.008, 0.004, 0.006, -0.013, 0.002, 0.009, -0.005])
U = np.array([0.03, 0.02, 0.02, 0.01, 0.01, 0.01, 0.02, 0.02])


def test_a_straight_line_is_that_of_the_textbook() -> None:
    """Weighted least squares in closed form: (XᵀWX)⁻¹, source: any textbook of statistics."""
    gap = 1.5 + 3.1 / N + NOISE
    (fit,) = fit_measured(["inverse"], N, gap, U)
    design = np.stack([np.ones_like(N), 1 / N], axis=1) / U[:, None]
    covariance = np.linalg.inv(design.T @ design)
    expected = covariance @ design.T @ (gap / U)
    assert fit.limit == pytest.approx(expected[0], abs=1e-9)
    assert fit.limit_error == pytest.approx(math.sqrt(covariance[0, 0]), rel=1e-6)
    chi2 = float(np.sum(((gap - expected[0] - expected[1] / N) / U) ** 2))
    assert fit.chi2 == pytest.approx(chi2, rel=1e-9)
    assert fit.aicc == pytest.approx(chi2 + 4 + 12 / (8 - 3), rel=1e-9)


def test_without_uncertainties_the_residuals_give_the_scale() -> None:
    """scipy.stats.linregress has the same intercept and standard error."""
    gap = 1.5 + 3.1 / N + NOISE
    (fit,) = fit_measured(["inverse"], N, gap)
    line = stats.linregress(1 / N, gap)
    assert fit.limit == pytest.approx(line.intercept, abs=1e-9)
    assert fit.limit_error == pytest.approx(line.intercept_stderr, rel=1e-6)
    assert fit.chi2 is None
    squares = float(np.sum((gap - line.intercept - line.slope / N) ** 2))
    assert fit.aicc == pytest.approx(8 * math.log(squares / 8) + 6 + 24 / 4, rel=1e-9)


@pytest.mark.parametrize("form", ["kuhn", "exponential", "shifted-inverse-square"])
def test_curved_forms_agree_with_another_optimiser(form: str) -> None:
    """scipy.optimize.curve_fit with the exact parameters as its start."""
    truth = {"kuhn": [5.0, -0.45], "exponential": [1.6, 4.0, 0.4], "shifted-inverse-square": [1.4, 9.0, 0.8]}[form]
    chosen = FORMS[form]
    gap = chosen.curve(N, np.array(truth)) + NOISE
    (fit,) = fit_measured([form], N, gap, U)
    values, covariance = optimize.curve_fit(
        lambda n, *p: chosen.curve(n, np.array(p)),
        N,
        gap,
        p0=truth,
        sigma=U,
        absolute_sigma=True,
        xtol=1e-13,
        ftol=1e-13,
    )
    assert fit.parameters is not None
    assert [value for value, _ in fit.parameters.values()] == pytest.approx(list(values), rel=1e-5)
    assert [error for _, error in fit.parameters.values()] == pytest.approx(
        list(np.sqrt(np.diag(covariance))), rel=1e-3
    )
    if form == "kuhn":
        energy, ratio = values
        root = math.sqrt(1 + 2 * ratio)
        slope = np.array([root, energy / root])
        assert fit.limit_error == pytest.approx(math.sqrt(slope @ covariance @ slope), rel=1e-3)


def test_weights_prefer_the_form_that_made_the_series_and_add_up() -> None:
    gap = FORMS["kuhn"].curve(N, np.array([5.0, -0.45])) + NOISE / 4
    fits = {fit.form: fit for fit in fit_measured(["inverse", "kuhn", "exponential"], N, gap, U)}
    weights = {name: fit.weight or 0.0 for name, fit in fits.items()}
    assert sum(weights.values()) == pytest.approx(1.0)
    assert max(weights, key=lambda name: weights[name]) == "kuhn"
    assert weights["inverse"] / weights["kuhn"] == pytest.approx(
        math.exp(-((fits["inverse"].aicc or 0) - (fits["kuhn"].aicc or 0)) / 2)
    )


def test_too_few_points_are_said() -> None:
    (fit,) = fit_measured(["quadratic"], N[:5], N[:5] + 1.0)
    assert (fit.limit, fit.weight, fit.reason) == (None, None, "5 points; the form needs 6")
    assert points_needed("quadratic") == 6


def test_wavelengths() -> None:
    """E = hc/λ with hc = 1239.841984 eV nm (CODATA 2022, scipy.constants); u_E = hc u_λ/λ²."""
    energy, u = in_ev(np.array([400.0, 620.0]), np.array([4.0, 2.0]))
    hc = constants.physical_constants["Planck constant in eV/Hz"][0] * constants.c * 1e9
    assert energy == pytest.approx([hc / 400, hc / 620], rel=1e-12)
    assert u == pytest.approx([hc * 4 / 400**2, hc * 2 / 620**2], rel=1e-12)
    assert hc == pytest.approx(1239.841984, abs=1e-6)


def test_the_factor_is_that_of_the_table() -> None:
    """Student's t, 95 %, two-sided: 4 degrees 2.776, 10 degrees 2.228 (any table)."""
    assert student_factor(6, 2) == pytest.approx(2.776, abs=5e-4)
    assert student_factor(12, 2) == pytest.approx(2.228, abs=5e-4)
