"""The smoother's left-out errors equal those of leaving out and fitting again."""

import numpy as np
import pytest
from sklearn.linear_model import Ridge

from quant.inspection.left_out import best_smoother, make_smoothers, studentised


@pytest.fixture
def data():
    rng = np.random.default_rng(20260105)
    spectra = rng.normal(size=(20, 4)) @ rng.normal(size=(4, 50)) + 0.05 * rng.normal(size=(20, 50))
    return spectra, spectra[:, 3] + 0.1 * rng.normal(size=20)


def test_left_out_errors_are_those_of_fitting_again(data):
    # Hand-made leaving out: the hat matrix of the others' least squares. Few columns give plain least squares.
    spectra, values = data
    columns = spectra[:, :1]
    [smoother] = make_smoothers(columns, np.arange(20))
    errors = smoother.errors @ values
    for i in range(20):
        rest = np.arange(20) != i
        slope, intercept = np.polyfit(columns[rest, 0], values[rest], 1)
        assert errors[i] == pytest.approx(values[i] - (slope * columns[i, 0] + intercept), rel=1e-9)


def test_a_ridge_is_that_of_scikit_learn(data):
    spectra, values = data
    centred = spectra - spectra.mean(axis=0)
    squares = np.linalg.svd(centred, compute_uv=False) ** 2
    for smoother in make_smoothers(spectra, np.arange(20)):
        low, high = 1e-12, 1e12
        for _ in range(200):  # the strength that gives the smoother's freedom, by bisection
            middle = np.sqrt(low * high)
            low, high = (middle, high) if 1 + np.sum(squares / (squares + middle)) > smoother.freedom else (low, middle)
        expected = Ridge(alpha=middle).fit(spectra, values).predict(spectra)
        assert smoother.hat @ values == pytest.approx(expected, abs=1e-6)


def test_a_group_leaves_together(data):
    spectra, values = data
    groups = np.arange(20)
    groups[5] = 4
    columns = spectra[:, :1]
    [smoother] = make_smoothers(columns, groups)
    rest = ~np.isin(np.arange(20), [4, 5])
    slope, intercept = np.polyfit(columns[rest, 0], values[rest], 1)
    expected = values[4:6] - (slope * columns[4:6, 0] + intercept)
    assert (smoother.errors @ values)[4:6] == pytest.approx(expected, rel=1e-9)


def test_strengths_have_the_freedom_of_so_many_factors(data):
    spectra, values = data
    smoothers = make_smoothers(spectra, np.arange(20))
    assert [smoother.freedom for smoother in smoothers] == pytest.approx([2, 3, 4, 5, 6, 8, 10], abs=1e-4)
    best = best_smoother(smoothers, values)
    assert best.freedom >= 4
    assert np.std(studentised(best, values)) == pytest.approx(0.1, rel=0.6)


def test_equal_spectra_give_no_smoother():
    assert make_smoothers(np.ones((10, 5)), np.arange(10)) == ()
