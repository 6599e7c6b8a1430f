"""Multiplicative scatter correction."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, QuantityError
from quant.preprocessing.msc import MSC, msc

R = np.array([0.1, 0.2, 0.4, 0.3, 0.1])


def test_worked_example():
    # P. Geladi, D. MacDougall, H. Martens, Applied Spectroscopy 39 (1985) 491; this example computed
    np.testing.assert_allclose(msc([0.05 + 1.5 * R], R)[0], R, rtol=1e-14)


def test_agrees_with_least_squares_row_by_row():
    spectra = R + np.random.default_rng(3).normal(scale=0.05, size=(6, 5))
    for corrected, x in zip(msc(spectra, R), spectra, strict=True):
        slope, offset = np.polyfit(R, x, 1)
        np.testing.assert_allclose(corrected, (x - offset) / slope, rtol=1e-11)


def test_the_reference_is_the_weighted_mean():
    spectra = np.array([R, 3 * R, 2 * R + 0.1])
    step = MSC().fit(spectra, sample_weight=[0.5, 0.5, 0])
    np.testing.assert_allclose(step.reference_, 2 * R)
    np.testing.assert_allclose(step.transform([7 * R - 4]), [2 * R])
    np.testing.assert_allclose(MSC().fit(spectra).reference_, spectra.mean(axis=0))


def test_refuses_spectra_without_slope():
    orthogonal = np.array([1.0, 0.0, 0.0, 0.0, -1.0])  # r has the same value at both ends
    with pytest.raises(QuantityError, match=r"2 spectra have nothing in common .*row\(s\) 1, 2 "):
        msc([R, orthogonal, np.full(5, 0.1)], R)


def test_refuses_a_slope_that_is_only_noise():
    rng = np.random.default_rng(4)
    reference = rng.normal(size=500)
    stranger = rng.normal(size=500)
    slope, offset = np.polyfit(reference, stranger, 1)
    residual = stranger - slope * reference - offset
    for share, refused in [(1e-8, True), (1e-3, False)]:
        spectrum = residual + share * reference
        if refused:
            with pytest.raises(QuantityError, match="slope about 0"):
                msc([spectrum], reference)
        else:
            assert np.abs(msc([spectrum], reference)).max() > 100  # harmful perhaps, but defined


def test_refuses_a_flat_reference():
    with pytest.raises(QuantityError, match=r"reference spectrum .* is flat"):
        MSC().fit(np.array([R, 0.6 - R]))  # their mean is 0.3 everywhere


def test_refuses_single_points_and_other_lengths():
    with pytest.raises(NotEnoughDataError, match="at least two points"):
        MSC().fit([[1.0], [2.0]])
    with pytest.raises(ParameterError, match="reference spectrum has 5 points, the spectra 2"):
        msc([[1.0, 2.0]], R)
