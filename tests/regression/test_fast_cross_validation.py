"""Left-out predictions for all folds at once: published figures, the guard, the choice of the way, refusals."""

import json
from pathlib import Path

import numpy as np
import pytest

from quant.errors import ParameterError, SampleMismatchError
from quant.regression.fast_cross_validation import cheaper_way, fast_left_out
from quant.regression.pls import PLS

REFERENCE = Path(__file__).parents[1] / "reference_values"


@pytest.fixture
def data():
    rng = np.random.default_rng(11)
    X = rng.standard_normal((24, 60)).cumsum(axis=1)
    return X, X[:, 7] + 0.1 * rng.standard_normal(24), np.arange(24) % 4


def test_gasoline_leave_one_out_is_the_published_one():
    table = np.loadtxt(REFERENCE / "gasoline.csv", delimiter=",", skiprows=1)[:50]
    expected = json.loads((REFERENCE / "gasoline.json").read_text(encoding="utf-8"))
    found = fast_left_out(table[:, 2:], table[:, 1], [np.arange(50)], 10)
    rmsecv = np.sqrt(np.mean((found.predicted[0] - table[:, 1]) ** 2, axis=1))
    assert rmsecv == pytest.approx(expected["rmsecv_loo_CV"], abs=1e-9)
    # Mevik & Wehrens 2007 (source in gasoline.json): four significant digits printed.
    assert [float(f"{value:.4g}") for value in rmsecv] == expected["published"]["rmsecv_loo_CV"]


@pytest.mark.parametrize("way", ["rotated", "cross_products"])
def test_a_fold_that_runs_out_of_rank_says_where_and_stays(way):
    rng = np.random.default_rng(12)
    X, y = rng.standard_normal((30, 3)) @ rng.standard_normal((3, 20)), rng.standard_normal(30)
    fold = np.arange(30) % 5
    found = fast_left_out(X, y, [fold], 6, way=way)
    assert (found.stopped == 3).all()
    for f, note in enumerate(found.notes):
        model = PLS(6).fit(X[fold != f], y[fold != f])
        assert note.startswith("factor 4 would be numerical noise")
        assert found.predicted[0][:4, fold == f] == pytest.approx(model.predict_each(X[fold == f]), abs=1e-9)
    for part in (found.predicted, found.leverage, found.residual):
        assert (part[0, 3:] == part[0, 3]).all()


def test_a_fold_of_equal_reference_values_predicts_them(data):
    X, _, fold = data
    y = np.where(fold == 0, np.arange(24.0), 0.1)
    found = fast_left_out(X, y, [fold], 3)
    model = PLS(3).fit(X[fold != 0], y[fold != 0])
    assert found.stopped.tolist() == [0, 3, 3, 3]
    assert found.notes[0] == model.guard_note_
    assert found.predicted[0][:, fold == 0] == pytest.approx(0.1, rel=1e-14)


def test_folds_that_cross_products_cannot_resolve_are_done_again(data):
    rng = np.random.default_rng(13)
    sizes = 10.0 ** -np.arange(8)
    X = (np.linalg.qr(rng.standard_normal((60, 8)))[0] * sizes) @ np.linalg.qr(rng.standard_normal((8, 8)))[0]
    y = X @ rng.standard_normal(8) + 1e-9 * rng.standard_normal(60)
    fold = np.arange(60) % 3
    ways = [fast_left_out(X, y, [fold], 6, way=way) for way in ("rotated", "cross_products")]
    for name in ("predicted", "leverage", "residual"):
        assert getattr(ways[1], name) == pytest.approx(getattr(ways[0], name), rel=1e-7)
    assert ways[1].stopped.tolist() == [6, 6, 6]


def test_residuals_can_be_left_out(data):
    X, y, fold = data
    found = fast_left_out(X[:, :5], y, [fold], 2, residuals=False, way="cross_products")
    assert np.isnan(found.residual).all()
    assert np.isfinite(found.predicted).all()


def test_samples_of_the_set_and_folds_are_in_the_order_that_is_promised(data):
    X, y, fold = data
    found = fast_left_out(X, y, [fold, fold[::-1].copy()], 2)
    assert found.repeat.tolist() == [0, 0, 0, 0, 1, 1, 1, 1]
    assert found.predicted.shape == (2, 3, 24)
    assert found.new_predicted.shape == (8, 3, 0)


def test_many_samples_of_few_points_go_by_cross_products():
    assert cheaper_way(20_000, 700, 10, 1, 20) == "cross_products"
    assert cheaper_way(100, 2000, 10, 1, 15) == "rotated"
    assert cheaper_way(250, 200, 250, 1, 10) == "rotated"


@pytest.mark.parametrize(
    ("change", "error", "message"),
    [
        ({"n_factors": 18}, ParameterError, "from 0 to 17"),
        ({"n_factors": 2.0}, ParameterError, "whole number"),
        ({"y": np.arange(23.0)}, SampleMismatchError, "24 spectra in X but 23 values"),
        ({"fold_labels": []}, ParameterError, "empty"),
        ({"fold_labels": [np.arange(23)]}, SampleMismatchError, "23 fold labels for 24"),
        ({"fold_labels": [np.arange(24) - 1]}, ParameterError, "0 or more"),
        ({"fold_labels": [np.zeros(24, dtype=int)]}, ParameterError, "fewer than 2 rows"),
        ({"sample_index": np.arange(24) // 2}, SampleMismatchError, "keep replicates together"),
        ({"sample_index": np.arange(24) + 1}, ParameterError, "numbers of samples"),
        ({"new": np.ones((2, 9))}, ParameterError, "new has 9 points"),
        ({"way": "guess"}, ParameterError, "expected 'rotated'"),
    ],
)
def test_refuses_what_it_cannot_use(data, change, error, message):
    X, y, fold = data
    arguments = {"X": X, "y": y, "fold_labels": [fold], "n_factors": 2, **change}
    with pytest.raises(error, match=message):
        fast_left_out(**arguments)
