"""Principal component regression against scikit-learn, certified least squares and a textbook."""

import json
from pathlib import Path

import numpy as np
import pytest
from sklearn.decomposition import PCA
from sklearn.linear_model import LinearRegression
from sklearn.pipeline import make_pipeline
from sklearn.utils.estimator_checks import check_estimator

from quant.errors import ParameterError
from quant.regression.pcr import PCR

REFERENCE = Path(__file__).parents[1] / "reference_values"


def read(name):
    table = np.loadtxt(REFERENCE / f"{name}.csv", delimiter=",", skiprows=1)
    return table, json.loads((REFERENCE / f"{name}.json").read_text(encoding="utf-8"))


@pytest.fixture(scope="module")
def gasoline():
    table, _ = read("gasoline")
    return table[:, 2:], table[:, 1]


@pytest.fixture(scope="module")
def fitted(gasoline):
    X, y = gasoline
    return PCR(n_factors=10).fit(X[:50], y[:50])


@pytest.mark.parametrize("count", [1, 2, 5, 10])
def test_equals_principal_components_and_least_squares_of_scikit_learn(gasoline, fitted, count):
    X, y = gasoline
    other = make_pipeline(PCA(count, svd_solver="full"), LinearRegression()).fit(X[:50], y[:50])
    assert fitted.with_factors(count).predict(X[50:]) == pytest.approx(other.predict(X[50:]), abs=1e-10)
    vector = other[-1].coef_ @ other[0].components_
    assert fitted.coefficients_[count] == pytest.approx(vector, abs=1e-10 * np.abs(vector).max())
    assert fitted.explained_x_[:count] == pytest.approx(other[0].explained_variance_ratio_, rel=1e-10)


def test_residual_and_leverage_are_those_of_the_components(gasoline, fitted):
    X, _ = gasoline
    pca = PCA(4, svd_solver="full").fit(X[:50])
    scores = pca.transform(X)
    rest = np.sum((X - pca.inverse_transform(scores)) ** 2, axis=1)
    assert fitted.residual_each(X)[4] == pytest.approx(rest, rel=1e-9)
    leverage = 1 / 50 + np.sum(scores**2 / (pca.explained_variance_ * 49), axis=1)
    assert fitted.leverage_each(X)[4] == pytest.approx(leverage, rel=1e-10)


def test_longley_with_all_components_is_certified_least_squares():
    table, certified = read("longley")  # NIST StRD: from memory, reproduced
    model = PCR(n_factors=6).fit(table[:, :-1], table[:, -1])
    assert model.guard_note_ == ""
    # The centred matrix has condition 6e5: times rounding 1e-10.
    assert model.coefficients_[-1] == pytest.approx(certified["coefficients"], rel=1e-9)
    assert model.intercepts_[-1] == pytest.approx(certified["intercept"], rel=1e-9)


def test_hald_with_all_components_leaves_one_out_as_least_squares_does():
    table, textbook = read("hald")  # Woods, Steinour, Starke 1932: from memory, reproduced
    X, y = table[:, :-1], table[:, -1]
    model = PCR(n_factors=4).fit(X, y)
    assert model.leverage_each(X)[-1] == pytest.approx(textbook["leverages_with_mean"], abs=5e-6)
    rows = np.arange(y.size)
    left_out = [PCR(4).fit(X[rows != i], y[rows != i]).predict(X[[i]])[0] for i in rows]
    assert np.sum((left_out - y) ** 2) == pytest.approx(textbook["press_loo"], abs=5e-5)


def test_rank_three_data_stop_at_three_components():
    rng = np.random.default_rng(3)
    X, y = rng.standard_normal((30, 3)) @ rng.standard_normal((3, 40)), rng.standard_normal(30)
    model = PCR(n_factors=8).fit(X, y)
    assert model.factor_counts_ == (0, 1, 2, 3)
    assert model.guard_note_.startswith("factor 4 would be numerical noise")
    assert model.guard_note_.endswith("stopped at 3")
    assert model.with_factors(2).guard_note_ == ""
    least_squares = y.mean() + (X - X.mean(0)) @ np.linalg.lstsq(X - X.mean(0), y - y.mean(), rcond=1e-10)[0]
    assert model.predict(X) == pytest.approx(least_squares, abs=1e-10)


def test_spectra_that_do_not_vary_have_no_component():
    model = PCR(n_factors=2).fit(np.ones((5, 4)), [1.0, 2, 3, 4, 5])
    assert model.factor_counts_ == (0,)
    assert model.predict(np.ones((2, 4))).tolist() == [3.0, 3.0]


def test_equal_values_are_predicted_exactly(gasoline):
    X = gasoline[0]
    model = PCR(n_factors=3).fit(X, np.full(60, 0.1))
    assert np.ptp(model.predict(X)) == 0
    assert model.explained_y_.tolist() == [0, 0, 0]


def test_a_weight_is_a_count_of_rows(gasoline):
    X, y = gasoline
    weight = np.tile([1.0, 2, 0], 20)
    rows = np.repeat(np.arange(60), weight.astype(int))
    one, two = PCR(5).fit(X, y, sample_weight=weight), PCR(5).fit(X[rows], y[rows])
    assert one.coefficients_ == pytest.approx(two.coefficients_, abs=1e-9)
    assert one.leverage_each(X) == pytest.approx(two.leverage_each(X), rel=1e-9)
    assert one.n_samples_ == two.n_samples_ == 60


def test_signs_are_fixed(fitted):
    assert (fitted.y_loadings_ >= 0).all()
    assert fitted.weights_.T @ fitted.weights_ == pytest.approx(np.eye(10), abs=1e-12)


def test_the_state_is_small_and_comes_back(gasoline, fitted):
    parameters, arrays = fitted.with_factors(3).state()
    assert all(50 not in array.shape for array in arrays.values())
    back = PCR.from_state(json.loads(json.dumps(parameters)), arrays)
    for name in ("predict_each", "leverage_each", "residual_each"):
        assert np.array_equal(getattr(back, name)(gasoline[0]), getattr(fitted.with_factors(3), name)(gasoline[0]))


def test_too_many_components_are_refused(gasoline):
    X, y = gasoline
    with pytest.raises(ParameterError, match="upper bound is 4"):
        PCR(n_factors=5).fit(X[:5], y[:5])
    with pytest.raises(ParameterError, match="asked for 11 factor"):
        PCR(n_factors=10).fit(X, y).with_factors(11)


@pytest.mark.parametrize("estimator", [PCR(), PCR(n_factors=0)], ids=repr)
def test_estimator_checks(estimator):
    why = "in data of ten equal variances the leading components do not hold the response; the check wants 0.5 of it"
    expected = {"check_regressors_train": why}
    results = check_estimator(estimator, expected_failed_checks=expected, on_fail=None, on_skip=None)
    assert [r["check_name"] for r in results if r["status"] == "failed"] == []
    assert {r["check_name"] for r in results if r["status"] == "xfail"} == set(expected)
    assert len([r for r in results if r["status"] == "passed"]) > 50
