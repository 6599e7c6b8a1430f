"""What estimators take: spectra, reference values and weights, refused as scikit-learn's checks expect it."""

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import AnyArray, FloatArray
from quant.errors import NotEnoughDataError, ParameterError


def check_spectra(X: ArrayLike, *, allow_nan: bool = False) -> FloatArray:
    """Return spectra as float64 of shape (n, k), refusing what scikit-learn's `check_array` refuses, in its words.

    With `allow_nan`, missing points (NaN) pass; infinite ones never do.

    Raises
    ------
    NotEnoughDataError
        No spectrum, or no point.
    ParameterError
        Not two-dimensional, complex, or not all finite.
    TypeError
        Sparse, or holding what is no number.
    """
    if hasattr(X, "toarray"):
        raise TypeError("Sparse data was passed for X, but dense data is required. Use '.toarray()' to convert it.")
    matrix: AnyArray = np.asarray(X)
    if np.iscomplexobj(matrix):
        raise ParameterError(f"Complex data not supported\n{matrix}\n")
    if matrix.ndim != 2:
        raise ParameterError(
            f"Expected 2D array, got {matrix.ndim}D array instead (shape {matrix.shape}). Reshape your data either "
            "using array.reshape(-1, 1) if it has one point a spectrum, or array.reshape(1, -1) if it is one spectrum."
        )
    try:
        result = matrix.astype(np.float64, copy=False)
    except TypeError as problem:  # an object that is no number: scikit-learn's checks expect a TypeError
        raise TypeError(f"{problem}; the argument must be a string or a number") from problem
    for size, what in zip(result.shape, ("sample", "feature"), strict=True):
        if size < 1:
            raise NotEnoughDataError(
                f"Found array with 0 {what}(s) (shape={result.shape}) while a minimum of 1 is required."
            )
    _refuse_infinite("X", result, allow_nan=allow_nan)
    return result


def check_target(y: ArrayLike, n_samples: int) -> FloatArray:
    """Return reference values as float64 of shape (n_samples,).

    Raises
    ------
    ParameterError
        Another shape or number of values, complex, or not all finite.
    """
    values: AnyArray = np.asarray(y)
    if np.iscomplexobj(values):
        raise ParameterError(f"Complex data not supported\n{values}\n")
    if values.ndim == 2 and values.shape[1] == 1:
        import warnings

        from sklearn.exceptions import DataConversionWarning  # deferred: start-up

        warnings.warn(
            "A column-vector y was passed when a 1d array was expected. Please change the shape of y to (n_samples,).",
            DataConversionWarning,
            stacklevel=3,
        )
        values = values.ravel()
    if values.ndim != 1:
        raise ParameterError(f"y should be a 1d array, got an array of shape {values.shape} instead.")
    result = values.astype(np.float64)
    if result.size != n_samples:
        raise ParameterError(f"Found input variables with inconsistent numbers of samples: {[n_samples, result.size]}")
    _refuse_infinite("y", result)
    return result


def check_weights(sample_weight: ArrayLike | None, n_samples: int) -> FloatArray:
    """Return non-negative weights of shape (n_samples,), all one by default.

    Raises
    ------
    ParameterError
        Another shape, a negative or non-finite weight, or none above zero.
    """
    if sample_weight is None:
        return np.ones(n_samples)
    weight = np.asarray(sample_weight, dtype=np.float64)
    if weight.shape != (n_samples,):
        raise ParameterError(f"sample_weight.shape == {weight.shape}, expected {(n_samples,)}!")
    if not np.isfinite(weight).all() or (weight < 0).any():
        raise ParameterError(
            f"sample_weight runs from {weight.min():g} to {weight.max():g}; expected finite numbers, none below zero."
        )
    if not (weight > 0).any():
        raise ParameterError("All weights in sample_weight are zero; at least one has to be above zero.")
    return weight


def column_names(X: ArrayLike) -> AnyArray | None:
    """Return the column names of a data frame, if all are texts; else None."""
    columns = getattr(X, "columns", None)
    if columns is None:
        return None
    names = np.asarray(columns, dtype=object)
    return names if names.size and all(isinstance(name, str) for name in names) else None


def names_differ(names: AnyArray, known: AnyArray) -> str:
    """Say how column names differ from those known from fitting, in the words of scikit-learn."""
    unseen, missing = sorted(set(names) - set(known)), sorted(set(known) - set(names))
    text = "The feature names should match those that were passed during fit.\n"
    if unseen:
        text += "Feature names unseen at fit time:\n" + "".join(f"- {name}\n" for name in unseen[:5])
    if missing:
        text += "Feature names seen at fit time, yet now missing:\n" + "".join(f"- {name}\n" for name in missing[:5])
    if not unseen and not missing:
        text += "Feature names must be in the same order as they were in fit.\n"
    return text


def _refuse_infinite(name: str, values: FloatArray, *, allow_nan: bool = False) -> None:
    if np.isfinite(np.vdot(values, values)):  # faster; of huge numbers this overflows, and each is looked at
        return
    bad = np.isinf(values) if allow_nan else ~np.isfinite(values)
    if not bad.any():
        return
    kind = "NaN" if np.isnan(values[bad]).any() else "infinity or a value too large for dtype('float64')"
    rows = np.flatnonzero(bad.reshape(values.shape[0], -1).any(axis=1))
    raise ParameterError(
        f"Input {name} contains {kind}: {np.count_nonzero(bad)} value(s) in {rows.size} row(s), the first of them "
        f"{rows[:5].tolist()} (counted from 0). Leave the points or spectra concerned out first."
    )
