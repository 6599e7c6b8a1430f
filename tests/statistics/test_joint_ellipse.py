"""The joint ellipse against a computed case and against its own definition."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError
from quant.statistics.joint_ellipse import ellipse_points, joint_test

X = np.arange(1.0, 11.0)
Y = np.array([1.2, 2.1, 3.3, 4.1, 5.3, 6.2, 7.2, 8.3, 9.2, 10.3])


def test_the_computed_case():
    # Textbook chapter "Assay Validation", equations 3.3.7 and 3.3.8 (found as an extract); the values computed.
    found = joint_test(X, Y)
    assert found.intercept == pytest.approx(0.16, abs=1e-12)
    assert found.slope == pytest.approx(1.010909, abs=5e-7)
    assert found.residual_sd == pytest.approx(0.0759785, abs=5e-8)
    assert found.statistic == pytest.approx(42.7717, abs=5e-5)
    assert found.limit == pytest.approx(4.45897, abs=5e-6)
    assert not found.inside
    # The separate test of the slope (t = 1.3041 against 2.3060) would have passed.
    assert abs(found.slope - 1) / (found.residual_sd / np.sqrt(found.sxx)) == pytest.approx(1.3041, abs=5e-5)
    assert "inside the ellipse" in str(found)


def test_the_statistic_is_the_published_bracket():
    found = joint_test(X, Y, intercept=0.1, slope=1.02)
    da, db = found.intercept - 0.1, found.slope - 1.02
    bracket = 10 * da**2 + 2 * X.sum() * da * db + np.sum(X**2) * db**2
    assert found.statistic == pytest.approx(bracket / (2 * found.residual_sd**2), rel=1e-9)
    assert found.inside


def test_points_of_the_ellipse_lie_on_the_limit():
    found = joint_test(X, Y)
    intercepts, slopes = ellipse_points(found, 37)
    for intercept, slope in zip(intercepts, slopes, strict=True):
        assert joint_test(X, Y, intercept=intercept, slope=slope).statistic == pytest.approx(found.limit, rel=1e-6)
    assert (intercepts[0], slopes[0]) == (intercepts[-1], slopes[-1])
    # The extremes are those of simultaneous intervals: a ± sqrt(2F)·s_a, b ± sqrt(2F)·s_b.
    slopes = ellipse_points(found, 3601)[1]
    assert slopes.max() - found.slope == pytest.approx(
        np.sqrt(2 * found.limit / found.sxx) * found.residual_sd, rel=1e-6
    )


def test_the_ellipse_holds_the_truth_as_often_as_it_says():
    rng = np.random.default_rng(8)
    inside = sum(joint_test(X, X + rng.normal(size=10), probability=0.9).inside for _ in range(1000))
    assert 868 <= inside <= 931  # 99.9 % binomial bounds about 900


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError, match="no scatter"):
        joint_test(X, 2 * X)
    with pytest.raises(NotEnoughDataError, match="no scatter"):
        joint_test([1, 2], [1, 3])
    with pytest.raises(ValueError, match="4 or more"):
        ellipse_points(joint_test(X, Y), 3)
