"""Laws of principal component regression, classical least squares and calibration curves."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from quant.regression.classical_least_squares import ClassicalLeastSquares
from quant.regression.pcr import PCR
from quant.regression.pls import PLS
from quant.statistics.curve import curve_value, fit_quadratic, inverse_quadratic
from quant.statistics.straight_line import fit_line, inverse_interval

seeds = st.integers(0, 10_000)
factors = st.floats(0.01, 100)


def mixtures(seed, n=12, k=20, p=3):
    rng = np.random.default_rng(seed)
    C, K = rng.uniform(0.2, 2, (n, p)), rng.uniform(0, 1, (p, k))
    return C, C @ K + 0.01 * rng.standard_normal((n, k))


@given(seeds, factors)
@settings(max_examples=30, deadline=None)
def test_the_unit_of_the_ordinate_does_not_matter(seed, scale):
    C, X = mixtures(seed)
    for make, y in ((lambda: PCR(3), C[:, 0]), (lambda: ClassicalLeastSquares(["b", "c"]), C)):
        one, two = make().fit(X, y), make().fit(scale * X, y)
        assert np.allclose(one.predict(X), two.predict(scale * X), rtol=1e-7, atol=1e-8)
        assert np.allclose(one.leverage_each(X), two.leverage_each(scale * X), rtol=1e-7)
        assert np.allclose(scale**2 * one.residual_each(X), two.residual_each(scale * X), rtol=1e-6, atol=1e-12)


@given(seeds, st.permutations(range(12)))
@settings(max_examples=30, deadline=None)
def test_the_order_of_the_samples_does_not_matter(seed, order):
    C, X = mixtures(seed)
    for make, y in ((lambda: PCR(3), C[:, 0]), (lambda: ClassicalLeastSquares(["b", "c"], background=True), C)):
        assert np.allclose(make().fit(X, y).predict(X), make().fit(X[order], y[order]).predict(X), rtol=1e-7, atol=1e-8)


@given(seeds)
@settings(max_examples=30, deadline=None)
def test_rotating_the_points_changes_no_prediction_of_pcr(seed):
    C, X = mixtures(seed)
    turn = np.linalg.qr(np.random.default_rng(seed + 1).standard_normal((20, 20)))[0]
    one, two = PCR(4).fit(X, C[:, 0]), PCR(4).fit(X @ turn, C[:, 0])
    assert np.allclose(one.predict_each(X), two.predict_each(X @ turn), rtol=1e-7, atol=1e-8)
    assert np.allclose(one.residual_each(X), two.residual_each(X @ turn), rtol=1e-6, atol=1e-10)


@given(seeds)
@settings(max_examples=30, deadline=None)
def test_with_every_factor_pcr_is_pls(seed):
    rng = np.random.default_rng(seed)
    X, y = rng.standard_normal((15, 5)), rng.standard_normal(15)
    one, two = PCR(5).fit(X, y), PLS(5).fit(X, y)
    assert np.allclose(one.coefficients_[-1], two.coefficients_[-1], rtol=1e-6, atol=1e-8)
    assert np.allclose(one.leverage_each(X)[-1], two.leverage_each(X)[-1], rtol=1e-6)


@given(seeds)
@settings(max_examples=30, deadline=None)
def test_contents_of_summed_spectra_are_summed(seed):
    C, X = mixtures(seed)
    model = ClassicalLeastSquares(["b", "c"], baseline="slope").fit(X, C)
    assert np.allclose(model.contents(X[:6] + X[6:]), model.contents(X[:6]) + model.contents(X[6:]), rtol=1e-8)


@given(seeds)
@settings(max_examples=30, deadline=None)
def test_held_contents_are_never_negative_nor_better_than_free_ones(seed):
    C, X = mixtures(seed)
    new = np.random.default_rng(seed + 2).standard_normal((5, 20))
    free = ClassicalLeastSquares(["b", "c"]).fit(X, C)
    held = ClassicalLeastSquares(["b", "c"], non_negative=True).fit(X, C)
    assert (held.contents(new) >= 0).all()
    assert (held.residual_each(new) >= free.residual_each(new) * (1 - 1e-9)).all()


@given(st.floats(-10, 10), st.floats(0.1, 10), st.floats(-0.4, 2), st.floats(-5, 5), st.floats(0.5, 50), st.booleans())
@settings(max_examples=60, deadline=None)
def test_a_quadratic_read_backwards_gives_the_content_back(c0, c1, bend, low, width, falling):
    sign = -1.0 if falling else 1.0
    x = np.linspace(low, low + width, 7)
    u = (x - low) / width
    curve = fit_quadratic(x, sign * (c0 + c1 * (u + bend * u**2)))  # slope c1·(1 + 2·bend·u) > 0 on the range
    inside = np.linspace(low, low + width, 31)
    assert np.allclose(inverse_quadratic(curve, curve_value(curve, inside)), inside, rtol=1e-7, atol=1e-7 * width)


@given(seeds, factors)
@settings(max_examples=40, deadline=None)
def test_the_scale_of_weights_does_not_matter_if_the_unknown_shares_it(seed, scale):
    rng = np.random.default_rng(seed)
    x = np.arange(1.0, 9)
    y, w = 2 * x + 0.1 * rng.standard_normal(8), rng.uniform(0.2, 3, 8)
    one = inverse_interval(fit_line(x, y, w), [9.0], 2.4, weight=0.7)
    two = inverse_interval(fit_line(x, y, scale * w), [9.0], 2.4, weight=0.7 * scale)
    assert np.allclose([one.low, one.high], [two.low, two.high], rtol=1e-9)
