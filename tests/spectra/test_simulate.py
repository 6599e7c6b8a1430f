"""Bands, pure components and Beer-Lambert mixtures."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from quant.errors import ParameterError
from quant.spectra import simulate_substances
from quant.spectra.simulate import (
    GAUSSIAN_AREA,
    LORENTZIAN_AREA,
    Band,
    PureComponent,
    band_profile,
    mixture_spectra,
    pure_spectra,
)

ESTER = PureComponent("ester", [(1741, 20, 0.9, "mixed"), (1241, 24, 1.0, "gaussian")])
WATER = PureComponent("water", [(3400, 300, 1.0, "gaussian"), (1640, 80, 0.3, "lorentzian")])


@pytest.mark.parametrize("shape", ["gaussian", "lorentzian", "mixed"])
def test_a_band_is_as_high_and_as_wide_as_stated(shape: str) -> None:
    band = Band(1700.0, 12.0, 0.8, shape)
    profile = band_profile(np.array([1694.0, 1700.0, 1706.0]), band)
    np.testing.assert_allclose(profile, [0.4, 0.8, 0.4], rtol=1e-14)


def test_one_width_from_the_middle_by_hand() -> None:
    # (ν − ν0) / (w/2) = 2: Gaussian 2^(−4), Lorentzian 1/(1 + 4), mixed their mean.
    heights = [
        float(band_profile(np.array([1712.0]), Band(1700, 12, 1, shape))[0])
        for shape in ("gaussian", "lorentzian", "mixed")
    ]
    assert heights == pytest.approx([1 / 16, 1 / 5, (1 / 16 + 1 / 5) / 2])


def test_area_of_a_gaussian_band() -> None:
    # H·FWHM·1.064467 (computed: published-values, section 5.1)
    assert pytest.approx(1.064467, abs=5e-7) == GAUSSIAN_AREA
    axis = np.arange(1500.0, 1900.0, 0.5)
    assert np.trapezoid(band_profile(axis, Band(1700, 12, 0.8, "gaussian")), axis) == pytest.approx(
        0.8 * 12 * 1.064467, rel=1e-6
    )


def test_area_of_a_lorentzian_band() -> None:
    # H·FWHM·1.570796 (computed: published-values, section 5.1); within ±L it is H·w·arctan(2L/w).
    assert pytest.approx(1.570796, abs=5e-7) == LORENTZIAN_AREA
    axis = np.arange(1000.0, 2400.1, 0.5)
    area = np.trapezoid(band_profile(axis, Band(1700, 12, 0.8, "lorentzian")), axis)
    assert area == pytest.approx(0.8 * 12 * np.arctan(2 * 700 / 12), rel=1e-5)
    assert area < 0.8 * 12 * LORENTZIAN_AREA


@given(
    st.lists(st.floats(-50, 50), min_size=2, max_size=2),
    st.lists(st.floats(-50, 50), min_size=2, max_size=2),
    st.floats(-3, 3),
)
def test_mixtures_are_linear_in_the_concentrations(first: list[float], second: list[float], factor: float) -> None:
    axis = np.arange(4000.0, 649.0, -10.0)

    def mixture(amounts: np.ndarray) -> np.ndarray:
        return mixture_spectra([ESTER, WATER], amounts[None], axis)[0]

    a, b = np.array(first), np.array(second)
    np.testing.assert_allclose(mixture(a + factor * b), mixture(a) + factor * mixture(b), atol=1e-10)


def test_one_unit_of_one_component_is_its_pure_spectrum() -> None:
    axis = np.arange(4000.0, 649.0, -2.0)
    np.testing.assert_array_equal(mixture_spectra([ESTER, WATER], np.eye(2), axis), pure_spectra([ESTER, WATER], axis))


def test_a_reversed_axis_gives_the_reversed_spectrum() -> None:
    axis = np.arange(4000.0, 649.0, -2.0)
    np.testing.assert_array_equal(ESTER.spectrum(axis[::-1]), ESTER.spectrum(axis)[::-1])


def test_scaled_and_broadened() -> None:
    axis = np.arange(4000.0, 649.0, -1.0)
    np.testing.assert_allclose(ESTER.scaled(0.01).spectrum(axis), 0.01 * ESTER.spectrum(axis), rtol=1e-12)
    wide = PureComponent("one", [(1700, 12, 0.8, "gaussian")]).broadened(2.0, shift=3.0)
    assert wide.bands == (Band(1703, 24, 0.4, "gaussian"),)
    assert wide.name == "one"


@pytest.mark.parametrize(
    ("band", "words"),
    [
        ((1700, 0, 1, "mixed"), r"Bands of K at 1700 .* width above 0"),
        ((1700, 12, np.nan, "mixed"), "finite numbers"),
        ((1700, 12, 1, "round"), "shape 'round'; expected one of gaussian"),
    ],
)
def test_bands_that_cannot_be(band: tuple[float, float, float, str], words: str) -> None:
    with pytest.raises(ParameterError, match=words):
        PureComponent("K", [band])


def test_columns_have_to_fit_the_components() -> None:
    with pytest.raises(ParameterError, match=r"3 component\(s\) for 2 component\(s\) \(ester, water\)"):
        mixture_spectra([ESTER, WATER], np.ones((1, 3)), np.arange(10.0))
    with pytest.raises(ParameterError, match="No component"):
        pure_spectra([], np.arange(10.0))


@pytest.mark.parametrize(
    ("substance", "positions"),
    [
        # Strongest useful bands, from memory, ±3 cm⁻¹ (published-values, section 8.2)
        (simulate_substances.ETHYL_ACETATE, [1741, 1374, 1241, 1047]),
        (simulate_substances.ACETONE, [1715, 1363, 1222]),
        (simulate_substances.TOLUENE, [729, 694, 1496, 3027]),
        (simulate_substances.ACETONITRILE, [2253, 2293, 1375, 918]),
    ],
)
def test_solvents_have_maxima_where_handbooks_have_them(substance: PureComponent, positions: list[float]) -> None:
    axis = np.arange(4000.0, 599.0, -0.5)
    spectrum = substance.spectrum(axis)
    middle = spectrum[1:-1]
    maxima = axis[1:-1][(middle > spectrum[:-2]) & (middle > spectrum[2:])]
    for position in positions:
        assert np.abs(maxima - position).min() <= 3.0
