"""Checks of arguments, worded once."""

from collections.abc import Iterable, Sequence

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError


def name_some(names: Iterable[object], most: int = 5) -> str:
    """Name at most `most` of the culprits and count the rest.

    >>> name_some(["A", "B", "C"], most=2)
    'A, B and 1 more'
    """
    listed = [str(name) for name in names]
    if len(listed) <= most:
        return ", ".join(listed)
    return f"{', '.join(listed[:most])} and {len(listed) - most} more"


def as_vector(name: str, values: ArrayLike) -> FloatArray:
    """Return finite numbers of shape (n,), or say what is wrong with `name`.

    Raises
    ------
    ParameterError
        Not one-dimensional, or not all finite.
    """
    vector = np.asarray(values, dtype=np.float64)
    if vector.ndim != 1:
        raise ParameterError(f"{name} has shape {vector.shape}; expected one row of numbers, shape (n,).")
    bad = np.flatnonzero(~np.isfinite(vector))
    if bad.size:
        raise ParameterError(
            f"{name} holds {bad.size} value(s) that are not finite numbers, at position(s) {name_some(bad)}; "
            "leave them out or supply them."
        )
    return vector


def as_matrix(name: str, values: ArrayLike) -> FloatArray:
    """Return finite numbers of shape (n, k), or say what is wrong with `name`.

    Raises
    ------
    ParameterError
        Not two-dimensional, or not all finite.
    """
    matrix = np.asarray(values, dtype=np.float64)
    if matrix.ndim != 2:
        raise ParameterError(f"{name} has shape {matrix.shape}; expected a table of numbers, shape (n, k).")
    if np.isfinite(np.vdot(matrix, matrix)):  # faster; of huge numbers this overflows, and each is looked at
        return matrix
    bad = np.flatnonzero(~np.isfinite(matrix).all(axis=1))
    if bad.size:
        raise ParameterError(f"{name} holds numbers that are not finite, in row(s) {name_some(bad)} (counted from 0).")
    return matrix


def paired_vectors(
    name_a: str, a: ArrayLike, name_b: str, b: ArrayLike, least: int = 1
) -> tuple[FloatArray, FloatArray]:
    """Return two vectors of one length, at least `least` long.

    Raises
    ------
    SampleMismatchError
        The lengths differ.
    NotEnoughDataError
        Fewer than `least` pairs.
    """
    first, second = as_vector(name_a, a), as_vector(name_b, b)
    if first.size != second.size:
        raise SampleMismatchError(
            f"{first.size} values of {name_a} but {second.size} of {name_b}; one each is expected."
        )
    if first.size < least:
        raise NotEnoughDataError(f"{first.size} pair(s) of {name_a} and {name_b}; at least {least} are needed.")
    return first, second


def one_of(name: str, value: str, allowed: Sequence[str]) -> str:
    """Return `value` if it is among `allowed`.

    Raises
    ------
    ParameterError
        It is not; the message lists what is.
    """
    if value not in allowed:
        raise ParameterError(f"{name} = {value!r}; expected one of {', '.join(map(repr, allowed))}.")
    return value
