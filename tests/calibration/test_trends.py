"""Errors against value, order and notes: what is there is found, what is not is not, too fine groups are no groups."""

import numpy as np
import pytest
from scipy import stats

from quant.calibration.trends import find_trends

N = 24
NOISE = np.random.default_rng(20261201).normal(0, 1, N)
VALUES = np.linspace(1, 9, N)[np.random.default_rng(1).permutation(N)]
OPERATOR = [{"operator": "AB"[i % 2], "bottle": str(i), "run": f"{i // 2}"} for i in range(N)]


def by_name(errors, notes=OPERATOR, ignored=()):
    return {trend.against: trend for trend in find_trends(errors, VALUES, notes, ignored)}


def test_nothing_is_found_in_noise():
    found = by_name(NOISE)
    assert set(found) == {"predicted value", "order of the samples", "note operator", "note bottle", "note run"}
    assert not any(trend.significant for trend in found.values())


@pytest.mark.parametrize(
    ("against", "drift"),
    [
        ("predicted value", VALUES),
        ("order of the samples", 0.3 * np.arange(N)),
        ("note operator", np.array([0.0, 4.0] * (N // 2))),
    ],
)
def test_a_drift_is_found(against, drift):
    assert by_name(NOISE + drift)[against].significant


def test_the_statistics_are_those_of_scipy():
    found = by_name(NOISE)
    line = stats.linregress(VALUES, NOISE)
    assert found["predicted value"].p == pytest.approx(line.pvalue)
    expected = stats.f_oneway(NOISE[::2], NOISE[1::2])
    assert (found["note operator"].statistic, found["note operator"].p) == pytest.approx(tuple(expected))
    assert found["note operator"].n_groups == 2


def test_notes_that_tell_nothing():
    notes = [{"day": f"d{i // 4}", "date": f"2026-01-{i // 4 + 1:02d}", "vial": f"v{i}", "lab": "X"} for i in range(N)]
    found = by_name(NOISE, notes, ignored=["acid"])
    assert set(found) == {"predicted value", "order of the samples", "note day"}  # date parts as day does
    assert "note day" not in by_name(NOISE, notes, ignored=["day", "date"])
    assert by_name(NOISE, [{}] * N).keys() == {"predicted value", "order of the samples"}
