"""Removal of a polynomial trend."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.preprocessing.detrend import Detrend, detrend


def test_worked_example():
    # Mean 1, slope 1/2 per point (Σ t·x / Σ t² = 5/10 with t = −2 ... 2): the line is 0, 0.5, 1, 1.5, 2.
    np.testing.assert_allclose(detrend([[0.0, 1.0, 0.0, 2.0, 2.0]], polynomial=1)[0], [0, 0.5, -1, 0.5, 0], atol=1e-15)
    np.testing.assert_allclose(detrend([[0.0, 1.0, 0.0, 2.0, 2.0]], polynomial=0)[0], [-1, 0, -1, 1, 1], atol=1e-15)


def test_a_parabola_leaves_zeros():
    # R. J. Barnes, M. S. Dhanoa, S. J. Lister, Applied Spectroscopy 43 (1989) 772: second degree (from memory)
    axis = np.array([1100.0, 1102, 1104, 1106, 1400, 1402, 1404.5])
    parabola = 3 - 0.02 * axis + 1e-5 * axis**2
    np.testing.assert_allclose(Detrend(axis=axis).fit_transform([parabola]), 0, atol=1e-11)
    assert np.abs(Detrend(1, axis).fit_transform([parabola])).max() > 0.005


def test_the_polynomial_follows_the_axis_not_the_point_number():
    axis = np.array([0.0, 1, 2, 10, 11, 12])
    np.testing.assert_allclose(detrend([2 * axis - 5], axis, 1), 0, atol=1e-13)
    assert np.abs(detrend([2 * axis - 5], None, 1)).max() > 1


def test_agrees_with_polyfit():
    axis = np.linspace(4000, 600, 90)
    spectra = np.random.default_rng(2).random((3, 90))
    for ours, x in zip(detrend(spectra, axis, 4), spectra, strict=True):
        fitted = np.polynomial.Polynomial.fit(axis, x, 4)
        np.testing.assert_allclose(ours, x - fitted(axis), atol=1e-12)


@pytest.mark.parametrize("polynomial", [-1, 1.5, "2"])
def test_refuses_degrees_that_are_none(polynomial):
    with pytest.raises(ParameterError, match=r"polynomial = .*; expected the degree of a polynomial"):
        Detrend(polynomial).fit(np.ones((2, 9)))


def test_refuses_as_many_points_as_coefficients():
    with pytest.raises(NotEnoughDataError, match=r"degree 2 fits any 3 points.* n_features = 3"):
        Detrend(2).fit([[1.0, 2.0, 4.0]])
    with pytest.raises(NotEnoughDataError, match="n_features = 2"):
        Detrend(2).axis_after(np.array([1.0, 2.0]))
