"""Classical least squares against known pure spectra, NumPy's least squares and its own variance formula."""

import json

import numpy as np
import pytest
from scipy.optimize import nnls
from sklearn.utils.estimator_checks import check_estimator

from quant.errors import AxisMismatchError, NotEnoughDataError, ParameterError
from quant.regression.classical_least_squares import ClassicalLeastSquares

AXIS = np.linspace(1800.0, 1600.0, 61)
PURE = np.array([np.exp(-(((AXIS - centre) / 12) ** 2)) for centre in (1740.0, 1715.0, 1660.0)])
SOLVENT = 0.3 + np.exp(-(((AXIS - 1700) / 60) ** 2))
OTHERS = ["ester", "acid"]


def contents(n=15, seed=1):
    return np.random.default_rng(seed).uniform(0.5, 4.0, (n, 3))


def spectra(C, noise=0.0, seed=2):
    return C @ PURE + noise * np.random.default_rng(seed).standard_normal((len(C), AXIS.size))


def calibrated(C, X, weight=None, **parameters):
    return ClassicalLeastSquares(OTHERS, **parameters).fit(X, C, sample_weight=weight)


# Known truth.


def test_without_noise_spectra_and_contents_are_found_exactly():
    model = calibrated(contents(), spectra(contents()))
    assert model.pure_spectra_ == pytest.approx(PURE, abs=1e-12)
    new = contents(4, seed=9)
    assert model.contents(spectra(new)) == pytest.approx(new, rel=1e-12)
    assert model.predict(spectra(new)) == pytest.approx(new[:, 0], rel=1e-12)
    assert model.residual_each(spectra(new)).max() < 1e-24


@pytest.mark.parametrize(("baseline", "power"), [("offset", 0), ("slope", 1), ("quadratic", 2)])
def test_a_baseline_term_takes_what_lower_ones_cannot(baseline, power):
    place = np.linspace(-1, 1, AXIS.size)
    drift = np.outer(np.linspace(-2, 3, 15), place**power)
    model = calibrated(contents(), spectra(contents()) + drift, baseline=baseline, axis=AXIS)
    new, its = contents(5, seed=9), np.outer([1.0, -4, 2, 0, 7], place**power)
    assert model.predict(spectra(new) + its) == pytest.approx(new[:, 0], abs=1e-10)
    assert model.residual_each(spectra(new) + its).max() < 1e-20
    lower = calibrated(contents(), spectra(contents()), baseline=["none", "offset", "slope"][power], axis=AXIS)
    assert np.abs(lower.predict(spectra(new) + its) - new[:, 0]).max() > 1e-3


def test_a_baseline_follows_the_axis_where_points_were_cut_out():
    kept = (AXIS > 1730) | (AXIS < 1690)
    slope = np.outer(np.linspace(-2, 3, 15), AXIS - 1700)[:, kept] / 100
    X = spectra(contents())[:, kept] + slope
    by_axis = calibrated(contents(), X, baseline="slope", axis=AXIS[kept])
    assert by_axis.predict(X) == pytest.approx(contents()[:, 0], abs=1e-10)
    by_number = calibrated(contents(), X, baseline="slope")
    assert np.abs(by_number.predict(X) - contents()[:, 0]).max() > 1e-3


def test_a_background_is_found_and_taken_out():
    model = calibrated(contents(), spectra(contents()) + SOLVENT, background=True)
    assert model.background_ == pytest.approx(SOLVENT, abs=1e-12)
    new = contents(4, seed=9)
    assert model.contents(spectra(new) + SOLVENT) == pytest.approx(new, rel=1e-11)
    without = calibrated(contents(), spectra(contents()) + SOLVENT)
    assert np.abs(without.predict(spectra(new) + SOLVENT) - new[:, 0]).max() > 0.05


def test_what_is_not_among_the_components_shows_in_the_residual():
    model = calibrated(contents(), spectra(contents(), 0.001))
    stranger = 0.05 * np.exp(-(((AXIS - 1625) / 8) ** 2))
    clean = model.residual_each(spectra(contents(6, 4), 0.001, 5))[0]
    spoilt = model.residual_spectra(spectra(contents(6, 4), 0.001, 5) + stranger)
    assert np.sum(spoilt**2, axis=1).min() > 20 * clean.max()
    assert AXIS[np.argmax(np.abs(spoilt), axis=1)] == pytest.approx(np.full(6, 1625), abs=4)


# Agreement with NumPy.


@pytest.mark.parametrize("background", [False, True])
@pytest.mark.parametrize("baseline", ["none", "quadratic"])
def test_equals_least_squares_of_numpy(background, baseline):
    C, X = contents(), spectra(contents(), 0.01) + SOLVENT
    model = calibrated(C, X, background=background, baseline=baseline, axis=AXIS)
    design = np.column_stack([np.ones(15), C]) if background else C
    K = np.linalg.lstsq(design, X, rcond=None)[0]
    assert model.pure_spectra_ == pytest.approx(K[int(background) :], abs=1e-10)
    terms = 3 if baseline == "quadratic" else 0
    columns = np.column_stack([K[int(background) :].T, np.vander(np.linspace(-1, 1, 61), terms)])
    new = spectra(contents(6, 4), 0.01, 5)
    start = K[0] if background else 0.0
    found, *_ = np.linalg.lstsq(columns, (new - start).T, rcond=None)
    assert model.contents(new) == pytest.approx(found[:3].T, abs=1e-10)
    assert model.residual_spectra(new) == pytest.approx(new - start - (columns @ found).T, abs=1e-10)
    assert model.predict(new) == pytest.approx((new - model.background_) @ model.coefficients_[0], abs=1e-10)


def test_each_component_is_a_model_of_its_own():
    C, X = contents(), spectra(contents(), 0.01)
    first = calibrated(C, X).contents(X)
    turned = ClassicalLeastSquares(["a", "b"]).fit(X, C[:, [2, 0, 1]])
    assert turned.predict(X) == pytest.approx(first[:, 2], abs=1e-11)


def test_a_weight_is_a_count_of_rows():
    C, X = contents(), spectra(contents(), 0.01)
    weight = np.tile([1.0, 3, 0], 5)
    rows = np.repeat(np.arange(15), weight.astype(int))
    one, two = calibrated(C, X, weight, background=True), calibrated(C[rows], X[rows], background=True)
    assert one.pure_spectra_ == pytest.approx(two.pure_spectra_, abs=1e-12)
    assert one.leverage_each(X) == pytest.approx(two.leverage_each(X), rel=1e-10)
    assert one.n_samples_ == two.n_samples_ == 20


# Leverage and variance.


def test_leverages_of_the_standards_add_up_to_the_terms():
    C = contents()
    for background in (False, True):
        model = calibrated(C, spectra(C), background=background)
        assert model.leverage_each(spectra(C)).sum() == pytest.approx(3 + background, rel=1e-10)
        assert model.factor_counts_ == (2 + background,)
        assert model.residual_degrees_of_freedom(15, model.factor_counts_[0]) == 12 - background


def test_the_variance_of_predictions_is_that_of_the_formula():
    C, new, sd = contents(8), np.array([[3.5, 0.6, 2.0]]), 0.002
    rng = np.random.default_rng(8)
    errors = []
    for _ in range(1500):
        X = C @ PURE + sd * rng.standard_normal((8, 61))
        errors.append(calibrated(C, X).predict(new @ PURE + sd * rng.standard_normal((1, 61)))[0] - 3.5)
    exact = calibrated(C, spectra(C))
    nas = 1 / np.linalg.norm(exact.coefficients_[0])
    expected = sd**2 / nas**2 * (1 + exact.leverage_each(new @ PURE)[0, 0])
    # 99.9 % bounds of a variance from 1500 values: about ± 12 %. Without the leverage it would be 40 % too small.
    assert np.var(errors) == pytest.approx(expected, rel=0.12)
    assert exact.leverage_each(new @ PURE)[0, 0] > 0.3
    assert abs(np.mean(errors)) < 3.3 * np.sqrt(expected / 1500)


# Contents that may not be negative.


def test_contents_below_zero_are_held_and_the_others_fitted_anew():
    C = contents()
    free, held = calibrated(C, spectra(C)), calibrated(C, spectra(C), non_negative=True)
    new = spectra(np.array([[-0.3, 1.0, 2.0], [1.0, 2.0, 3.0], [0.5, -0.2, -0.1]]))
    expected = np.array([nnls(free.pure_spectra_.T, row)[0] for row in new])
    assert held.contents(new) == pytest.approx(expected, abs=1e-10)
    assert held.contents(new)[0, 0] == 0
    assert held.contents(new)[1] == pytest.approx(free.contents(new)[1], rel=1e-12)
    assert held.remarks_each(new) == ("held at zero: the analyte", "", "held at zero: ester, acid")
    assert free.remarks_each(new) == ("", "", "")
    assert held.unconstrained().predict(new) == pytest.approx(free.predict(new), rel=1e-12)


def test_with_a_baseline_they_agree_with_scipy_and_signed_baseline_terms():
    C = contents()
    held = calibrated(C, spectra(C), non_negative=True, baseline="slope")
    new = spectra(np.array([[-0.3, 1.0, 2.0]])) + np.linspace(-1, 2, 61)
    ramp = np.vander(np.linspace(-1, 1, 61), 2)
    both = np.column_stack([held.pure_spectra_.T, ramp, -ramp])  # a signed term is the difference of two others
    assert held.contents(new)[0] == pytest.approx(nnls(both, new[0])[0][:3], abs=1e-8)


def test_there_is_no_regression_vector_where_contents_are_held():
    held = calibrated(contents(), spectra(contents()), non_negative=True)
    assert getattr(held, "coefficients_", None) is None


# Refusals.


def test_contents_that_add_up_are_refused_with_a_background():
    C = contents()
    closed = C / C.sum(axis=1, keepdims=True)
    with pytest.raises(NotEnoughDataError, match="add up to a constant"):
        calibrated(closed, spectra(closed), background=True)
    assert calibrated(closed, spectra(closed)).predict(spectra(closed)) == pytest.approx(closed[:, 0], rel=1e-10)


def test_components_without_a_spectrum_of_their_own_are_refused():
    C = contents()
    with pytest.raises(NotEnoughDataError, match="no spectra that differ"):
        calibrated(C, C @ PURE[[0, 1, 1]])
    with pytest.raises(NotEnoughDataError, match="no spectra that differ"):
        calibrated(C, C @ np.array([PURE[0], PURE[1], np.linspace(0, 1, 61)]), baseline="slope")


def test_too_few_samples_or_points_are_refused():
    C = contents()
    with pytest.raises(NotEnoughDataError, match="3 component"):
        calibrated(C[:2], spectra(C[:2]))
    with pytest.raises(NotEnoughDataError, match="n_features=4"):
        calibrated(C, spectra(C)[:, :4], baseline="slope")
    with pytest.raises(NotEnoughDataError, match="all zero"):
        calibrated(C * [1, 0, 1], spectra(C))


def test_wrong_parameters_are_refused():
    C = contents()
    with pytest.raises(ParameterError, match="baseline"):
        calibrated(C, spectra(C), baseline="cubic")
    with pytest.raises(AxisMismatchError, match="axis has 60 values"):
        calibrated(C, spectra(C), baseline="slope", axis=AXIS[1:])
    with pytest.raises(ParameterError, match="3 columns: the reference values, then ester, acid"):
        calibrated(C[:, :2], spectra(C))
    with pytest.raises(ParameterError, match="Choose a number among these"):
        calibrated(C, spectra(C)).with_factors(1)


# Contracts.


def test_the_state_comes_back():
    C, X = contents(), spectra(contents(), 0.01)
    for parameters in ({}, {"background": True, "baseline": "slope", "axis": AXIS}, {"non_negative": True}):
        model = calibrated(C, X, **parameters)
        plain, arrays = model.state()
        back = ClassicalLeastSquares.from_state(json.loads(json.dumps(plain)), arrays)
        for name in ("predict_each", "leverage_each", "residual_each", "contents"):
            assert np.array_equal(getattr(back, name)(X), getattr(model, name)(X))


NEUTRAL = [
    ClassicalLeastSquares(),
    ClassicalLeastSquares(background=True),
    ClassicalLeastSquares(baseline="offset"),
    ClassicalLeastSquares(non_negative=True),
]


@pytest.mark.parametrize("estimator", NEUTRAL, ids=repr)
def test_estimator_checks(estimator):
    expected = {}
    if estimator.non_negative:
        expected = {"check_regressors_train": "half of its values are negative, and held at zero"}
    results = check_estimator(estimator, expected_failed_checks=expected, on_fail=None, on_skip=None)
    assert [r["check_name"] for r in results if r["status"] == "failed"] == []
    assert {r["check_name"] for r in results if r["status"] == "xfail"} == set(expected)
    assert len([r for r in results if r["status"] == "passed"]) > 50
