"""PLS against published data, other programs and certified least squares."""

import json
from pathlib import Path

import numpy as np
import pytest
from sklearn.base import clone
from sklearn.cross_decomposition import PLSRegression
from sklearn.exceptions import NotFittedError
from sklearn.model_selection import GridSearchCV, KFold
from sklearn.pipeline import make_pipeline
from sklearn.preprocessing import FunctionTransformer
from sklearn.utils.estimator_checks import check_estimator

from quant.errors import ParameterError
from quant.regression.pls import PLS

REFERENCE = Path(__file__).parents[1] / "reference_values"


def read(name):
    table = np.loadtxt(REFERENCE / f"{name}.csv", delimiter=",", skiprows=1)
    return table, json.loads((REFERENCE / f"{name}.json").read_text(encoding="utf-8"))


@pytest.fixture(scope="module")
def gasoline():
    table, expected = read("gasoline")
    return table[:, 2:], table[:, 1], expected


@pytest.fixture(scope="module")
def fitted(gasoline):
    X, y, _ = gasoline
    return PLS(n_factors=10).fit(X[:50], y[:50])


def leave_one_out(X, y, n_factors):
    rows = np.arange(y.size)
    return np.hstack([PLS(n_factors).fit(X[rows != i], y[rows != i]).predict_each(X[[i]]) for i in rows])


def rmse(predicted, reference):
    return np.sqrt(np.mean((predicted - reference) ** 2, axis=-1))


# Gasoline, samples 1-50 for calibration, 51-60 for test: gasoline.json says which program computed each figure.


def test_gasoline_coefficients(gasoline, fitted):
    expected = gasoline[2]["coefficients"]
    for factors, values in expected.items():
        points = {name: (int(name.removesuffix(" nm")) - 900) // 2 for name in values if name != "intercept"}
        assert len(points) == 9
        for name, point in points.items():
            assert fitted.coefficients_[int(factors), point] == pytest.approx(values[name], abs=1e-9)
        assert fitted.intercepts_[int(factors)] == pytest.approx(values["intercept"], abs=1e-9)


def test_gasoline_errors_of_calibration_and_prediction(gasoline, fitted):
    X, y, expected = gasoline
    assert rmse(fitted.predict_each(X[:50]), y[:50]) == pytest.approx(expected["rmsec"], abs=1e-9)
    assert rmse(fitted.predict_each(X[50:]), y[50:]) == pytest.approx(expected["rmsep_test"], abs=1e-9)


def test_gasoline_predictions_and_explained_variance(gasoline, fitted):
    X, _, expected = gasoline
    for factors in (2, 3):
        values = expected[f"test_predictions_{factors}_components"]
        assert fitted.with_factors(factors).predict(X[50:]) == pytest.approx(values, abs=1e-9)
    percent = expected["explained_x_percent_per_component_1_to_10"]
    assert 100 * fitted.explained_x_ == pytest.approx(percent, abs=1e-9)


def test_gasoline_leave_one_out(gasoline):
    X, y, expected = gasoline
    rmsecv = rmse(leave_one_out(X[:50], y[:50], 10), y[:50])
    assert rmsecv == pytest.approx(expected["rmsecv_loo_CV"], abs=1e-9)
    # Mevik & Wehrens 2007 (source in gasoline.json): four significant digits printed.
    assert [float(f"{value:.4g}") for value in rmsecv] == expected["published"]["rmsecv_loo_CV"]


def test_equals_unscaled_pls_of_scikit_learn_and_not_the_scaled_one(gasoline, fitted):
    X, y, _ = gasoline
    for factors in range(1, 11):
        other = PLSRegression(n_components=factors, scale=False).fit(X[:50], y[:50])
        assert fitted.coefficients_[factors] == pytest.approx(other.coef_[0], abs=1e-8)
    scaled = PLSRegression(n_components=2).fit(X[:50], y[:50])  # the default there
    assert np.abs(scaled.predict(X[50:]) - fitted.with_factors(2).predict(X[50:])).max() > 0.1


# Least squares: with every factor, PLS is ordinary least squares.


def test_longley_with_all_factors_is_certified_least_squares():
    table, certified = read("longley")
    X, y = table[:, :-1], table[:, -1]
    model = PLS(n_factors=6).fit(X, y)
    assert model.guard_note_ == ""
    # The centred matrix has condition 6e5, times rounding 1e-10: that is demanded; 13 digits were reached.
    assert model.coefficients_[-1] == pytest.approx(certified["coefficients"], rel=1e-10)
    assert model.intercepts_[-1] == pytest.approx(certified["intercept"], rel=1e-10)
    freedom = model.residual_degrees_of_freedom(16, 6)
    assert np.sqrt(np.sum((model.predict(X) - y) ** 2) / freedom) == pytest.approx(certified["residual_sd"], rel=1e-10)


def test_hald_with_all_factors_leaves_one_out_as_least_squares_does():
    table, textbook = read("hald")
    X, y = table[:, :-1], table[:, -1]
    model = PLS(n_factors=4).fit(X, y)
    assert model.coefficients_[-1] == pytest.approx(textbook["coefficients"], abs=5e-5)
    assert model.intercepts_[-1] == pytest.approx(textbook["intercept"], abs=5e-5)
    leverage, error = model.leverage_each(X)[-1], model.predict(X) - y
    assert leverage == pytest.approx(textbook["leverages_with_mean"], abs=5e-6)
    press = np.sum((leave_one_out(X, y, 4)[-1] - y) ** 2)
    assert press == pytest.approx(textbook["press_loo"], abs=5e-5)
    assert press == pytest.approx(np.sum((error / (1 - leverage)) ** 2), rel=1e-12)


# The guard, and data that hold nothing.


def test_rank_three_data_stop_at_three_factors():
    rng = np.random.default_rng(3)
    X, y = rng.standard_normal((30, 3)) @ rng.standard_normal((3, 40)), rng.standard_normal(30)
    model = PLS(n_factors=8).fit(X, y)
    assert model.n_factors_ == 3
    assert model.guard_note_.startswith("factor 4 would be numerical noise")
    assert model.guard_note_.endswith("stopped at 3")
    assert model.factor_counts_ == (0, 1, 2, 3)
    least_squares = y.mean() + (X - X.mean(0)) @ np.linalg.lstsq(X - X.mean(0), y - y.mean(), rcond=1e-10)[0]
    assert model.predict(X) == pytest.approx(least_squares, abs=1e-10)


def test_guard_lets_the_last_real_factor_pass():
    rng = np.random.default_rng(4)
    X, y = rng.standard_normal((12, 11)), rng.standard_normal(12)
    model = PLS(n_factors=11).fit(X, y)
    assert model.n_factors_ == 11
    assert model.predict(X) == pytest.approx(y, abs=1e-9)


def test_equal_reference_values_give_their_mean_and_no_factor():
    X = np.random.default_rng(5).standard_normal((7, 4))
    model = PLS(n_factors=2).fit(X, np.full(7, 0.1))  # 0.1 has no exact double: the mean differs by rounding
    assert model.n_factors_ == 0
    assert "all reference values are equal" in model.guard_note_
    assert model.predict(X) == pytest.approx(0.1, rel=1e-15)
    assert model.leverage_each(X) == pytest.approx(1 / 7)


def test_equal_spectra_give_no_factor():
    model = PLS(n_factors=2).fit(np.full((6, 3), 0.1), np.arange(6.0))
    assert model.n_factors_ == 0
    assert "factor 1 would be numerical noise" in model.guard_note_


def test_no_factor_is_the_mean():
    X, y = np.random.default_rng(6).standard_normal((5, 3)), np.arange(5.0)
    model = PLS(n_factors=0).fit(X, y)
    assert model.guard_note_ == ""
    assert model.predict(X) == pytest.approx(2.0)
    assert model.residual_each(X)[0] == pytest.approx(np.sum((X - X.mean(0)) ** 2, axis=1))


@pytest.mark.parametrize("n_factors", [-1, 1.0, True, "2", None])
def test_refuses_what_is_no_number_of_factors(n_factors):
    with pytest.raises(ParameterError, match="whole number"):
        PLS(n_factors=n_factors).fit(np.eye(4), np.arange(4.0))


def test_refuses_more_factors_than_the_rows_present_allow():
    X, y = np.random.default_rng(7).standard_normal((5, 9)), np.arange(5.0)
    with pytest.raises(ParameterError, match=r"upper bound is 4.*n_samples=5.*Got 5 instead\. Reduce"):
        PLS(n_factors=5).fit(X, y)
    with pytest.raises(ParameterError, match="upper bound is 2"):
        PLS(n_factors=3).fit(X, y, sample_weight=[1, 1, 1, 0, 0])


# Cutting and keeping.


def test_a_cut_copy_equals_a_fit_with_fewer_factors(gasoline, fitted):
    X, y, _ = gasoline
    cut, small = fitted.with_factors(4), PLS(n_factors=4).fit(X[:50], y[:50])
    assert cut.get_params() == {"n_factors": 4}
    for method in ("predict_each", "leverage_each", "residual_each"):
        assert np.array_equal(getattr(cut, method)(X), getattr(small, method)(X))
    assert np.array_equal(cut.scores_, small.scores_)
    assert fitted.n_factors_ == 10


def test_the_guard_note_stays_only_if_nothing_was_cut():
    rng = np.random.default_rng(8)
    model = PLS(n_factors=6).fit(rng.standard_normal((20, 2)) @ rng.standard_normal((2, 9)), rng.standard_normal(20))
    assert model.with_factors(2).guard_note_ == model.guard_note_ != ""
    assert model.with_factors(1).guard_note_ == ""


def test_refuses_to_cut_to_more_than_there_is(fitted):
    with pytest.raises(ParameterError, match="asked for 11 factor"):
        fitted.with_factors(11)
    with pytest.raises(NotFittedError):
        PLS().with_factors(1)


def test_the_state_is_small_and_comes_back(gasoline, fitted):
    X = gasoline[0]
    model = fitted.with_factors(3)
    parameters, arrays = model.state()
    assert all(50 not in array.shape for array in arrays.values()), "something has one number a training row"
    assert max(array.shape[-1] for array in arrays.values()) <= 401
    back = PLS.from_state(json.loads(json.dumps(parameters)), arrays)
    for method in ("predict_each", "leverage_each", "residual_each"):
        assert np.array_equal(getattr(back, method)(X), getattr(model, method)(X))
    assert np.array_equal(back.with_factors(2).predict(X), fitted.with_factors(2).predict(X))


def test_predict_is_the_last_row_and_agrees_with_the_intercept(gasoline, fitted):
    X = gasoline[0]
    assert fitted.predict(X) == pytest.approx(fitted.predict_each(X)[-1], rel=1e-13)
    assert fitted.predict(X) == pytest.approx(fitted.intercepts_[-1] + X @ fitted.coefficients_[-1], rel=1e-12)


# scikit-learn's contract.


@pytest.mark.parametrize("estimator", [PLS(), PLS(n_factors=0), PLS(n_factors=1)], ids=repr)
def test_estimator_checks(estimator):
    expected = {}
    if estimator.n_factors == 0:
        expected = {"check_regressors_train": "the mean alone explains nothing; the check wants a score above 0.5"}
    results = check_estimator(estimator, expected_failed_checks=expected, on_fail=None, on_skip=None)
    assert [r["check_name"] for r in results if r["status"] == "failed"] == []
    assert {r["check_name"] for r in results if r["status"] == "xfail"} == set(expected)
    assert len([r for r in results if r["status"] == "passed"]) > 50


def test_inside_a_pipeline_and_a_grid_search(gasoline):
    X, y, _ = gasoline
    counts, folds = [0, 2, 4, 6], KFold(5)
    pipeline = make_pipeline(FunctionTransformer(), PLS())
    search = GridSearchCV(pipeline, {"pls__n_factors": counts}, scoring="neg_mean_squared_error", cv=folds).fit(X, y)
    by_hand = [
        np.mean((PLS(6).fit(X[train], y[train]).predict_each(X[test])[counts] - y[test]) ** 2, axis=1)
        for train, test in folds.split(X)
    ]
    assert -search.cv_results_["mean_test_score"] == pytest.approx(np.mean(by_hand, axis=0), rel=1e-10)
    assert search.best_estimator_[-1].n_factors_ == counts[int(np.argmin(np.mean(by_hand, axis=0)))]


def test_a_clone_has_the_parameters_and_nothing_learnt(fitted):
    copy = clone(fitted)
    assert copy.n_factors == 10
    assert not hasattr(copy, "coefficients_")
