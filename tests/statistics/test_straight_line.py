"""The straight line and its inverse against certified and published examples."""

import json
from pathlib import Path

import numpy as np
import pytest
from scipy.stats import t as student

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.straight_line import (
    fit_line,
    fit_line_through_origin,
    inverse_interval,
    inverse_value,
    line_leverage,
)

REFERENCE = Path(__file__).parents[1] / "reference_values"


def test_norris_certified():
    certified = json.loads((REFERENCE / "norris.json").read_text(encoding="utf-8"))  # NIST StRD, source in the file
    x, y = np.loadtxt(REFERENCE / "norris.csv", delimiter=",", skiprows=1, unpack=True)
    line = fit_line(x, y)
    assert line.intercept == pytest.approx(certified["B0"], rel=1e-12)
    assert line.slope == pytest.approx(certified["B1"], rel=1e-12)
    assert line.intercept_sd == pytest.approx(certified["sd_B0"], rel=1e-12)
    assert line.slope_sd == pytest.approx(certified["sd_B1"], rel=1e-12)
    assert line.residual_sd == pytest.approx(certified["residual_sd"], rel=1e-12)
    assert line.correlation**2 == pytest.approx(certified["r_squared"], rel=1e-12)
    assert line.degrees_of_freedom == certified["residual_df"]


def test_gum_thermometer():
    # JCGM 100 (GUM), H.3: from memory, reproduced. Line through 11 corrections b against t - 20 °C.
    t = [21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511]
    b = [-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.160]
    line = fit_line(np.subtract(t, 20), b)
    assert round(line.intercept, 4) == -0.1712
    assert round(line.intercept_sd, 4) == 0.0029
    assert round(line.slope, 5) == 0.00218
    assert round(line.slope_sd, 5) == 0.00067
    assert round(line.covariance / (line.slope_sd * line.intercept_sd), 3) == -0.930
    assert round(line.residual_sd, 4) == 0.0035
    assert round(line.intercept + 10 * line.slope, 4) == -0.1494  # b at 30 °C
    variance = line.intercept_sd**2 + 100 * line.slope_sd**2 + 20 * line.covariance
    assert round(np.sqrt(variance), 4) == 0.0041
    # and by the leverage of that point
    assert line.residual_sd * np.sqrt(line_leverage(line, 10.0)) == pytest.approx(np.sqrt(variance), rel=1e-12)


def test_miller_weighted_line():
    # Miller & Miller, weighted line: from memory, reproduced. Weights 1/s², scaled to a mean of 1.
    c, absorbance = [0, 2, 4, 6, 8, 10], [0.009, 0.158, 0.301, 0.472, 0.577, 0.739]
    weights = np.array([0.001, 0.004, 0.010, 0.013, 0.017, 0.022]) ** -2.0
    plain, weighted = fit_line(c, absorbance), fit_line(c, absorbance, weights / weights.mean())
    assert [round(plain.intercept, 6), round(plain.slope, 6)] == [0.013286, 0.072543]
    assert [round(weighted.intercept, 7), round(weighted.slope, 7)] == [0.0090839, 0.0737600]
    assert np.round(inverse_value(plain, [0.100, 0.600]), 3).tolist() == [1.195, 8.088]
    assert np.round(inverse_value(weighted, [0.100, 0.600]), 3).tolist() == [1.233, 8.011]


def test_weighted_standard_deviations_are_those_of_the_normal_equations():
    c, y = np.array([0.0, 2, 4, 6, 8, 10]), np.array([0.009, 0.158, 0.301, 0.472, 0.577, 0.739])
    w = np.array([5.0, 1.0, 0.5, 0.0, 0.25, 0.1])  # the fourth pair is absent
    line = fit_line(c, y, w)
    design = np.column_stack([np.ones(6), c])
    inverse = np.linalg.inv(design.T @ (w[:, None] * design))
    residual = y - design @ (inverse @ design.T @ (w * y))
    covariance = inverse * (w @ residual**2) / (5 - 2)
    assert line.n == 5
    assert line.intercept_sd == pytest.approx(np.sqrt(covariance[0, 0]), rel=1e-12)
    assert line.slope_sd == pytest.approx(np.sqrt(covariance[1, 1]), rel=1e-12)
    assert line.covariance == pytest.approx(covariance[0, 1], rel=1e-12)


def noisy_line(slope):
    x = np.arange(8.0)
    return fit_line(x, 1 + slope * x + np.array([1, -1, 1, -1, -1, 1, -1, 1.0]))


def test_the_form_of_the_interval_follows_g():
    t = student.ppf(0.975, 6)
    for slope, form in ((10.0, "symmetric"), (0.8, "Fieller"), (0.3, "unbounded")):
        line = noisy_line(slope)
        g = (t * line.slope_sd / line.slope) ** 2
        assert form == ("symmetric" if g < 0.05 else "Fieller" if g < 1 else "unbounded")
        result = inverse_interval(line, [2.0, 5.0], t)
        assert result.form == form
        assert result.value == pytest.approx((np.array([2.0, 5.0]) - line.intercept) / line.slope, rel=1e-12)
        assert (result.low < result.value).all()
        assert (result.value < result.high).all()
    assert result.low.tolist() == [-np.inf, -np.inf]
    assert result.high.tolist() == [np.inf, np.inf]


@pytest.mark.parametrize("through_origin", [False, True])
def test_fieller_limits_are_where_the_line_just_misses_the_signal(through_origin):
    x, y = np.arange(1.0, 7), np.array([1.5, 1.2, 3.9, 3.0, 4.2, 7.0])
    line = fit_line_through_origin(x, y) if through_origin else fit_line(x, y)
    t, y0, m = student.ppf(0.975, line.degrees_of_freedom), np.array([1.0, 4.0, 9.0]), np.array([1, 2, 5])
    result = inverse_interval(line, y0, t, readings=m)
    assert result.form == "Fieller"
    for limit in (result.low, result.high):
        gap = np.abs(y0 - line.intercept - line.slope * limit)
        share = limit**2 / np.sum(x**2) if through_origin else 1 / 6 + (limit - 3.5) ** 2 / 17.5
        assert gap == pytest.approx(t * line.residual_sd * np.sqrt(1 / m + share), rel=1e-12)


def test_through_origin_standard_error():
    line = fit_line_through_origin([1, 2, 3, 4], [2.1, 3.9, 6.2, 7.9])
    result = inverse_interval(line, [5.0], 3.182, readings=3)
    x0 = 5.0 / line.slope
    assert result.value[0] == pytest.approx(x0)
    assert result.standard_error[0] == pytest.approx(line.residual_sd / line.slope * np.sqrt(1 / 3 + x0**2 / 30))


def test_leverages():
    line = fit_line([0, 1, 2, 3], [1, 2, 3, 5])
    assert line_leverage(line, [0, 1, 2, 3]) == pytest.approx([0.7, 0.3, 0.3, 0.7])
    origin = fit_line_through_origin([1, 2, 3], [1, 2, 4])
    assert line_leverage(origin, [1, 2, 3]) == pytest.approx([1 / 14, 4 / 14, 9 / 14])


def test_two_points_give_a_line_and_no_uncertainty():
    line = fit_line([1, 3], [2, 6])
    assert [line.slope, line.intercept, line.degrees_of_freedom] == [2.0, 0.0, 0]
    assert np.isnan([line.residual_sd, line.slope_sd, line.intercept_sd]).all()
    assert inverse_value(line, [4.0]) == pytest.approx([2.0])
    with pytest.raises(NotEnoughDataError, match="no degree of freedom"):
        inverse_interval(line, [4.0], 12.7)


def test_a_flat_line_is_a_line_but_cannot_be_read_backwards():
    line = fit_line([1, 2, 3], [5, 5, 5])
    assert [line.slope, line.intercept] == [0.0, 5.0]
    assert np.isnan(line.correlation)
    with pytest.raises(NotEnoughDataError, match="slope of the line is zero"):
        inverse_value(line, [5.0])


def test_refuses_data_that_hold_no_line():
    with pytest.raises(NotEnoughDataError, match="needs 2 or more"):
        fit_line([1], [1])
    with pytest.raises(NotEnoughDataError, match="needs 2 or more"):
        fit_line([1, 2], [1, 2], weights=[1, 0])
    with pytest.raises(NotEnoughDataError, match="are equal"):
        fit_line([0.1, 0.1, 0.1], [1, 2, 3])
    with pytest.raises(NotEnoughDataError, match="are zero"):
        fit_line_through_origin([0, 0], [1, 2])
    with pytest.raises(SampleMismatchError):
        fit_line([1, 2, 3], [1, 2])
    with pytest.raises(SampleMismatchError, match="2 weights for 3 pairs"):
        fit_line([1, 2, 3], [1, 2, 4], weights=[1, 2])
    with pytest.raises(ParameterError, match="not negative"):
        fit_line([1, 2, 3], [1, 2, 4], weights=[1, 2, -1])


def test_refuses_an_interval_without_t_or_readings():
    line = fit_line([1, 2, 3], [1, 2, 4])
    with pytest.raises(ParameterError, match="quantile"):
        inverse_interval(line, [2.0], 0.0)
    with pytest.raises(ParameterError, match="expected 1 or more"):
        inverse_interval(line, [2.0], 12.7, readings=0)
