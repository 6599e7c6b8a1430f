"""Asymmetric least squares baseline.

P. H. C. Eilers, H. F. M. Boelens, report, Leiden University Medical Centre (2005), from memory: minimise
Σ wᵢ (yᵢ − zᵢ)² + λ Σ (Δ²z)², wᵢ = p where y > z, else 1 − p; a straight line is returned unchanged for every λ, and
p = 0.5 is ordinary smoothing.
"""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.preprocessing.asymmetric_baseline import AsymmetricBaseline, asymmetric_baseline

AXIS = np.arange(1800.0, 1600.0, -2.0)
BAND = np.exp(-(((AXIS - 1700) / 12) ** 2))


def dense(y, smoothness, asymmetry, iterations):
    """The same by full matrices."""
    bends = np.diff(np.eye(y.size), 2, axis=0)
    weights = np.ones(y.size)
    for _ in range(iterations):
        z = np.linalg.solve(np.diag(weights) + smoothness * bends.T @ bends, weights * y)
        weights = np.where(y > z, asymmetry, 1 - asymmetry)
    return z


def test_worked_example():
    # Three points, one bend d = (1, −2, 1): z = y − λ (d·y)/(1 + λ d·W⁻¹·d) W⁻¹·d. With y = (0, 1, 0), λ = 1 and the
    # weights 0.9, 0.1, 0.9 that p = 0.1 ends with: d·W⁻¹·d = 380/9, z = (20, 29, 20)/389.
    np.testing.assert_allclose(
        asymmetric_baseline([[0.0, 1.0, 0.0]], 1, 0.1)[0], np.array([20, 29, 20]) / 389, rtol=1e-13
    )
    # p = 0.5: all weights 0.5, d·W⁻¹·d = 12.
    np.testing.assert_allclose(asymmetric_baseline([[0.0, 1.0, 0.0]], 0.5, 0.5)[0], np.array([2, 3, 2]) / 7, rtol=1e-13)


@pytest.mark.parametrize(("smoothness", "asymmetry"), [(1e2, 0.01), (1e5, 0.001), (30, 0.5), (1e4, 0.1)])
@pytest.mark.parametrize("points", [4, 5, 60])
def test_agrees_with_full_matrices(smoothness, asymmetry, points):
    y = np.random.default_rng(points).normal(size=points) + 3 * BAND[30 : 30 + points]
    ours = asymmetric_baseline([y], smoothness, asymmetry, 10)[0]
    np.testing.assert_allclose(ours, dense(y, smoothness, asymmetry, 10), rtol=1e-6, atol=1e-7)


def test_half_is_plain_smoothing():
    y = np.random.default_rng(1).normal(size=40)
    bends = np.diff(np.eye(40), 2, axis=0)
    expected = np.linalg.solve(np.eye(40) + 200 * bends.T @ bends, y)
    np.testing.assert_allclose(asymmetric_baseline([y], 100, 0.5)[0], expected, rtol=1e-10, atol=1e-12)


@pytest.mark.parametrize("smoothness", [1e-3, 1.0, 1e3, 1e6, 1e9, 1e12])
def test_a_straight_line_is_returned_unchanged_however_smooth(smoothness):
    line = 0.3 - 0.0004 * AXIS
    np.testing.assert_allclose(asymmetric_baseline([line], smoothness, axis=AXIS)[0], line, rtol=1e-14)


def test_a_band_hardly_lifts_its_baseline_where_asymmetry_is_small():
    line = 0.2 + 1e-3 * (AXIS - 1600)
    under, through = (asymmetric_baseline([line + BAND], 1e5, p, axis=AXIS)[0] for p in (0.001, 0.5))
    assert np.abs(under - line).max() < 0.02
    assert np.abs(through - line).max() > 0.1
    step = AsymmetricBaseline(1e5, 0.001, axis=AXIS)
    np.testing.assert_allclose(step.fit_transform([line + BAND])[0], line + BAND - under, atol=1e-14)


def test_digits_kept_where_the_matrix_is_nearly_singular():
    """Mirrored points take another way through the elimination; what differs is rounding."""
    y = np.cumsum(np.random.default_rng(5).normal(size=2000))
    there = asymmetric_baseline([y], 1e9, 0.001)[0]
    back = asymmetric_baseline([y[::-1]], 1e9, 0.001)[0][::-1]
    np.testing.assert_allclose(back, there, atol=1e-8 * np.ptp(y))


def test_spectra_are_independent_and_segments_are_apart():
    axis = np.concatenate([AXIS[:40], AXIS[60:]])
    spectra = np.random.default_rng(6).random((3, axis.size))
    together = asymmetric_baseline(spectra, 100, axis=axis)
    for row, parts in zip(together, spectra, strict=True):
        np.testing.assert_allclose(row[:40], asymmetric_baseline(parts[None, :40], 100)[0], rtol=1e-12)
        np.testing.assert_allclose(row[40:], asymmetric_baseline(parts[None, 40:], 100)[0], rtol=1e-12)


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"smoothness": 0.0}, "smoothness = 0; expected a number above 0"),
        ({"smoothness": np.inf}, "smoothness = inf"),
        ({"asymmetry": 1.0}, "asymmetry = 1; expected a number between 0 and 1"),
        ({"iterations": 0}, "iterations = 0; expected a whole number from 1"),
        ({"iterations": 2.5}, r"iterations = 2\.5"),
        ({"axis": [1.0, 2.0, 3.2, 4.0]}, "not equally spaced"),
    ],
)
def test_numbers_that_are_refused(options, message):
    with pytest.raises(ParameterError, match=message):
        AsymmetricBaseline(**options).fit([[1.0, 2.0, 3.0, 5.0]])


def test_short_segments_are_refused():
    with pytest.raises(NotEnoughDataError, match=r"at least three points .* segment\(s\) 10 to 11 \(2 points\)"):
        AsymmetricBaseline().axis_after(np.array([1.0, 2, 3, 4, 10, 11]))
