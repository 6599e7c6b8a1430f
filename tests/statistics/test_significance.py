"""Tests of bias, slope and intercept against computed cases and general statistics libraries."""

import numpy as np
import pytest
from scipy import stats

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.result import field_docs
from quant.statistics.significance import (
    PREDICTED_ON_REFERENCE,
    REFERENCE_ON_PREDICTED,
    BiasTest,
    SlopeInterceptTest,
    bias_test,
    fit_line,
    slope_intercept_test,
)

# ISO 12099, clause 6 (formulas from memory): the two small complete cases, computed.
BIAS_CASE = np.array([0.3, -0.1, 0.2, 0.4, 0.1, 0.0, 0.2, -0.2, 0.3, 0.1])
PREDICTED = np.arange(2.0, 17.0, 2.0)
REFERENCE = np.array([2.3, 3.9, 6.2, 8.4, 10.1, 12.6, 14.2, 16.9])


def test_a_bias_just_not_significant():
    result = bias_test(10 + BIAS_CASE, np.full(10, 10.0))
    assert result.bias == pytest.approx(0.13, abs=1e-12)
    assert result.sep == pytest.approx(0.188856, abs=5e-7)
    assert result.t == pytest.approx(2.17677, abs=5e-6)
    assert result.critical == pytest.approx(2.26216, abs=5e-6)
    assert result.limit == pytest.approx(0.135100, abs=5e-7)
    assert not result.significant


def test_a_bias_that_is_significant():
    result = bias_test(PREDICTED, REFERENCE)
    assert result.bias == pytest.approx(-0.325, abs=1e-12)
    assert result.t == pytest.approx(2.96023, abs=5e-6)
    assert result.significant


def test_a_slope_that_is_not_significant():
    result = slope_intercept_test(PREDICTED, REFERENCE)
    assert result.intercept == pytest.approx(-0.028571, abs=5e-7)
    assert result.slope == pytest.approx(1.039286, abs=5e-7)
    assert result.residual_sd == pytest.approx(0.263222, abs=5e-7)
    assert result.slope_t == pytest.approx(1.934494, abs=5e-7)
    assert result.critical == pytest.approx(2.446912, abs=5e-7)
    assert not result.slope_significant


# ISO 12099 factor table (computed): T_b/SEP at alpha = 0.05.
T_B_OVER_SEP = {
    5: 1.242,
    6: 1.049,
    7: 0.925,
    8: 0.836,
    9: 0.769,
    10: 0.715,
    15: 0.554,
    20: 0.468,
    25: 0.413,
    30: 0.373,
    40: 0.320,
    50: 0.284,
    100: 0.198,
}


@pytest.mark.parametrize(("n", "factor"), T_B_OVER_SEP.items())
def test_the_limit_of_the_bias_in_units_of_sep(n, factor):
    result = bias_test(np.random.default_rng(n).normal(size=n), np.zeros(n))
    assert result.limit / result.sep == pytest.approx(factor, abs=5e-4)


def test_slope_and_intercept_tests_of_a_line_that_a_joint_test_refuses():
    # Section 4.5 of our published values (computed): separate tests t_a = 3.0827, t_b = 1.3041.
    nominal = np.arange(1.0, 11.0)
    found = np.array([1.2, 2.1, 3.3, 4.1, 5.3, 6.2, 7.2, 8.3, 9.2, 10.3])
    result = slope_intercept_test(found, nominal, PREDICTED_ON_REFERENCE)
    assert result.intercept == pytest.approx(0.16, abs=1e-9)
    assert result.slope == pytest.approx(1.010909, abs=5e-7)
    assert result.residual_sd == pytest.approx(0.0759785, abs=5e-8)
    assert (result.intercept_t, result.slope_t) == pytest.approx((3.0827, 1.3041), abs=5e-5)
    assert result.intercept_significant
    assert not result.slope_significant


@pytest.mark.parametrize("direction", [REFERENCE_ON_PREDICTED, PREDICTED_ON_REFERENCE])
def test_both_directions_against_a_general_library(direction):
    rng = np.random.default_rng(3)
    reference = rng.uniform(0, 40, 25)
    predicted = 0.9 * reference + 1.5 + rng.normal(size=25)
    x, y = (predicted, reference) if direction == REFERENCE_ON_PREDICTED else (reference, predicted)
    expected = stats.linregress(x, y)
    result = slope_intercept_test(predicted, reference, direction, probability=0.9)
    assert result.slope == pytest.approx(expected.slope, rel=1e-12)
    assert result.intercept == pytest.approx(expected.intercept, rel=1e-11)
    assert result.slope_sd == pytest.approx(expected.stderr, rel=1e-10)
    assert result.intercept_sd == pytest.approx(expected.intercept_stderr, rel=1e-10)
    assert result.slope_p == pytest.approx(2 * stats.t.sf(abs(expected.slope - 1) / expected.stderr, 23), rel=1e-9)
    intercept_t = abs(expected.intercept) / expected.intercept_stderr
    assert result.intercept_p == pytest.approx(2 * stats.t.sf(intercept_t, 23), rel=1e-9)
    assert result.critical == pytest.approx(stats.t.ppf(0.95, 23), rel=1e-12)
    assert result.direction == direction


def test_the_bias_test_against_a_general_library():
    rng = np.random.default_rng(4)
    predicted, reference = rng.normal(size=(2, 12))
    expected = stats.ttest_rel(predicted, reference)
    result = bias_test(predicted, reference)
    assert (result.t, result.p) == pytest.approx((abs(expected.statistic), expected.pvalue), rel=1e-12)


def test_the_line_keeps_its_digits_far_from_the_origin():
    rng = np.random.default_rng(5)
    x = rng.integers(-50, 50, 20) / 64  # exact in binary, also after adding 2**30
    y = x + rng.integers(-9, 9, 20) / 64
    near, far = fit_line(x, y), fit_line(x + 2**30, y + 2**30)
    assert far.slope == pytest.approx(near.slope, rel=1e-13)
    assert far.sum_residuals == pytest.approx(near.sum_residuals, rel=1e-12)


def test_what_cannot_be_tested_is_refused_with_the_reason():
    x = np.array([1.0, 2.0, 3.0, 4.0])
    with pytest.raises(NotEnoughDataError, match="errors are all"):
        bias_test(x + 0.1, x)
    with pytest.raises(NotEnoughDataError, match="1 pair"):
        bias_test([1.0], [2.0])
    with pytest.raises(NotEnoughDataError, match="lie on a line exactly"):
        slope_intercept_test(x, 2 * x + 1)
    with pytest.raises(NotEnoughDataError, match="the 4 predicted values are all 7"):
        slope_intercept_test(np.full(4, 7.0), x)
    with pytest.raises(NotEnoughDataError, match="the 4 reference values are all 7"):
        slope_intercept_test(x, np.full(4, 7.0), PREDICTED_ON_REFERENCE)
    with pytest.raises(NotEnoughDataError, match="2 pair"):
        slope_intercept_test(x[:2], x[:2])
    with pytest.raises(SampleMismatchError):
        bias_test(x, x[:3])
    with pytest.raises(ParameterError, match="direction = 'sideways'"):
        slope_intercept_test(x, x, "sideways")
    with pytest.raises(ParameterError, match="probability"):
        bias_test(PREDICTED, REFERENCE, probability=95)


def test_results_print_and_document_themselves():
    bias_result, line_result = bias_test(PREDICTED, REFERENCE), slope_intercept_test(PREDICTED, REFERENCE)
    assert "bias significant  yes" in str(bias_result)
    assert str(line_result).startswith("Line of reference on predicted, 8 samples\n")
    assert list(field_docs(BiasTest)) == list(bias_result.to_dict())
    assert list(field_docs(SlopeInterceptTest)) == list(line_result.to_dict())
