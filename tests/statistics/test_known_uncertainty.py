"""Lines through values of known uncertainty against the numbers of ISO/TS 28037."""

from dataclasses import replace

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.known_uncertainty import fit_line_known, inverse_known

X = np.arange(1.0, 7)


def test_equal_uncertainties():
    # ISO/TS 28037, straight line with known equal u(y): from memory, reproduced.
    line = fit_line_known(X, [3.3, 5.6, 7.1, 9.3, 10.7, 12.1], 0.5)
    found = [line.intercept, line.slope, line.intercept_uncertainty, line.slope_uncertainty, line.covariance]
    assert np.round(found, 3).tolist() == [1.867, 1.757, 0.465, 0.120, -0.050]
    assert round(line.chi_squared, 3) == 1.665
    assert round(line.limit, 3) == 9.488
    assert line.degrees_of_freedom == 4
    assert line.consistent
    assert np.round(inverse_known(line, 10.5, 0.5), 3).tolist() == [4.913, 0.322]


def test_unequal_uncertainties():
    # ISO/TS 28037, the same with unequal u(y): from memory, reproduced.
    line = fit_line_known(X, [3.2, 4.3, 7.6, 8.6, 11.7, 12.8], [0.5, 0.5, 0.5, 1, 1, 1])
    found = [line.intercept, line.slope, line.intercept_uncertainty, line.slope_uncertainty, line.covariance]
    assert np.round(found, 3).tolist() == [0.885, 2.057, 0.530, 0.178, -0.082]
    assert round(line.chi_squared, 3) == 4.131
    assert np.round(inverse_known(line, 10.5, 1.0), 3).tolist() == [4.674, 0.533]


def test_residuals_larger_than_stated_are_seen():
    y = [3.3, 5.6, 7.1, 9.3, 10.7, 12.1]
    assert not fit_line_known(X, y, 0.1).consistent
    assert "chi-square" in str(fit_line_known(X, y, 0.1))


def test_uncertainties_are_of_the_numbers_not_of_the_scatter():
    y = np.array([3.3, 5.6, 7.1, 9.3, 10.7, 12.1])
    rng = np.random.default_rng(4)
    slopes = [fit_line_known(X, 2 + 1.5 * X + rng.normal(0, 0.5, 6), 0.5).slope for _ in range(4000)]
    # 99.9 % bounds of a standard deviation from 4000 values: ± 3.7 %.
    assert np.std(slopes) == pytest.approx(fit_line_known(X, y, 0.5).slope_uncertainty, rel=0.037)


def test_what_cannot_be_fitted_is_refused():
    with pytest.raises(ParameterError, match="above zero"):
        fit_line_known(X, X, 0.0)
    with pytest.raises(SampleMismatchError, match="2 uncertainties for 6 pairs"):
        fit_line_known(X, X, [1, 2])
    with pytest.raises(NotEnoughDataError, match="at least 3"):
        fit_line_known([1, 2], [1, 2], 1.0)
    flat = replace(fit_line_known(X, X, 1.0), slope=0.0)
    with pytest.raises(NotEnoughDataError, match="slope"):
        inverse_known(flat, 1.0, 0.1)
    with pytest.raises(ParameterError, match="not below zero"):
        inverse_known(fit_line_known(X, X, 1.0), 1.0, -0.1)
