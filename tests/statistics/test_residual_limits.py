"""Limits of Q against computed cases, and the caution about calibration residuals."""

import numpy as np
import pytest
from scipy import optimize, stats

from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.residual_limits import box, chi_square_by_moments, jackson_mudholkar, residual_variances

LAMBDA = [0.5, 0.3, 0.2]  # θ = 1, 0.38, 0.16; h0 = 0.261311


def test_the_computed_case():
    # Jackson & Mudholkar 1979; Box 1954: formulas from memory, values computed.
    assert jackson_mudholkar(LAMBDA, 0.95) == pytest.approx(2.74017, abs=5e-6)
    assert jackson_mudholkar(LAMBDA, 0.99) == pytest.approx(4.21779, abs=5e-6)
    assert box(LAMBDA, 0.95) == pytest.approx(2.72291, abs=5e-6)
    assert box(LAMBDA, 0.99) == pytest.approx(4.02376, abs=5e-6)


def test_equal_variances_are_chi_square():
    # Ten variances of 1 (computed): h0 = 1/3, 18.2918 against the exact 18.3070.
    assert jackson_mudholkar(np.ones(10)) == pytest.approx(18.2918, abs=5e-5)
    assert box(np.ones(10)) == pytest.approx(18.3070, abs=5e-5)
    assert box(np.ones(10)) == pytest.approx(stats.chi2.ppf(0.95, 10))


def test_a_negative_power_keeps_its_sense():
    # One large variance among many: h0 = 1 - 2·θ1·θ3/(3·θ2²) below zero, the limit still an upper one.
    variances = np.r_[3.0, np.full(60, 0.2)]
    theta = [np.sum(variances**i) for i in (1, 2, 3)]
    assert 1 - 2 * theta[0] * theta[2] / (3 * theta[1] ** 2) < 0
    draws = np.random.default_rng(5).normal(size=(20_000, 61)) ** 2 @ variances
    assert 0.93 < np.mean(draws <= jackson_mudholkar(variances, 0.95)) < 0.98  # with |h0| it would be 0.05
    assert np.mean(draws <= box(variances, 0.95)) == pytest.approx(0.95, abs=0.01)


def test_the_limit_passes_smoothly_through_power_zero():
    # h0 = 0 where 2·θ1·θ3 = 3·θ2²: here for 20 variances a beside one of 1.
    def excess(a):
        return 2 * (1 + 20 * a) * (1 + 20 * a**3) - 3 * (1 + 20 * a**2) ** 2

    root = optimize.brentq(excess, 0.02, 0.2)
    below, at, above = (jackson_mudholkar(np.r_[1.0, np.full(20, a)]) for a in (root - 1e-5, root, root + 1e-5))
    assert below < at < above
    assert at == pytest.approx((below + above) / 2, rel=1e-7)


def test_variances_are_those_of_the_principal_axes():
    residual = np.random.default_rng(6).normal(size=(8, 5))
    assert residual_variances(residual) == pytest.approx(np.linalg.eigvalsh(residual.T @ residual / 7)[::-1])
    assert residual_variances(residual, degrees_of_freedom=3.5) == pytest.approx(2 * residual_variances(residual))


def test_limits_from_calibration_residuals_flag_too_many_new_samples():
    # The caution in the module's text: 30 samples, 4 factors, here with white noise over 100 points.
    rng = np.random.default_rng(7)
    flagged = np.zeros(2)
    for _ in range(40):
        loadings = rng.normal(size=(4, 100)) * 3

        def draw(n, loadings=loadings):
            return rng.normal(size=(n, 4)) @ loadings + rng.normal(size=(n, 100)) * rng.uniform(0.7, 1.3, (n, 1))

        spectra, new = draw(30), draw(20)

        def residual(training, others):
            middle = training.mean(axis=0)
            axes = np.linalg.svd(training - middle, full_matrices=False)[2][:4]
            rest = others - middle - (others - middle) @ axes.T @ axes
            return np.sum(rest**2, axis=1)

        left_out = [residual(np.delete(spectra, i, 0), spectra[[i]])[0] for i in range(30)]
        q = residual(spectra, new)
        limits = chi_square_by_moments(residual(spectra, spectra)), chi_square_by_moments(left_out)
        flagged += [np.mean(q > limit) for limit in limits]
    fitted, honest = flagged / 40
    assert fitted > 0.15
    assert honest < 0.09


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError, match="no residual variance"):
        box([0.0, 0.0])
    with pytest.raises(ParameterError, match="negative"):
        jackson_mudholkar([1.0, -1.0])
    with pytest.raises(ParameterError, match="probability"):
        jackson_mudholkar([1.0], 95)
    with pytest.raises(ParameterError, match="use `box`"):
        jackson_mudholkar(np.r_[1.0, np.full(100_000, 5e-4)], 0.99)
    with pytest.raises(NotEnoughDataError, match="2 or more"):
        residual_variances(np.ones((1, 4)))
    with pytest.raises(ParameterError, match="above zero"):
        residual_variances(np.ones((3, 4)), degrees_of_freedom=0)
    with pytest.raises(NotEnoughDataError, match="at least 2"):
        chi_square_by_moments([1.0, 1.0])
    with pytest.raises(ParameterError, match="sums of squares"):
        chi_square_by_moments([1.0, -1.0])
