"""Laws of band signals: a straight baseline, the direction of the axis and the unit must not matter."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from quant.regression.band_area import BandArea
from quant.spectra.bands import place_bands

laws = settings(max_examples=50, deadline=None, derandomize=True)

BANDS = [
    {"signal": "area", "range": [1690, 1730], "baseline": [1660, 1745]},
    {"signal": "height", "range": [1700, 1750], "baseline": [1700, 1750]},
    {"signal": "height_at", "position": 1713.3, "baseline": [1675, 1760]},
]


@st.composite
def spectra(draw):
    """Positive bands on an uneven falling axis from 1800 to about 1650."""
    rng = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))
    axis = np.sort(np.append(rng.uniform(1652, 1798, draw(st.integers(20, 60))), [1650, 1705, 1710, 1800]))[::-1]
    heights, centres = rng.uniform(0.2, 1, (5, 2)), rng.uniform(1700, 1720, (5, 2))
    return axis, sum(
        heights[:, [i]] * np.exp(-(((axis - centres[:, [i]]) / 12) ** 2)) + 0.02 for i in range(heights.shape[1])
    )


@laws
@given(spectra(), st.sampled_from(BANDS), st.floats(-5, 5), st.floats(-0.1, 0.1))
def test_a_straight_line_added_leaves_the_corrected_signal(data, band, offset, slope):
    axis, X = data
    placed = place_bands([band], None, axis, axis.size)
    line = offset + slope * (axis - 1700)
    assert np.allclose(placed.signals(X + line), placed.signals(X), rtol=1e-8, atol=1e-9)


@laws
@given(spectra(), st.sampled_from(BANDS), st.booleans())
def test_a_reversed_axis_has_the_same_signals(data, band, divided):
    axis, X = data
    reference = {"signal": "height", "range": [1650, 1800]} if divided else None
    falling = place_bands([band], reference, axis, axis.size)
    rising = place_bands([band], reference, axis[::-1], axis.size)
    assert np.array_equal(rising.signals(X[:, ::-1]), falling.signals(X))
    assert np.array_equal(rising.profiles(X[:, ::-1]), falling.profiles(X))


@laws
@given(spectra(), st.sampled_from(BANDS), st.sampled_from([1e-3, 3.0]))
def test_signals_are_proportional_to_the_spectrum(data, band, factor):
    axis, X = data
    placed = place_bands([band], None, axis, axis.size)
    assert np.allclose(placed.signals(factor * X), factor * placed.signals(X), rtol=1e-10)
    divided = place_bands([band], {"signal": "height", "range": [1650, 1800]}, axis, axis.size)
    assert np.allclose(divided.signals(factor * X), divided.signals(X), rtol=1e-10)


@laws
@given(spectra(), st.floats(0.1, 5), st.booleans())
def test_what_follows_beer_and_lambert_is_predicted_exactly(data, absorptivity, through_origin):
    axis, X = data
    axis = np.linspace(axis[0], axis[-1], axis.size)  # without cuts: a band across one is refused
    c = np.linspace(1, 4, 6)
    mixtures = absorptivity * c[:, None] * X[0] + (0 if through_origin else X[1])
    model = BandArea(BANDS[::2], through_origin=through_origin, axis=axis).fit(mixtures, c)
    assert model.predict(mixtures) == pytest.approx(c, rel=1e-9)
    assert np.allclose(model.residual_each(mixtures), 0, atol=1e-20 * np.sum(mixtures**2))
