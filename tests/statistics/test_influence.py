"""Studentised residuals and influence against leaving each sample out, on the Hald data."""

import json
from pathlib import Path

import numpy as np
import pytest
from scipy import stats

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.influence import (
    bonferroni_limit,
    cooks_distance,
    reference_agreement,
    studentised_residuals,
)

REFERENCE = Path(__file__).parents[1] / "reference_values"


@pytest.fixture(scope="module")
def hald():
    """Design with the constant, values, fitted errors, leverages; Woods, Steinour, Starke 1932, source in hald.json."""
    table = np.loadtxt(REFERENCE / "hald.csv", delimiter=",", skiprows=1)
    design, y = np.column_stack([np.ones(13), table[:, :4]]), table[:, 4]
    hat = design @ np.linalg.pinv(design)
    return design, y, hat @ y - y, np.diag(hat)


def test_published_leverages_and_press(hald):
    # Hald (from memory, reproduced): leverages with 1/n, PRESS of four variables 110.3466, s = 2.4460.
    known = json.loads((REFERENCE / "hald.json").read_text(encoding="utf-8"))
    _, _, error, leverage = hald
    assert leverage == pytest.approx(np.array(known["leverages_with_mean"]), abs=5.1e-6)
    internal, _ = studentised_residuals(error, leverage, 5)
    s = np.sqrt(error @ error / 8)
    assert s == pytest.approx(2.4460, abs=5e-5)
    press = np.sum((internal * s / np.sqrt(1 - leverage)) ** 2)
    assert press == pytest.approx(110.3466, abs=5e-5)


def test_external_residuals_and_cooks_distance_are_those_of_leaving_out(hald):
    design, y, error, leverage = hald
    internal, external = studentised_residuals(error, leverage, 5)
    distance = cooks_distance(error, leverage, 5)
    all_fitted = design @ np.linalg.lstsq(design, y)[0]
    s2 = error @ error / 8
    assert internal == pytest.approx(error / np.sqrt(s2 * (1 - leverage)))
    for i in range(13):
        keep = np.arange(13) != i
        coefficients = np.linalg.lstsq(design[keep], y[keep])[0]
        rest = y[keep] - design[keep] @ coefficients
        left_out = design[i] @ np.linalg.inv(design[keep].T @ design[keep]) @ design[i]
        expected = (design[i] @ coefficients - y[i]) / np.sqrt(rest @ rest / 7 * (1 + left_out))
        assert external[i] == pytest.approx(expected, rel=1e-6)
        moved = design @ coefficients - all_fitted
        assert distance[i] == pytest.approx(moved @ moved / (5 * s2), rel=1e-6)


def test_a_wrong_value_is_named_and_good_ones_are_not():
    rng = np.random.default_rng(2)
    x = np.linspace(0, 1, 25)
    design = np.column_stack([np.ones(25), x])
    hat = design @ np.linalg.pinv(design)
    limit, named, found = bonferroni_limit(25, 2), 0, 0
    for _ in range(300):
        y = x + 0.1 * rng.normal(size=25)
        _, t = studentised_residuals(hat @ y - y, np.diag(hat), 2)
        named += np.abs(t).max() > limit
        y[7] += 1.0
        _, t = studentised_residuals(hat @ y - y, np.diag(hat), 2)
        found += abs(t[7]) > limit
    assert found > 295
    assert 4 <= named <= 29  # 99.9 % binomial bounds about 15


def test_bonferroni_limit():
    assert bonferroni_limit(13, 5) == pytest.approx(stats.t.isf(0.025 / 13, 7))


def test_a_sample_that_alone_fixes_a_term_has_no_studentised_residual():
    internal, external = studentised_residuals([0.0, 1.0, -1.0, 0.5, -0.5], [1.0, 0.25, 0.25, 0.25, 0.25], 2)
    assert np.isnan([internal[0], external[0]]).all()
    assert np.isfinite(internal[1:]).all()


def test_reference_agreement():
    # ASTM E1655 (from memory): |e| < t·SEC·sqrt(1 + h), t(0.975, 20) = 2.0860 (computed); 95 % have to agree.
    errors, h = np.array([0.5, -2.0, 2.2, 2.4]), np.array([0.0, 0.0, 0.1, 0.44])
    found = reference_agreement(errors, np.zeros(4), h, 1.0, 20)
    assert found.bands == pytest.approx(2.0860 * np.array([1, 1, np.sqrt(1.1), 1.2]), rel=3e-5)
    assert found.within.tolist() == [True, True, False, True]
    assert (found.n_within, found.passed) == (3, False)
    assert reference_agreement(errors, np.zeros(4), h, 1.0, 20, share_required=0.75).passed
    assert json.loads(found.to_json())["within"] == [True, True, False, True]


def test_nineteen_of_twenty_are_enough():
    errors = np.r_[np.zeros(19), 100.0]
    assert reference_agreement(errors, np.zeros(20), np.zeros(20), 1.0, 20).passed
    assert not reference_agreement(errors[1:], np.zeros(19), np.zeros(19), 1.0, 20).passed


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError, match="4 samples or more"):
        studentised_residuals([1.0, 2.0, 1.0], [0.5, 0.5, 0.5], 2)
    with pytest.raises(NotEnoughDataError, match="not all zero"):
        cooks_distance(np.zeros(6), np.full(6, 0.3), 2)
    with pytest.raises(ParameterError, match="between 0 and 1"):
        studentised_residuals(np.ones(6), np.full(6, 1.3), 2)
    with pytest.raises(ParameterError, match="n_terms"):
        studentised_residuals(np.ones(6), np.full(6, 0.3), 0)
    with pytest.raises(ParameterError, match="1 or more"):
        bonferroni_limit(0, 1)
    with pytest.raises(SampleMismatchError, match="2 leverages for 1"):
        reference_agreement([1.0], [1.0], [0.1, 0.1], 1.0, 5)
    with pytest.raises(ParameterError, match="negative"):
        reference_agreement([1.0], [1.0], [-0.1], 1.0, 5)
