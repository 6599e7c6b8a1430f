"""Maps of spectra as plain arrays."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.preprocessing.spectral_map import SpectralMap, banded_map, identity_map, low_rank_map


def test_by_hand():
    made = banded_map(
        np.array([[0, 1], [1, 2], [2, 2]]), np.array([[0.5, 0.5], [1.0, 1.0], [2.0, 0.0]]), np.arange(3.0)
    )
    np.testing.assert_allclose(made.transform([[1.0, 2.0, 4.0]]), [[1.5, 7.0, 10.0]])
    left, right = np.array([[1.0], [0.0], [0.0]]), np.array([[0.0, 1.0, 0.0]])
    np.testing.assert_allclose(low_rank_map(left, right, np.zeros(3)).transform([[3.0, 2.0, 4.0]]), [[3.0, 5.0, 4.0]])


def test_fitted_to_nothing_it_changes_nothing():
    spectra = np.random.default_rng(1).normal(0, 1, (4, 7))
    np.testing.assert_array_equal(SpectralMap().fit(spectra).transform(spectra), spectra)
    np.testing.assert_array_equal(identity_map(7).transform(spectra), spectra)


def test_it_comes_back_from_its_state():
    rng = np.random.default_rng(2)
    made = low_rank_map(rng.normal(0, 1, (6, 2)), rng.normal(0, 1, (2, 6)), rng.normal(0, 1, 6))
    spectra = rng.normal(0, 1, (3, 6))
    np.testing.assert_array_equal(SpectralMap.from_state(*made.state()).transform(spectra), made.transform(spectra))


def test_arrays_that_do_not_fit_are_refused():
    with pytest.raises(ParameterError, match="points that are there"):
        banded_map(np.array([[3]]), np.array([[1.0]]), np.zeros(1))
    with pytest.raises(ParameterError, match="directions"):
        low_rank_map(np.zeros((3, 1)), np.zeros((1, 4)), np.zeros(3))
