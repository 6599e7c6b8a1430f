"""Control chart and EWMA of a check sample, and when its mean moved."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.revalidation.history import control_chart


def test_limits_and_ewma_by_hand():
    chart = control_chart([10.0, 13.1, 10.0], 1.0, target=10.0, labels=["May", "June", "July"])
    assert (chart.low, chart.high) == (7.0, 13.0)
    assert chart.beyond == (1,)
    np.testing.assert_allclose(chart.ewma, [10.0, 10.62, 10.496])
    # L·σ·√(λ/(2 - λ)·(1 - (1 - λ)^2i)), first 2.86·0.2
    assert chart.ewma_half[0] == pytest.approx(2.86 * 0.2)
    assert chart.ewma_half[-1] == pytest.approx(2.86 * np.sqrt(0.2 / 1.8 * (1 - 0.8**6)))
    assert chart.change is None
    assert not chart.in_control
    assert "out of control" in str(chart)


def test_a_step_is_dated_and_its_interval_holds_the_truth():
    rng = np.random.default_rng(20260301)
    runs, dated, inside = 120, 0, 0
    for _ in range(runs):
        values = rng.standard_normal(40)
        values[25:] += 2.0
        change = control_chart(values, 1.0).change
        if change is not None:
            dated += 1
            inside += change.earliest <= 25 <= change.latest
    assert dated >= 0.95 * runs
    assert inside >= 0.87 * dated  # nominal 95 %, 99.9 % bound


def test_nothing_is_dated_where_nothing_moved():
    rng = np.random.default_rng(20260302)
    dated = sum(control_chart(rng.standard_normal(30), 1.0).change is not None for _ in range(300))
    assert dated <= 11  # nominal 1 %, 99.9 % bound


def test_a_small_drift_shows_in_the_ewma_before_single_values():
    values = np.array([0.5, -0.5] * 5 + [1.9, 0.9] * 8)
    chart = control_chart(values, 1.0, labels=[f"2026-{1 + i:02d}" for i in range(values.size)])
    assert chart.beyond == ()
    assert chart.ewma_beyond
    assert chart.change is not None
    assert chart.change.label == "2026-11"
    assert {name: value for name, value, _ in chart.rows()}["first seen at"] == "2026-11"


@pytest.mark.parametrize("sd", [0.0, -1.0, np.nan])
def test_a_chart_needs_a_standard_deviation(sd):
    with pytest.raises(ParameterError, match="above zero"):
        control_chart([1.0, 2.0], sd)


def test_a_chart_needs_values_and_a_label_each():
    with pytest.raises(NotEnoughDataError, match="No value"):
        control_chart([], 1.0)
    with pytest.raises(SampleMismatchError, match="one each"):
        control_chart([1.0, 2.0], 1.0, labels=["once"])
