"""Spectra, reference values and weights: what is taken, what is refused."""

import numpy as np
import pytest
from scipy.sparse import csr_array
from sklearn.exceptions import DataConversionWarning

from quant.errors import NotEnoughDataError, ParameterError
from quant.estimator.input import check_spectra, check_target, check_weights

SPECTRA = np.random.default_rng(8).normal(size=(9, 3))


@pytest.mark.parametrize(
    ("spectra", "error", "message"),
    [
        ([1.0, 2.0], ParameterError, "Expected 2D array, got 1D"),
        (np.ones((2, 2, 2)), ParameterError, "got 3D"),
        (np.empty((0, 3)), NotEnoughDataError, r"0 sample\(s\)"),
        (np.empty((3, 0)), NotEnoughDataError, r"0 feature\(s\)"),
        ([[1.0 + 2j]], ParameterError, "Complex data"),
        ([[{}]], TypeError, "must be a string or a number"),
        (csr_array(np.eye(3)), TypeError, "dense data is required"),
        ([[1, 2], [np.nan, np.nan], [3, np.inf]], ParameterError, r"NaN: 3 value\(s\) in 2 row\(s\), .* \[1, 2\]"),
        ([[1, np.inf]], ParameterError, r"infinity .* 1 value\(s\)"),
    ],
)
def test_refused_spectra(spectra, error, message):
    with pytest.raises(error, match=message):
        check_spectra(spectra)


def test_spectra_become_float64_without_a_copy_where_they_are():
    assert check_spectra([[1, 2]]).dtype == np.float64
    assert np.shares_memory(check_spectra(SPECTRA), SPECTRA)


def test_targets():
    np.testing.assert_array_equal(check_target([1, 2], 2), [1.0, 2.0])
    with pytest.warns(DataConversionWarning, match="column-vector"):
        assert check_target([[1], [2]], 2).shape == (2,)
    for bad, message in [
        (np.ones((2, 2)), "1d array"),
        ([1, 2, 3], r"inconsistent numbers of samples: \[2, 3\]"),
        ([1, np.nan], r"Input y contains NaN: 1 value\(s\) in 1 row\(s\), .* \[1\]"),
        ([1, 2j], "Complex"),
    ]:
        with pytest.raises(ParameterError, match=message):
            check_target(bad, 2)


def test_weights():
    np.testing.assert_array_equal(check_weights(None, 3), [1, 1, 1])
    np.testing.assert_array_equal(check_weights([0, 1, 2], 3), [0, 1, 2])
    for bad, message in [
        ([1, 1], r"shape == \(2,\), expected \(3,\)"),
        ([1, -1, 1], "from -1 to 1; expected finite numbers, none below zero"),
        ([1, np.nan, 1], "expected finite numbers"),
        ([0, 0, 0], "All weights in sample_weight are zero"),
    ]:
        with pytest.raises(ParameterError, match=message):
            check_weights(bad, 3)
