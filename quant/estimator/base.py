"""The scikit-learn contract, kept without importing scikit-learn.

Everyday prediction imports NumPy, click and the standard library only. Steps and regressions therefore obey the
contract of scikit-learn's estimators (and pass its checks) by way of this small base; the library itself is imported
only by those of its own functions that ask for tags, and when an unfitted estimator has to raise its error.
Not supported: `set_output` and metadata routing.
"""

import inspect
from functools import cache
from typing import Any, ClassVar, Self, TypeVar

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import AnyArray, FloatArray
from quant.errors import ParameterError
from quant.estimator.input import check_spectra, check_target, check_weights, column_names, names_differ

EstimatorType = TypeVar("EstimatorType", bound="Estimator")


class Estimator:
    """Parameters by introspection, input checks in scikit-learn's wording, the common tags."""

    n_features_in_: int
    estimator_type: ClassVar[str | None] = None
    needs_y: ClassVar[bool] = False
    positive_only: ClassVar[bool] = False
    allow_nan: ClassVar[bool] = False  # missing points may come in, because the step can leave them out
    fitted: ClassVar[tuple[str, ...]] = ()  # names of what `fit` learns and a saved model has to keep

    @classmethod
    def parameter_names(cls) -> list[str]:
        """Names of the constructor's parameters, sorted."""
        return list(_parameter_names(cls))  # type: ignore[arg-type]  # mypy asks for the hash of an instance

    def get_params(self, deep: bool = True) -> dict[str, Any]:  # noqa: ARG002, FBT001 (the contract's signature)
        """Return the constructor's parameters as they were given."""
        return {name: getattr(self, name) for name in self.parameter_names()}

    def set_params(self, **params: Any) -> Self:
        """Set parameters by name.

        Raises
        ------
        ParameterError
            A name that the constructor does not have.
        """
        allowed = self.parameter_names()
        for name in params:
            if name not in allowed:
                raise ParameterError(
                    f"Invalid parameter {name!r} for estimator {self!r}. Valid parameters are: {allowed!r}."
                )
        for name, value in params.items():
            setattr(self, name, value)
        return self

    def state(self) -> tuple[dict[str, Any], dict[str, AnyArray]]:
        """Return all that is needed to come back: plain values, and arrays, by name."""
        self.check_fitted()
        names = (*self.parameter_names(), "n_features_in_", *self.fitted)
        values = {name: getattr(self, name) for name in names}
        arrays = {name: value for name, value in values.items() if isinstance(value, np.ndarray)}
        return {name: _plain(value) for name, value in values.items() if name not in arrays}, arrays

    @classmethod
    def from_state(cls, parameters: dict[str, Any], arrays: dict[str, AnyArray]) -> Self:
        """Return the fitted estimator that `state` described."""
        values = {**parameters, **arrays}
        # A parameter that came after the model was made has its default.
        estimator = cls(**{name: values.pop(name) for name in cls.parameter_names() if name in values})
        for name, value in values.items():
            setattr(estimator, name, value)
        return estimator

    def __repr__(self) -> str:
        """Show the parameters that differ from their defaults."""
        changed = [
            f"{name}={_brief(getattr(self, name))}"
            for name, parameter in inspect.signature(type(self)).parameters.items()
            if not _same(getattr(self, name), parameter.default)
        ]
        return f"{type(self).__name__}({', '.join(changed)})"

    def __sklearn_tags__(self) -> Any:
        """Describe the estimator to scikit-learn."""
        from sklearn.utils import InputTags, RegressorTags, Tags, TargetTags, TransformerTags  # deferred: start-up

        return Tags(
            estimator_type=self.estimator_type,
            target_tags=TargetTags(required=self.needs_y),
            transformer_tags=TransformerTags() if hasattr(self, "transform") else None,
            regressor_tags=RegressorTags() if self.estimator_type == "regressor" else None,
            input_tags=InputTags(positive_only=self.positive_only, allow_nan=self.allow_nan),
        )

    def check_fit(self, X: ArrayLike) -> FloatArray:
        """Check training spectra, note their width (and names of columns), return them as float64 of shape (n, k)."""
        names = column_names(X)
        matrix = check_spectra(X, allow_nan=self.allow_nan)
        self.n_features_in_ = matrix.shape[1]
        if names is not None:
            self.feature_names_in_ = names
        elif hasattr(self, "feature_names_in_"):
            del self.feature_names_in_
        return matrix

    def check_fitted(self) -> None:
        """Refuse to go on when `fit` has not been called.

        Raises
        ------
        NotFittedError
            Scikit-learn's own.
        """
        if not hasattr(self, "n_features_in_"):
            from sklearn.exceptions import NotFittedError  # deferred: start-up

            raise NotFittedError(
                f"This {type(self).__name__} instance is not fitted yet. Call 'fit' with appropriate arguments first."
            )

    def check_new(self, X: ArrayLike) -> FloatArray:
        """Check spectra that come after fitting, and return them as float64 of shape (n, k).

        Raises
        ------
        ParameterError
            Another width, or other names of columns, than in training.
        """
        self.check_fitted()
        names = column_names(X)
        known = getattr(self, "feature_names_in_", None)
        if names is not None and known is not None and not np.array_equal(names, known):
            raise ParameterError(names_differ(names, known))
        matrix = check_spectra(X, allow_nan=self.allow_nan)
        if matrix.shape[1] != self.n_features_in_:
            raise ParameterError(
                f"X has {matrix.shape[1]} features, but {type(self).__name__} is expecting "
                f"{self.n_features_in_} features as input."
            )
        return matrix


class Step(Estimator):
    """A preprocessing step: `fit` learns, `transform` applies.

    `axis` (where a step has that parameter) holds the axis values of its input; `axis_after` gives those of its output.
    A step that learns from other spectra has `learns = True`, and its `fit` takes `sample_weight`. One that turns a sum
    of spectra into the sum of its results has `linear = True`: differences and pure spectra may go through it, too.
    `required` names parameters that a recipe has to give, since the step does nothing without them.
    """

    name: ClassVar[str]
    learns: ClassVar[bool] = False
    linear: ClassVar[bool] = False
    required: ClassVar[tuple[str, ...]] = ()

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Note the width of the spectra; steps that learn more override this."""
        self.check_fit(X)
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Apply the step to spectra of shape (n, k)."""
        raise NotImplementedError

    def fit_transform(self, X: ArrayLike, y: ArrayLike | None = None, **fit_params: Any) -> FloatArray:
        """Fit, then transform the same spectra."""
        return self.fit(X, y, **fit_params).transform(X)

    def axis_after(self, axis: FloatArray) -> FloatArray:
        """Axis values of the output, given those of the input, both of shape (points,). [axis unit]"""
        return axis


class Regressor(Estimator):
    """A regression of one reference value on spectra."""

    estimator_type = "regressor"
    needs_y = True

    def predict(self, X: ArrayLike) -> FloatArray:
        """Predict, shape (n,)."""
        raise NotImplementedError

    def score(self, X: ArrayLike, y: ArrayLike, sample_weight: ArrayLike | None = None) -> float:
        """Return 1 − SSE/SST of `predict(X)` about the (weighted) mean of y; NaN if y is constant."""
        predicted = self.predict(X)
        values = check_target(y, predicted.size)
        weight = check_weights(sample_weight, predicted.size)
        total = weight @ (values - np.average(values, weights=weight)) ** 2
        return 1.0 - float(weight @ (values - predicted) ** 2 / total) if total > 0 else float("nan")

    def check_fit_pair(self, X: ArrayLike, y: ArrayLike | None) -> tuple[FloatArray, FloatArray]:
        """Check training spectra and their reference values, shapes (n, k) and (n,).

        Raises
        ------
        ParameterError
            There are no reference values.
        """
        if y is None:
            raise ParameterError(
                f"This {type(self).__name__} estimator requires y to be passed, but the target y is None."
            )
        matrix = self.check_fit(X)
        return matrix, check_target(y, matrix.shape[0])


@cache  # a signature takes as long to read as a small step takes to work
def _parameter_names(estimator: type[Estimator]) -> tuple[str, ...]:
    return tuple(sorted(inspect.signature(estimator).parameters))


def unfitted_copy(estimator: EstimatorType) -> EstimatorType:
    """Return a new estimator with the same parameters and nothing learnt."""
    return type(estimator)(**estimator.get_params())


def _plain(value: object) -> object:
    """Turn NumPy's scalars, as a grid of parameters may hold them, into Python's, so that they can go into JSON."""
    return value.item() if isinstance(value, np.generic) else value


def _brief(value: object) -> str:
    if isinstance(value, np.ndarray) and value.ndim == 1 and value.size > 6:
        return f"<{value.size} values from {value[0]:g} to {value[-1]:g}>"
    if isinstance(value, np.ndarray) and value.ndim == 2:
        return f"<{value.shape[0]} rows of {value.shape[1]} values>"
    return repr(value)


def _same(value: object, default: object) -> bool:
    if value is default:
        return True
    try:
        return bool(value == default)
    except ValueError:  # arrays have no single truth
        return False
