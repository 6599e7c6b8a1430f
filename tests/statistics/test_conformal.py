"""Jackknife+ and CV+: ranks and mini case by hand, coverage by simulation."""

import numpy as np
import pytest
from scipy import stats

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.conformal import (
    coverage_floor,
    cv_plus,
    fit_level_function,
    jackknife_plus,
    least_samples,
    ranks,
)

# Barber et al. 2021: formulas from memory, ranks computed. alpha, n, upper rank, lower rank.
RANKS = [
    (0.05, 9, 10, 0), (0.05, 19, 19, 1), (0.05, 24, 24, 1), (0.05, 30, 30, 1), (0.05, 39, 38, 2), (0.05, 50, 49, 2),
    (0.10, 9, 9, 1), (0.10, 20, 19, 2), (0.10, 30, 28, 3), (0.10, 50, 46, 5), (0.20, 19, 16, 4),
]  # fmt: skip


@pytest.mark.parametrize(("alpha", "n", "upper", "lower"), RANKS)
def test_ranks(alpha, n, upper, lower):
    assert ranks(n, 1 - alpha) == (lower, upper)


def test_the_mini_case():
    # Constant-mean model on y = 1, 2, 4, 7, 11, alpha 0.2 (computed): [-4, 11].
    y = np.array([1.0, 2, 4, 7, 11])
    means = np.array([np.delete(y, i).mean() for i in range(5)])
    assert means.tolist() == [6, 5.75, 5.25, 4.5, 3.5]
    low, high = jackknife_plus(means[:, np.newaxis], y - means, 0.8)
    assert (low.tolist(), high.tolist()) == ([-4.0], [11.0])
    assert jackknife_plus(means[:, np.newaxis], y - means, 0.9) == ([-np.inf], [np.inf])


def test_ends_are_the_ranks_of_the_sorted_values():
    # Residuals 1 ... 20 about predictions of 0 and 100: ranks 2 and 19 of -20 ... -1 and 1 ... 20.
    predictions = np.repeat([[0.0, 100.0]], 20, axis=0)
    low, high = jackknife_plus(predictions, np.arange(1, 21) * (-1.0) ** np.arange(20), 0.9)
    assert low.tolist() == [-19.0, 81.0]
    assert high.tolist() == [19.0, 119.0]


def test_too_few_samples_give_infinite_ends():
    # Computed: n from 19 for 95 %, 9 for 90 %, 99 for 99 %.
    assert [least_samples(p) for p in (0.95, 0.9, 0.99)] == [19, 9, 99]
    for n, finite in ((8, False), (9, True)):
        low, high = jackknife_plus(np.zeros((n, 2)), np.arange(n), 0.9)
        assert np.isfinite([low, high]).all() == finite


def test_guaranteed_coverage():
    # Barber et al. 2021 (from memory), loss of CV+ computed.
    for n, k, loss in ((30, 5, 0.1389), (50, 5, 0.1455), (50, 10, 0.0727), (100, 10, 0.0818)):
        assert coverage_floor(n, 0.9) - coverage_floor(n, 0.9, k) == pytest.approx(loss, abs=5e-5)
    assert coverage_floor(30, 0.9, 5) == pytest.approx(0.661, abs=5e-4)
    assert coverage_floor(30, 0.9) == pytest.approx(0.8)
    assert coverage_floor(30, 0.9, 30) == pytest.approx(0.8)  # leaving out one is jackknife+


def test_cv_plus_takes_the_model_of_the_fold():
    folds, predictions = np.array([0, 1, 0, 1, 2] * 4), np.array([[1.0, 5.0], [2.0, 6.0], [3.0, 7.0]])
    residuals = np.linspace(-1, 1, 20)
    found = cv_plus(predictions, folds, residuals, 0.9)
    assert np.array(found).tolist() == np.array(jackknife_plus(predictions[folds], residuals, 0.9)).tolist()


def straight(x, y, new):
    slope, intercept = np.polyfit(x, y, 1)
    return intercept + slope * new


def left_out(x, y, new):
    """Predictions of x_i and of the new samples by lines that never saw sample i."""
    rows = [straight(np.delete(x, i), np.delete(y, i), np.r_[x[i], new]) for i in range(x.size)]
    return np.array(rows)[:, 0], np.array(rows)[:, 1:]


def covered(kind, n_sets=150, n=24, seed=11):
    """Count new samples held by plain, level-scaled and (control) half as wide 90 % intervals.

    Four a set: one anywhere in the range, one in each third of it. Each column is counted by itself, since those of one
    set are not independent.
    """
    counts = np.zeros((3, 4), dtype=int)
    for number in range(n_sets):
        rng = np.random.default_rng([seed, number])

        def noise(level, rng=rng):
            if kind == "heavy tails":
                return rng.standard_t(3, level.size)
            return rng.normal(size=level.size) * (level / 5 if kind == "growing" else 1.0)

        x, new = rng.uniform(1, 10, n), rng.uniform([1, 1, 4, 7], [10, 4, 7, 10])
        y, truth = 2 * x + noise(x), 2 * new + noise(new)
        own, others = left_out(x, y, new)
        level = fit_level_function(own, y - own)
        plain = jackknife_plus(others, y - own, 0.9)
        scaled = jackknife_plus(others, y - own, 0.9, scales=level(own), new_scales=level(others))
        half = jackknife_plus(others, (y - own) / 2, 0.9)
        for row, (low, high) in enumerate((plain, scaled, half)):
            counts[row] += (low <= truth) & (truth <= high)
    return counts


def bounds(n, rate):
    return stats.binom.ppf([0.0005, 0.9995], n, rate)


@pytest.mark.parametrize("kind", ["constant", "growing", "heavy tails"])
def test_marginal_coverage(kind):
    plain, scaled, half = covered(kind)
    low, high = bounds(150, 0.9)
    assert low <= plain[0] <= high
    assert low <= scaled[0] <= high
    assert half[0] < low
    if kind == "growing":  # marginal is not local: too often at the low end, too seldom at the high end
        assert plain[1] > high
        assert plain[3] < low
        assert (scaled >= low).all()
        assert (scaled <= high).all()


def test_a_level_function_finds_the_slope_and_keeps_its_floor():
    level = np.linspace(1, 10, 400)
    errors = np.random.default_rng(3).normal(size=400) * 0.2 * level
    found = fit_level_function(level, errors)
    assert found(10.0) / found(5.0) == pytest.approx(2, abs=0.25)
    assert found(-50.0) == pytest.approx(np.abs(errors).mean() / 10)
    assert fit_level_function([2.0, 2.0, 2.0], [1.0, -1.0, 4.0])(7.0) == pytest.approx(2.0)


def test_impossible_questions_are_refused():
    with pytest.raises(SampleMismatchError, match="2 left-out models, but 3"):
        jackknife_plus(np.zeros((2, 1)), [1.0, 2.0, 3.0])
    with pytest.raises(NotEnoughDataError):
        jackknife_plus(np.zeros((0, 1)), [])
    with pytest.raises(ParameterError, match="both or none"):
        jackknife_plus(np.zeros((2, 1)), [1.0, 2.0], scales=[1.0, 1.0])
    with pytest.raises(ParameterError, match="floor"):
        jackknife_plus(np.zeros((2, 1)), [1.0, 2.0], scales=[1.0, 0.0], new_scales=[1.0])
    with pytest.raises(SampleMismatchError, match="new scales"):
        jackknife_plus(np.zeros((2, 1)), [1.0, 2.0], scales=[1.0, 1.0], new_scales=[1.0, 2.0])
    with pytest.raises(ParameterError, match="from 0 to 1"):
        cv_plus(np.zeros((2, 1)), [0, 2], [1.0, 1.0])
    with pytest.raises(ParameterError, match="probability"):
        ranks(10, 1.0)
    with pytest.raises(ParameterError, match="n_folds"):
        coverage_floor(10, 0.9, 11)
    with pytest.raises(NotEnoughDataError, match="all errors"):
        fit_level_function([1, 2, 3], [0, 0, 0])
