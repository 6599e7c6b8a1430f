"""The contract that every registered method keeps."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.regression.band_area import BandArea
from quant.regression.classical_least_squares import ClassicalLeastSquares
from quant.regression.method import Method
from quant.regression.pcr import PCR
from quant.regression.pls import PLS
from quant.regression.registry import METHODS


@pytest.fixture
def samples():
    rng = np.random.default_rng(11)
    y = np.linspace(1.0, 4.0, 9)
    return np.outer(y, [1.0, 3.0, 2.0, 0.5]) + 0.01 * rng.standard_normal((9, 4)), y


def test_registry_names_the_methods():
    named = {"pls": PLS, "pcr": PCR, "classical_least_squares": ClassicalLeastSquares, "band_area": BandArea}
    assert named == METHODS


@pytest.mark.parametrize("method", METHODS.values(), ids=METHODS.keys())
def test_every_method_answers_for_all_its_factor_counts(method, samples):
    X, y = samples
    fitted = method().fit(X, y)
    assert isinstance(fitted, Method)
    rows = len(fitted.factor_counts_)
    for name in ("predict_each", "leverage_each", "residual_each"):
        assert getattr(fitted, name)(X[:5]).shape == (rows, 5)
    assert np.allclose(fitted.predict(X), fitted.predict_each(X)[-1], rtol=1e-13)
    assert fitted.n_samples_ == 9
    assert fitted.leverage_each(X)[-1].sum() == pytest.approx(fitted.factor_counts_[-1] + 1, rel=0.02)


@pytest.mark.parametrize("method", METHODS.values(), ids=METHODS.keys())
def test_every_method_comes_back_from_its_state(method, samples):
    X, y = samples
    fitted = method().fit(X, y)
    back = method.from_state(*fitted.state())
    for name in ("predict_each", "leverage_each", "residual_each"):
        assert np.array_equal(getattr(back, name)(X), getattr(fitted, name)(X))
    assert back.factor_counts_ == fitted.factor_counts_
    assert back.n_samples_ == fitted.n_samples_


@pytest.mark.parametrize("method", METHODS.values(), ids=METHODS.keys())
def test_every_method_cuts_to_what_it_has_and_to_nothing_else(method, samples):
    fitted = method().fit(*samples)
    most = fitted.factor_counts_[-1]
    assert np.allclose(fitted.with_factors(most).predict(samples[0]), fitted.predict(samples[0]), rtol=1e-13)
    with pytest.raises(ParameterError, match="Choose a number among these"):
        fitted.with_factors(most + 1)


def test_who_averages_replicates():
    assert BandArea.averages_replicates
    assert not any(method.averages_replicates for method in (PLS, PCR, ClassicalLeastSquares))


def test_which_methods_are_classical():
    assert [method.classical for method in METHODS.values()] == [False, False, True, True]


@pytest.mark.parametrize("method", METHODS.values(), ids=METHODS.keys())
def test_methods_have_nothing_to_remark_by_themselves(method, samples):
    assert method().fit(*samples).remarks_each(samples[0][:3]) == ("", "", "")


@pytest.mark.parametrize("method", METHODS.values(), ids=METHODS.keys())
def test_a_parameter_younger_than_a_saved_model_has_its_default(method, samples):
    parameters, arrays = method().fit(*samples).state()
    youngest = method.parameter_names()[-1]
    parameters.pop(youngest)
    back = method.from_state(parameters, arrays)
    assert getattr(back, youngest) == getattr(method(), youngest)
    assert np.isfinite(back.predict(samples[0])).all()


def test_residual_degrees_of_freedom():
    assert PLS().residual_degrees_of_freedom(30, 4) == 25
    assert BandArea().residual_degrees_of_freedom(7, 1) == 5
    assert BandArea(through_origin=True).residual_degrees_of_freedom(7, 0) == 6


def test_companions_are_columns_of_y(samples):
    X, y = samples
    two = np.column_stack([y, y[::-1] ** 2])
    fitted = ClassicalLeastSquares(components=["water"]).fit(X, two)
    assert fitted.factor_counts_ == (1,)
    with pytest.raises(ParameterError, match="expected 2 columns: the reference values, then water"):
        ClassicalLeastSquares(components=["water"]).fit(X, y)
