"""The base that keeps scikit-learn's contract without its import."""

import json
import subprocess
import sys
import warnings

import numpy as np
import pandas as pd
import pytest
from sklearn.base import clone, is_regressor
from sklearn.exceptions import NotFittedError
from sklearn.metrics import r2_score
from sklearn.utils.estimator_checks import check_estimator

from quant.errors import ParameterError
from quant.estimator.base import Regressor, Step, unfitted_copy
from quant.estimator.input import check_weights


class Shift(Step):
    """Adds a constant: the least a step can do."""

    name = "shift"
    fitted = ("least_",)

    def __init__(self, by=1.0, axis=None):
        self.by = by
        self.axis = axis

    def fit(self, X, y=None):
        self.least_ = self.check_fit(X).min(axis=0)
        return self

    def transform(self, X):
        return self.check_new(X) + self.by


class Line(Regressor):
    """Least squares with an intercept: the least a regression can do."""

    fitted = ("mean_x_", "mean_y_", "coefficients_")

    def fit(self, X, y=None, sample_weight=None):
        matrix, target = self.check_fit_pair(X, y)
        weight = check_weights(sample_weight, target.size)
        self.mean_x_, self.mean_y_ = np.average(matrix, axis=0, weights=weight), np.average(target, weights=weight)
        root = np.sqrt(weight)
        self.coefficients_ = np.linalg.lstsq((matrix - self.mean_x_) * root[:, None], (target - self.mean_y_) * root)[0]
        return self

    def predict(self, X):
        matrix = self.check_new(X)
        return self.mean_y_ + (matrix - self.mean_x_) @ self.coefficients_


SPECTRA = np.random.default_rng(8).normal(size=(9, 3))


@pytest.mark.parametrize("estimator", [Shift(), Line()], ids=repr)
def test_scikit_learn_checks(estimator):
    results = check_estimator(estimator, on_skip=None, on_fail=None)
    troubles = {r["check_name"]: r["exception"] for r in results if r["status"] not in {"passed", "skipped"}}
    assert troubles == {}
    assert {r["check_name"] for r in results if r["status"] == "skipped"} <= {"check_array_api_input"}


def test_parameters():
    step = Shift(by=2.0)
    assert step.get_params() == {"by": 2.0, "axis": None}
    assert step.set_params(by=3.0) is step
    assert step.by == 3.0
    with pytest.raises(ParameterError, match=r"Invalid parameter 'bye' .* Valid parameters are: \['axis', 'by'\]"):
        step.set_params(by=4.0, bye=5.0)
    assert step.by == 3.0  # nothing was set


def test_repr_shows_what_differs_from_the_defaults_and_abbreviates_an_axis():
    assert repr(Shift()) == "Shift()"
    assert repr(Shift(by=2)) == "Shift(by=2)"
    assert repr(Shift(axis=np.arange(4000.0, 650.0, -2.0))) == "Shift(axis=<1675 values from 4000 to 652>)"


def test_state_is_plain_values_and_arrays():
    step = Shift(by=np.float64(0.5), axis=np.arange(3.0)).fit(SPECTRA)
    parameters, arrays = step.state()
    assert json.loads(json.dumps(parameters)) == {"by": 0.5, "n_features_in_": 3}
    assert arrays.keys() == {"axis", "least_"}
    back = Shift.from_state(parameters, arrays)
    np.testing.assert_array_equal(back.transform(SPECTRA), step.transform(SPECTRA))
    with pytest.raises(NotFittedError, match="not fitted yet"):
        Shift().state()


def test_copies_forget_what_was_learnt():
    step = Shift(by=7).fit(SPECTRA)
    for copy in (unfitted_copy(step), clone(step)):
        assert copy.by == 7
        assert not hasattr(copy, "least_")


def test_names_of_columns_are_held_to():
    frame = pd.DataFrame(SPECTRA, columns=["a", "b", "c"])
    step = Shift().fit(frame)
    assert step.feature_names_in_.tolist() == ["a", "b", "c"]
    with pytest.raises(ParameterError, match="same order"):
        step.transform(frame[["b", "a", "c"]])
    with pytest.raises(ParameterError, match=r"unseen at fit time:\n- d\n.*\n- c\n"):
        step.transform(frame.rename(columns={"c": "d"}))
    assert not hasattr(step.fit(SPECTRA), "feature_names_in_")


def test_new_spectra_need_the_width_of_the_old():
    with pytest.raises(ParameterError, match="X has 2 features, but Shift is expecting 3 features"):
        Shift().fit(SPECTRA).transform(SPECTRA[:, :2])
    with pytest.raises(NotFittedError, match="Shift instance is not fitted"):
        Shift().transform(SPECTRA)


def test_score_is_the_coefficient_of_determination():
    target = SPECTRA @ [1.0, -2.0, 0.5] + np.random.default_rng(9).normal(size=9)
    weight = np.random.default_rng(10).random(9)
    model = Line().fit(SPECTRA, target)
    assert is_regressor(model)
    predicted = model.predict(SPECTRA)
    assert model.score(SPECTRA, target) == pytest.approx(r2_score(target, predicted))
    assert model.score(SPECTRA, target, weight) == pytest.approx(r2_score(target, predicted, sample_weight=weight))
    assert np.isnan(model.score(SPECTRA[:1], target[:1]))


def test_a_regression_needs_reference_values():
    with pytest.raises(ParameterError, match="requires y to be passed"):
        Line().fit(SPECTRA)


def test_the_base_and_the_steps_load_neither_scikit_learn_nor_scipy_nor_pandas():
    program = (
        "import sys, numpy as np\n"
        "from quant.preprocessing.registry import STEPS\n"
        "from quant.preprocessing.chain import apply_chain, fit_chain\n"
        "X = np.random.default_rng(1).random((5, 30)) + 0.2\n"
        # One leaves zeros, one finds no area behind snv, one needs spectra of its own.
        "alone = {'straight_baseline', 'normalise_band', 'orthogonal_removal'}\n"
        "steps = [step() for name, step in STEPS.items() if name not in alone]\n"
        "fitted, _ = fit_chain(steps, X)\n"
        "back = [type(step).from_state(*step.state()) for step in fitted]\n"
        "assert np.array_equal(apply_chain(back, X), apply_chain(fitted, X))\n"
        "print(sorted({'sklearn', 'scipy', 'pandas', 'joblib'} & set(sys.modules)))\n"
    )
    run = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=False)
    assert (run.stdout.strip(), run.stderr) == ("[]", "")


def test_nothing_is_warned_of_in_everyday_use():
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        Shift().fit_transform(SPECTRA)
