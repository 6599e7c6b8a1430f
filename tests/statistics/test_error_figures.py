"""The single figures of merit: by hand, and against computed and published cases."""

import json
from pathlib import Path

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.error_figures import (
    bias,
    correlation_squared,
    press,
    q2,
    r2_determination,
    range_error_ratio,
    rmse,
    rpd,
    sep,
    standard_error_of_calibration,
)

FIGURES = Path(__file__).parent.parent / "reference_values" / "figures.json"

PREDICTED = np.arange(2.0, 17.0, 2.0)
REFERENCE = np.array([2.3, 3.9, 6.2, 8.4, 10.1, 12.6, 14.2, 16.9])


def test_the_small_complete_cases():
    # ISO 12099, clause 6 (formulas from memory): two cases, computed.
    error = np.array([0.3, -0.1, 0.2, 0.4, 0.1, 0.0, 0.2, -0.2, 0.3, 0.1])
    assert sep(error, np.zeros(10)) == pytest.approx(0.188856, abs=5e-7)
    assert rmse(error, np.zeros(10)) == pytest.approx(0.221359, abs=5e-7)
    assert bias(error, np.zeros(10)) == pytest.approx(0.13, abs=1e-12)
    assert bias(PREDICTED, REFERENCE) == pytest.approx(-0.3250, abs=1e-12)
    assert sep(PREDICTED, REFERENCE) == pytest.approx(0.310530, abs=5e-7)
    assert rmse(PREDICTED, REFERENCE) == pytest.approx(0.435890, abs=5e-7)


def test_every_figure_by_hand():
    predicted, reference = [1.0, 2.0, 4.0, 5.0], [1.0, 3.0, 3.0, 7.0]  # errors 0, -1, 1, -2; mean of reference 3.5
    assert press(predicted, reference) == 6.0
    assert rmse(predicted, reference) == pytest.approx(np.sqrt(6 / 4))
    assert bias(predicted, reference) == -0.5
    assert sep(predicted, reference) == pytest.approx(np.sqrt(5 / 3))  # 6 - 4·0.25
    assert standard_error_of_calibration(predicted, reference, 1) == pytest.approx(np.sqrt(6 / 2))
    assert r2_determination(predicted, reference) == pytest.approx(1 - 6 / 19)  # SST 6.25 + 0.25 + 0.25 + 12.25
    assert q2(predicted, reference) == pytest.approx(1 - 6 / 19)
    assert correlation_squared(predicted, reference) == pytest.approx(12**2 / (10 * 19))
    assert rpd(predicted, reference) == pytest.approx(np.sqrt(19 / 3) / np.sqrt(5 / 3))
    assert range_error_ratio(predicted, reference) == pytest.approx(6 / np.sqrt(5 / 3))


def test_q2_of_the_published_leave_one_out_errors():
    # Gasoline samples 1-50 (Kalivas 1997), computed with the R package pls 2.8-1, see figures.json: SST about the mean
    # of all 50, in each training set or out.
    known = json.loads(FIGURES.read_text(encoding="utf-8"))["gasoline_loo"]
    n, sd = 50, known["rmsec_0"]
    reference = np.tile([-sd, sd], n // 2)  # mean 0, sum of squares n·sd²: that of the octane numbers
    for rmsecv, expected in zip(known["rmsecv_loo"], known["r2_loo"], strict=True):
        assert q2(reference + rmsecv, reference) == pytest.approx(expected, rel=1e-9)


def test_the_mean_model_left_out_one_at_a_time_has_the_negative_q2_of_the_docstring():
    values = np.random.default_rng(6).normal(size=12)
    left_out = (values.sum() - values) / 11
    assert q2(left_out, values) == pytest.approx(1 - (12 / 11) ** 2, rel=1e-12)


def test_correlation_takes_any_unit():
    predicted, reference = np.array([1.0, 2.0, 4.0, 5.0]), np.array([1.0, 3.0, 3.0, 7.0])
    assert correlation_squared(1e-120 * predicted, 1e120 * reference) == pytest.approx(144 / 190)
    assert correlation_squared(PREDICTED, 3 * PREDICTED + 1) == pytest.approx(1.0, rel=1e-14)


def test_what_cannot_be_computed_is_refused_with_the_reason():
    with pytest.raises(NotEnoughDataError, match="1 pair"):
        sep([1.0], [2.0])
    with pytest.raises(NotEnoughDataError, match="0 pair"):
        bias([], [])
    with pytest.raises(ParameterError, match="n_factors = -1"):
        standard_error_of_calibration([1.0, 2.0], [2.0, 3.0], -1)
    with pytest.raises(NotEnoughDataError, match="at least 5 samples"):
        standard_error_of_calibration([1.0, 2.0, 3.0, 4.0], [1.0, 2.0, 3.0, 5.0], 3)
    with pytest.raises(NotEnoughDataError, match="all 3 reference values are 4"):
        r2_determination([1.0, 2.0, 3.0], [4.0, 4.0, 4.0])
    with pytest.raises(NotEnoughDataError, match="all 3 predicted values are 4"):
        correlation_squared([4.0, 4.0, 4.0], [1.0, 2.0, 3.0])
    for ratio in (rpd, range_error_ratio):
        with pytest.raises(NotEnoughDataError, match="SEP is zero"):
            ratio([1.1, 2.1, 3.1], [1.0, 2.0, 3.0])
