"""Laws of fast cross-validation: every way equals refitting every fold, and says itself where it no longer does."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from quant.regression.bidiagonal import pls_bidiagonal
from quant.regression.fast_cross_validation import fast_left_out
from quant.regression.fast_cross_validation_many import cross_validate_many
from quant.regression.pls import PLS
from quant.statistics import splits

laws = settings(max_examples=40, deadline=None, derandomize=True)
AGREEMENT = 1e-8  # of the range of y for predictions, of themselves for leverages
WEAK = (
    1e-6  # norm of a score or weight before scaling / norm of the spectra, below which two programs lose common digits
)
SCHEMES = ["leave_one_out", "random", "repeated", "contiguous", "interleaved", "groups"]


@st.composite
def problems(draw, tall=False):
    """Samples with replicates or without, of decaying singular values, folds of every scheme, constant y in some."""
    rng = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))
    samples = draw(st.integers(8, 30))
    copies = rng.integers(1, 4, samples) if draw(st.booleans()) else np.ones(samples, dtype=int)
    sample = rng.permutation(np.repeat(np.arange(samples), copies))
    n = sample.size
    k = draw(st.integers(4, 7 if tall else 80))
    rank = min(n, k)
    sizes = 10 ** (-draw(st.sampled_from([0.0, 0.2, 0.5])) * np.arange(rank))
    U, V = (np.linalg.qr(rng.standard_normal((rows, rank)))[0] for rows in (n, k))
    X = (U * sizes) @ V.T + draw(st.sampled_from([0.0, 30.0])) * rng.standard_normal(k)
    truth = rng.standard_normal(samples) + draw(st.sampled_from([0.0, 1000.0]))
    labels = folds(draw(st.sampled_from(SCHEMES)), samples, rng)
    if draw(st.booleans()):
        truth[labels[0] != labels[0][0]] = 0.1  # the first fold learns from equal values
    smallest = min(np.count_nonzero(fold != f) for fold in labels for f in fold)
    A = draw(st.integers(1, max(1, min(smallest - 2, k, 12))))
    return X, truth[sample], sample, 1.0 / copies[sample], [fold[sample] for fold in labels], A


def folds(scheme, n, rng):
    match scheme:
        case "leave_one_out":
            return [splits.leave_one_out(n)]
        case "random":
            return [splits.random_folds(n, 4, 1)]
        case "repeated":
            return [splits.random_folds(n, 5, seed) for seed in range(3)]
        case "contiguous":
            return [splits.contiguous_blocks(n, 3)]
        case "interleaved":
            return [splits.interleaved(n, 3)]
        case _:
            return [splits.leave_one_group_out(list(np.arange(n) % 4))]


def refitted(X, y, sample, weight, labels, A):
    """Predicted, leverage, residual, each (repeats, counts, samples); within; and where the two may be compared."""
    samples = sample.max() + 1
    shape = (len(labels), A + 1, samples)
    predicted, leverage, residual, fair = np.empty(shape), np.empty(shape), np.empty(shape), np.empty(shape, dtype=bool)
    within, found = np.zeros(shape[:2]), []
    mean = np.array([X[sample == one].mean(0) for one in range(samples)])
    for repeat, fold in enumerate(labels):
        for f in np.unique(fold):
            train, out = fold != f, fold == f
            model = PLS(A).fit(X[train], y[train], weight[train])
            left = np.unique(sample[out])
            found.append(model)
            pad = [*range(model.n_factors_ + 1), *[model.n_factors_] * (A - model.n_factors_)]
            predicted[repeat][:, left] = model.predict_each(mean[left])[pad]
            leverage[repeat][:, left] = model.leverage_each(mean[left])[pad]
            each = model.residual_each(X[out])[pad]
            residual[repeat][:, left] = np.array([each[:, sample[out] == one].mean(1) for one in left]).T
            single = model.predict_each(X[out])[pad]
            within[repeat] += np.sum((single - predicted[repeat][:, sample[out]]) ** 2, axis=1)
            fair[repeat][:, left] = strong(X[train], y[train], weight[train], A)[:, None]
    return predicted, leverage, residual, within, fair, found


def strong(X, y, weight, A):
    """Whether the scores and weights of each count were all above `WEAK` before scaling, shape (A + 1,)."""
    found = pls_bidiagonal(X, y, weight, A)
    size = np.linalg.norm((X - np.average(X, axis=0, weights=weight)) * np.sqrt(weight)[:, None])
    alpha, theta = found.diagonal / size, np.abs(np.append(np.inf, found.superdiagonal)) / size
    norms = np.concatenate([[np.inf], np.minimum(alpha, theta[: alpha.size]), np.zeros(A - alpha.size)])
    return np.minimum.accumulate(norms) > WEAK


def check(fast, expected, y):
    predicted, leverage, residual, within, fair, _ = expected
    span = max(np.ptp(y), 1e-3)
    assert np.abs(fast.predicted - predicted)[fair].max() <= AGREEMENT * span
    assert np.abs(fast.leverage / leverage - 1)[fair].max() <= AGREEMENT
    assert np.abs(fast.residual - residual)[fair].max() <= AGREEMENT * residual[:, 0].max()
    everywhere = fair.all(axis=2)
    assert np.abs(fast.within - within)[everywhere].max() <= AGREEMENT * span**2 * y.size


@laws
@given(problems())
def test_rotated_spectra_equal_refitting(problem):
    X, y, sample, weight, labels, A = problem
    fast = fast_left_out(X, y, labels, A, weight, sample, way="rotated")
    expected = refitted(*problem)
    check(fast, expected, y)
    for stopped, note, model in zip(fast.stopped, fast.notes, expected[-1], strict=True):
        if model.guard_note_.startswith("all reference"):
            assert (stopped, note) == (0, model.guard_note_)
        assert (note == "") == (stopped == A)


@laws
@given(problems(tall=True))
def test_cross_products_equal_refitting(problem):
    X, y, sample, weight, labels, A = problem
    check(fast_left_out(X, y, labels, A, weight, sample, way="cross_products"), refitted(*problem), y)


@laws
@given(problems())
def test_gram_matrices_equal_refitting_up_to_where_they_stop(problem):
    X, y, sample, weight, labels, A = problem
    centred = X - X.mean(axis=0)
    fast = cross_validate_many([centred @ centred.T], y, labels, A, weight, sample, keep_predicted=True)
    predicted = refitted(*problem)[0]
    for column, (repeat, f) in enumerate((r, f) for r, fold in enumerate(labels) for f in np.unique(fold)):
        last = fast.stopped[0, 0, column]
        left = np.unique(sample[labels[repeat] == f])
        ours = fast.predicted[0, 0, repeat][:, left]
        assert np.abs(ours[: last + 1] - predicted[repeat][: last + 1, left]).max() <= AGREEMENT * max(np.ptp(y), 1e-3)
        assert (ours[last:] == ours[last]).all()


@laws
@given(problems(), st.integers(1, 5))
def test_permutations_are_only_more_columns(problem, seed):
    X, y, sample, weight, labels, A = problem
    centred = X - X.mean(axis=0)
    gram = centred @ centred.T
    truth = np.array([y[sample == one][0] for one in range(sample.max() + 1)])
    shuffled = np.random.default_rng(seed).permutation(truth)[sample]
    both = cross_validate_many([gram], np.array([y, shuffled]), labels, A, weight, sample).rmsecv[0]
    alone = [cross_validate_many([gram], one, labels, A, weight, sample).rmsecv[0, 0] for one in (y, shuffled)]
    assert both == pytest.approx(np.array(alone), rel=1e-7, abs=1e-9)


@laws
@given(problems())
def test_new_spectra_are_predicted_by_the_model_of_every_fold(problem):
    X, y, sample, weight, labels, A = problem
    new = X[:3] + 0.1 * X[1]
    fast = fast_left_out(X, y, labels, A, weight, sample, new)
    column = 0
    for fold in labels:
        for f in np.unique(fold):
            train = fold != f
            model = PLS(A).fit(X[train], y[train], weight[train])
            fair = np.flatnonzero(strong(X[train], y[train], weight[train], A))
            gap = fast.new_predicted[column][fair] - model.predict_each(new)[fair]
            far = np.sqrt(1 + model.leverage_each(new)[fair])  # errors grow with the distance from what was learnt
            assert (np.abs(gap) <= AGREEMENT * far * max(np.ptp(y), 1e-3)).all()
            column += 1
    assert fast.new_leverage.shape == (column, A + 1, 3)
