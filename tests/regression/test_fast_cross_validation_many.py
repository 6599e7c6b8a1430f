"""Many candidates: the same errors as one by one, on any number of workers, and memory that does not grow."""

import tracemalloc
from functools import partial

import numpy as np
import pytest

from quant.errors import ParameterError, SampleMismatchError
from quant.regression.fast_cross_validation import fast_left_out
from quant.regression.fast_cross_validation_many import cross_validate_many, each_block


@pytest.fixture
def data():
    rng = np.random.default_rng(21)
    X = rng.standard_normal((30, 80)).cumsum(axis=1)
    return X, X[:, 9] + 0.3 * rng.standard_normal(30), [np.arange(30) % 5, np.arange(30) // 6]


def gram(X):
    centred = X - X.mean(axis=0)
    return centred @ centred.T


def test_errors_are_those_of_left_out_predictions(data):
    X, y, folds = data
    parts = [X, X[:, :40], X[:, 20:]]
    found = cross_validate_many([gram(part) for part in parts], y, folds, 4, keep_predicted=True)
    for number, part in enumerate(parts):
        left = fast_left_out(part, y, folds, 4)
        squared = np.mean((left.predicted - y) ** 2, axis=0)
        rmsecv = np.sqrt(squared.mean(axis=1))
        assert found.predicted[number, 0] == pytest.approx(left.predicted, rel=1e-9)
        assert found.rmsecv[number, 0] == pytest.approx(rmsecv, rel=1e-9)
        spread = squared.std(axis=1, ddof=1) / np.sqrt(30) / (2 * rmsecv)
        assert found.rmsecv_se[number, 0] == pytest.approx(spread, rel=1e-9)


def test_errors_count_samples_not_spectra(data):
    X, y, folds = data
    sample = np.repeat(np.arange(15), 2)
    y, folds, weight = y[2 * sample], [fold[sample] for fold in folds], np.full(30, 0.5)
    left = fast_left_out(X, y, folds, 3, weight, sample)
    expected = np.sqrt(np.mean((left.predicted - y[::2]) ** 2, axis=(0, 2)))
    found = cross_validate_many([gram(X)], y, folds, 3, weight, sample)
    assert found.rmsecv[0, 0] == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("given", ["functions", "matrices"])
def test_any_number_of_workers_gives_the_same(data, given, monkeypatch):
    monkeypatch.setattr("quant.regression.fast_cross_validation_many.BLOCK_BYTES", 2**17)  # several blocks
    X, y, folds = data
    forms = [partial(gram, X[:, first:]) for first in range(40)]
    candidates = forms if given == "functions" else [form() for form in forms]
    alone, two = (cross_validate_many(candidates, y, folds, 3, n_jobs=jobs) for jobs in (1, 2))
    assert (alone.rmsecv == two.rmsecv).all()
    assert (alone.stopped == two.stopped).all()
    assert (np.diff(alone.rmsecv[:, 0, 3]) != 0).all()


def test_candidates_are_taken_as_they_are_needed(data, monkeypatch):
    X, y, folds = data
    monkeypatch.setattr("quant.regression.fast_cross_validation_many.BLOCK_BYTES", 1)
    taken = []

    def source():
        for number in range(100):
            taken.append(number)
            yield gram(X)

    blocks = each_block(source(), y, folds, 2)
    next(blocks)
    next(blocks)
    assert taken == [0, 1]


@pytest.mark.parametrize("jobs", [1, 2])
def test_memory_does_not_grow_with_the_number_of_candidates(jobs, monkeypatch):
    monkeypatch.setattr("quant.regression.fast_cross_validation_many.BLOCK_BYTES", 2**18)
    rng = np.random.default_rng(22)
    X, y = rng.standard_normal((60, 90)), rng.standard_normal(60)

    def peak(count):
        tracemalloc.start()
        cross_validate_many((gram(X) for _ in range(count)), y, [np.arange(60) % 3], 2, n_jobs=jobs)
        most = tracemalloc.get_traced_memory()[1]
        tracemalloc.stop()
        return most

    peak(50)  # what is imported stays
    few, many = peak(500), peak(3000)
    # 2500 Gram matrices of 29 kB are 72 MB. Blocks hold 7 of them, and two blocks a worker are out at once.
    assert many - few < 2e6


def test_a_candidate_of_low_rank_stops_and_says_so(data):
    X, y, folds = data
    thin = X[:, :2]
    found = cross_validate_many([gram(thin), gram(X)], y, folds, 5)
    assert (found.stopped[0] == 2).all()
    assert (found.stopped[1] == 5).all()
    assert (found.rmsecv[0, 0, 2:] == found.rmsecv[0, 0, 2]).all()


def test_a_looser_accuracy_lets_more_factors_pass():
    rng = np.random.default_rng(23)
    X = (np.linalg.qr(rng.standard_normal((30, 20)))[0] * 10.0 ** -np.arange(0, 10, 0.5)) @ rng.standard_normal(
        (20, 40)
    )
    y = rng.standard_normal(30)
    stops = [
        cross_validate_many([gram(X)], y, [np.arange(30) % 3], 12, accuracy=accuracy).stopped.max()
        for accuracy in (1e-10, 1e-8, 1e-5)
    ]
    assert stops[0] < stops[1] < stops[2]


@pytest.mark.parametrize(
    ("change", "error", "message"),
    [
        ({"candidates": []}, ParameterError, "no candidate"),
        ({"candidates": [np.eye(29)]}, SampleMismatchError, r"shape \(29, 29\); expected \(30, 30\)"),
        ({"accuracy": 0.0}, ParameterError, "between 0 and 1"),
        ({"n_factors": 24}, ParameterError, "from 0 to 23"),
        ({"y": np.full(30, np.nan)}, ParameterError, "not finite"),
    ],
)
def test_refuses_what_it_cannot_use(data, change, error, message):
    X, y, folds = data
    arguments = {"candidates": [gram(X)], "y": y, "fold_labels": folds, "n_factors": 2, **change}
    with pytest.raises(error, match=message):
        cross_validate_many(**arguments)
