"""Laws that hold for any predictions, folds and choices."""

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from quant.statistics.figures import bias, figures_of_merit, rmse, sep
from quant.statistics.intervals import base_variance, standard_error, true_value_share
from quant.statistics.kennard_stone import kennard_stone
from quant.statistics.splits import (
    contiguous_blocks,
    interleaved,
    kennard_stone_split,
    leave_one_out,
    random_folds,
    random_split,
)

SEEDS = st.integers(0, 2**32 - 1)
values = st.floats(-1e3, 1e3, allow_subnormal=False)
pairs = st.integers(2, 30).flatmap(lambda n: arrays(np.float64, (2, n), elements=values))


def simulated(seed, n_samples):
    """Reference values over a range of 50, predictions with noise of 1: no figure is ill-conditioned."""
    rng = np.random.default_rng(seed)
    reference = rng.uniform(5, 55, n_samples)
    return reference + rng.normal(size=n_samples), reference


@given(pairs)
def test_mean_square_is_bias_squared_plus_scatter(pair):
    predicted, reference = pair
    n = predicted.size
    expected = bias(predicted, reference) ** 2 + sep(predicted, reference) ** 2 * (n - 1) / n
    assert rmse(predicted, reference) ** 2 == pytest.approx(expected, rel=1e-9, abs=1e-12)


WITH_UNIT = ("rmse", "rmse_low", "rmse_high", "sec", "bias", "sep", "intercept", "residual_sd")
WITHOUT_UNIT = ("r2_determination", "correlation_squared", "rpd", "range_error_ratio", "slope")


@given(
    SEEDS,
    st.integers(4, 30),
    st.floats(1e-3, 1e3),
    st.sampled_from(["reference on predicted", "predicted on reference"]),
)
def test_a_change_of_unit_scales_errors_and_leaves_ratios_and_verdicts(seed, n, factor, direction):
    predicted, reference = simulated(seed, n)
    one = figures_of_merit(predicted, reference, direction=direction, n_factors=1)
    other = figures_of_merit(factor * predicted, factor * reference, direction=direction, n_factors=1)
    for name in WITH_UNIT:
        assert getattr(other, name) == pytest.approx(factor * getattr(one, name), rel=1e-7), name
    for name in WITHOUT_UNIT:
        assert getattr(other, name) == pytest.approx(getattr(one, name), rel=1e-7), name
    assert other.press == pytest.approx(factor**2 * one.press, rel=1e-7)
    assert other.bias_test.p == pytest.approx(one.bias_test.p, rel=1e-6)
    assert other.line_test.slope_p == pytest.approx(one.line_test.slope_p, rel=1e-6)
    assert other.line_test.intercept_p == pytest.approx(one.line_test.intercept_p, rel=1e-6)


@given(SEEDS, st.integers(4, 30), st.floats(-1e3, 1e3))
def test_a_shift_of_both_changes_nothing_but_the_intercept(seed, n, shift):
    predicted, reference = simulated(seed, n)
    one = figures_of_merit(predicted, reference, n_factors=1)
    other = figures_of_merit(predicted + shift, reference + shift, n_factors=1)
    for name in ({*WITH_UNIT, *WITHOUT_UNIT} - {"intercept"}) | {"press"}:
        assert getattr(other, name) == pytest.approx(getattr(one, name), rel=1e-7, abs=1e-9), name
    assert other.bias_test.t == pytest.approx(one.bias_test.t, rel=1e-7, abs=1e-9)
    assert other.line_test.slope_t == pytest.approx(one.line_test.slope_t, rel=1e-7, abs=1e-9)
    assert other.intercept == pytest.approx(one.intercept + shift * (1 - one.slope), rel=1e-7, abs=1e-7)


@given(SEEDS, st.integers(4, 30))
def test_the_order_of_samples_is_irrelevant(seed, n):
    predicted, reference = simulated(seed, n)
    order = np.random.default_rng(seed).permutation(n)
    one, other = figures_of_merit(predicted, reference), figures_of_merit(predicted[order], reference[order])
    for name in (*WITHOUT_UNIT, "rmse", "bias", "sep"):
        assert getattr(other, name) == pytest.approx(getattr(one, name), rel=1e-9, abs=1e-12), name


@st.composite
def divisions(draw):
    """A number of samples, perhaps groups, and a number of folds they allow."""
    groups = draw(st.none() | st.lists(st.integers(0, 9), min_size=2, max_size=40))
    n = draw(st.integers(2, 40)) if groups is None else len(groups)
    units = n if groups is None else len(set(groups))
    assume(units >= 2)
    return n, draw(st.integers(2, units)), groups, draw(SEEDS)


MAKERS = {
    "leave_one_out": lambda n, k, groups, seed: leave_one_out(n, groups),
    "random_folds": lambda n, k, groups, seed: random_folds(n, k, seed, groups),
    "contiguous_blocks": lambda n, k, groups, seed: contiguous_blocks(n, k, groups),
    "interleaved": lambda n, k, groups, seed: interleaved(n, k, groups),
}


@pytest.mark.parametrize("maker", MAKERS.values(), ids=MAKERS)
@given(division=divisions())
def test_folds_hold_every_sample_once_split_no_group_and_come_again(maker, division):
    n, k, groups, seed = division
    folds = maker(n, k, groups, seed)
    units = n if groups is None else len(set(groups))
    assert folds.shape == (n,)
    assert set(folds.tolist()) == set(range(units if maker is MAKERS["leave_one_out"] else k))  # no fold is empty
    assert np.array_equal(folds, maker(n, k, groups, seed))
    if groups is not None:
        assert len(set(zip(groups, folds.tolist(), strict=True))) == units
    units_in_fold = [len({i if groups is None else groups[i] for i in np.flatnonzero(folds == f)}) for f in set(folds)]
    assert max(units_in_fold) - min(units_in_fold) <= 1


@given(divisions(), st.floats(0.01, 0.99))
def test_splits_hold_every_sample_once_split_no_group_and_come_again(division, fraction):
    n, _, groups, seed = division
    spectra = np.random.default_rng(seed).normal(size=(n, 3))
    splits = [lambda: random_split(n, fraction, seed, groups)]
    if (n if groups is None else len(set(groups))) >= 3:
        splits.append(lambda: kennard_stone_split(spectra, fraction, groups))
    for split in splits:
        kept, left_out = split()
        assert sorted([*kept, *left_out]) == list(range(n))
        assert min(kept.size, left_out.size) >= 1
        assert np.array_equal(kept, split()[0])
        if groups is not None:
            assert not {groups[i] for i in kept} & {groups[i] for i in left_out}


@given(SEEDS, st.integers(2, 25), st.integers(1, 40), st.floats(1e-6, 1e6))
def test_kennard_stone_sees_neither_turning_nor_moving_nor_scaling(seed, n, k, factor):
    rng = np.random.default_rng(seed)
    X = rng.normal(size=(n, k))
    turn, _ = np.linalg.qr(rng.normal(size=(k, k)))
    assert np.array_equal(kennard_stone(X, n), kennard_stone(factor * (X @ turn + rng.normal(size=k)), n))


@given(SEEDS, st.integers(3, 25), st.integers(1, 40))
def test_kennard_stone_chooses_the_same_samples_in_any_order(seed, n, k):
    rng = np.random.default_rng(seed)
    X, order = rng.normal(size=(n, k)), rng.permutation(n)
    one, other = kennard_stone(X, n), order[kennard_stone(X[order], n)]
    assert set(one[:2]) == set(other[:2])  # which of the first pair comes first is a matter of position
    assert np.array_equal(one[2:], other[2:])


@given(SEEDS, st.integers(3, 25))
def test_every_choice_of_kennard_stone_is_as_far_as_any_other_would_be(seed, n):
    X = np.random.default_rng(seed).normal(size=(n, 3))
    distance = np.linalg.norm(X[:, np.newaxis] - X, axis=2)
    chosen = kennard_stone(X, n)
    assert distance[chosen[0], chosen[1]] == pytest.approx(distance.max())
    for i in range(2, n):
        nearest = distance[:, chosen[:i]].min(axis=1)
        assert nearest[chosen[i]] == pytest.approx(nearest.max())


@given(SEEDS, st.integers(1, 30), st.floats(1e-3, 1e3))
def test_standard_errors_scale_with_the_unit(seed, n, factor):
    rng = np.random.default_rng(seed)
    errors, h = rng.normal(size=n), rng.uniform(0.01, 2, n)
    variance = base_variance(errors, h)
    assert base_variance(factor * errors, h) == pytest.approx(factor**2 * variance, rel=1e-12)
    assert variance <= np.mean(errors**2)
    found = standard_error(np.sqrt(variance), h)
    assert found**2 == pytest.approx(variance * (1 + h), rel=1e-9)
    assert standard_error(factor * np.sqrt(variance), h) == pytest.approx(factor * found, rel=1e-9)
    laboratory = 0.5 * np.sqrt(variance)
    share = true_value_share(float(found[0]), float(np.sqrt(variance)), float(laboratory))
    assert share is not None
    assert (share * found[0]) ** 2 == pytest.approx(found[0] ** 2 - laboratory**2, rel=1e-9, abs=1e-12)
