"""Laws of the straight line: what another unit, order or origin may change, and what it may not."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from quant.statistics.straight_line import fit_line, fit_line_through_origin, inverse_interval, line_leverage

laws = settings(max_examples=50, deadline=None, derandomize=True)


@st.composite
def pairs(draw):
    rng = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))
    n = draw(st.integers(3, 20))
    x = np.sort(rng.uniform(1, 10, n)) + np.arange(n)
    return x, draw(st.floats(-3, 3)) + 2 * x + draw(st.sampled_from([0.01, 0.3, 3.0])) * rng.standard_normal(n)


@laws
@given(pairs())
def test_residuals_are_orthogonal_to_the_line(data):
    x, y = data
    line, origin = fit_line(x, y), fit_line_through_origin(x, y)
    residual = y - line.intercept - line.slope * x
    scale = np.abs(x).max() * np.abs(y).max() * x.size
    assert abs(residual.sum()) < 1e-13 * scale
    assert abs(residual @ x) < 1e-13 * scale
    assert abs((y - origin.slope * x) @ x) < 1e-13 * scale


@laws
@given(pairs())
def test_leverages_count_the_fitted_terms(data):
    x, y = data
    assert line_leverage(fit_line(x, y), x).sum() == pytest.approx(2)
    assert line_leverage(fit_line_through_origin(x, y), x).sum() == pytest.approx(1)


@laws
@given(pairs(), st.sampled_from([1e-3, 1e4]), st.sampled_from([1e-6, 50.0]), st.floats(-5, 5))
def test_another_unit_and_another_zero(data, of_x, of_y, shift):
    x, y = data
    line, other = fit_line(x, y), fit_line(of_x * x, of_y * (y + shift))
    assert other.slope == pytest.approx(line.slope * of_y / of_x, rel=1e-9)
    assert other.residual_sd == pytest.approx(line.residual_sd * of_y, rel=1e-8)
    first, second = inverse_interval(line, y, 2.5), inverse_interval(other, of_y * (y + shift), 2.5)
    assert first.form == second.form
    for name in ("value", "standard_error", "low", "high"):
        assert np.allclose(getattr(second, name), of_x * getattr(first, name), rtol=1e-7, atol=1e-7 * of_x)


@laws
@given(pairs())
def test_a_falling_signal_is_read_like_a_rising_one(data):
    x, y = data
    rising, falling = inverse_interval(fit_line(x, y), y, 2.5), inverse_interval(fit_line(x, -y), -y, 2.5)
    for name in ("value", "standard_error", "low", "high"):
        assert np.array_equal(getattr(rising, name), getattr(falling, name))


@laws
@given(pairs(), st.integers(1, 4))
def test_whole_weights_are_repeated_pairs(data, most):
    x, y = data
    weights = 1 + np.arange(x.size) % most
    weighted, repeated = fit_line(x, y, weights), fit_line(np.repeat(x, weights), np.repeat(y, weights))
    assert weighted.slope == pytest.approx(repeated.slope, rel=1e-10)
    assert weighted.sxx == pytest.approx(repeated.sxx, rel=1e-10)
    assert weighted.mean_share == pytest.approx(repeated.mean_share, rel=1e-12)


@laws
@given(pairs(), st.sampled_from([1e-3, 7.0]))
def test_only_the_ratio_of_weights_counts_for_the_line(data, factor):
    x, y = data
    weights = np.linspace(0.5, 2.0, x.size)
    line, scaled = fit_line(x, y, weights), fit_line(x, y, factor * weights)
    for name in ("slope", "intercept", "slope_sd", "intercept_sd", "covariance"):
        assert getattr(scaled, name) == pytest.approx(getattr(line, name), rel=1e-9, abs=1e-12)


@laws
@given(pairs())
def test_more_readings_narrow_the_interval(data):
    x, y = data
    line = fit_line(x, y)
    one, four = (inverse_interval(line, y, 2.5, readings=m) for m in (1, 4))
    assert (four.standard_error < one.standard_error).all()
    assert np.array_equal(one.value, four.value)


@laws
@given(pairs())
def test_the_symmetric_form_is_the_limit_of_the_exact_one(data):
    x, y = data
    line = fit_line(x, y)
    t = 0.2 * line.slope / line.slope_sd  # g = t²·s_b²/b² = 0.04, just within the symmetric form
    result = inverse_interval(line, y, t)
    assert result.form == "symmetric"
    # Fieller's quadratic, written out in x: (y0 − a − b·x)² = t²·s²·(1 + 1/n + (x − x̄)²/Sxx)
    width = (t * line.residual_sd) ** 2
    for y0, low, high in zip(y, result.low, result.high, strict=True):
        D = y0 - line.y_mean
        exact = line.x_mean + np.sort(
            np.roots([line.slope**2 - width / line.sxx, -2 * line.slope * D, D**2 - width * (1 + 1 / x.size)]).real
        )
        # both centre and half width agree to the order of g < 0.05
        assert [low, high] == pytest.approx(exact, abs=0.06 * ((high - low) / 2 + abs(D / line.slope)))
