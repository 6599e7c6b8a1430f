"""What instruments do to spectra, effect by effect."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.spectra import simulate_effects as effects
from quant.spectra.simulate import Band, band_profile
from quant.units import absorbance_from_transmittance

AXIS = np.arange(4000.0, 649.0, -2.0)


def observed_width(axis: np.ndarray, band: np.ndarray) -> float:
    """Full width at half the height, by linear interpolation on an axis that rises."""
    top = int(band.argmax())
    half = band[top] / 2
    left = np.interp(half, band[: top + 1], axis[: top + 1])
    right = np.interp(-half, -band[top:], axis[top:])
    return float(right - left)


def test_a_band_of_8_through_a_line_of_4() -> None:
    # Width sqrt(w² + r²) = 8.9443, height · 0.89443, area kept (computed: published-values, section 5.1)
    axis = np.arange(1600.0, 1800.0, 0.25)
    band = band_profile(axis, Band(1700, 8, 1, "gaussian"))
    seen = effects.gaussian_line_shape(band[None], 0.25, 4.0)[0]
    assert observed_width(axis, seen) == pytest.approx(8.9443, abs=0.01)
    assert seen.max() == pytest.approx(0.89443, abs=0.001)
    assert seen.sum() == pytest.approx(band.sum(), rel=1e-9)


def test_line_shape_of_no_width_and_of_nothing_to_see() -> None:
    rows = np.random.default_rng(1).standard_normal((3, 40))
    np.testing.assert_array_equal(effects.gaussian_line_shape(rows, 2.0, 0.0), rows)
    np.testing.assert_allclose(effects.gaussian_line_shape(np.full((2, 40), 0.7), 2.0, 8.0), 0.7, rtol=1e-14)
    with pytest.raises(ParameterError, match="width >= 0"):
        effects.gaussian_line_shape(rows, 2.0, -1.0)


@pytest.mark.parametrize(
    ("true", "at_0_001", "at_0_01"),
    # A = −log10((T + s)/(1 + s)) (computed: published-values, section 1.6)
    [(0.5, 0.4991, 0.4908), (1.0, 0.9961, 0.9629), (1.5, 1.4869, 1.3850), (2.0, 1.9590, 1.7033), (3.0, 2.6994, 1.9629)],
)
def test_stray_light(true: float, at_0_001: float, at_0_01: float) -> None:
    light = np.array([10.0**-true])
    for fraction, expected in ((0.001, at_0_001), (0.01, at_0_01)):
        assert absorbance_from_transmittance(effects.stray_light(light, fraction))[0] == pytest.approx(
            expected, abs=5e-5
        )


@pytest.mark.parametrize("absorbance", [0.0, 0.5, 1.0, 1.5])
def test_noise_of_absorbance_grows_as_one_over_transmittance(absorbance: float) -> None:
    n, sd = 40_000, 2e-4
    light = np.full((1, n), 10.0**-absorbance)
    noisy = absorbance_from_transmittance(effects.detector_noise(light, np.random.default_rng(7), sd))
    expected = 0.4343 * sd / 10.0**-absorbance  # s_A = 0.4343·s_T/T (published-values, section 1.4, from memory)
    assert noisy.std() == pytest.approx(
        expected, rel=5 / np.sqrt(2 * n)
    )  # five standard errors of a standard deviation
    assert noisy.mean() == pytest.approx(absorbance, abs=5 * expected / np.sqrt(n))


def test_noise_never_makes_light_negative() -> None:
    light = effects.detector_noise(np.zeros((2, 1000)), np.random.default_rng(1), 1e-2)
    assert light.min() == effects.LEAST_TRANSMITTANCE
    assert np.isfinite(absorbance_from_transmittance(light)).all()


def test_noise_is_least_in_the_middle() -> None:
    shape = effects.noise_shape(AXIS)
    assert shape.min() == 1.0
    assert shape[(AXIS >= 1000) & (AXIS <= 1750)].max() == 1.0
    assert shape[[0, -1]] == pytest.approx([2.5, 2.5])


def test_path_variation_is_one_factor_a_spectrum() -> None:
    n = 20_000
    rows = effects.path_variation(np.tile([0.2, 0.4, 0.8], (n, 1)), np.random.default_rng(3), 0.1)
    np.testing.assert_allclose(rows[:, 1] / rows[:, 0], 2.0)
    logs = np.log(rows[:, 0] / 0.2)
    assert logs.std() == pytest.approx(0.1, rel=5 / np.sqrt(2 * n))
    assert logs.mean() == pytest.approx(0.0, abs=5 * 0.1 / np.sqrt(n))


@pytest.mark.parametrize("axis", [AXIS, AXIS[::-1]])
def test_baseline_is_offset_slope_and_curvature(axis: np.ndarray) -> None:
    n = 5000
    rows = effects.baseline_drift(np.zeros((n, axis.size)), axis, np.random.default_rng(4), 0.01, 0.004, 0.002)
    u = 2 * (axis - 650) / 3350 - 1
    found = np.linalg.lstsq(np.stack([np.ones_like(u), u, (3 * u * u - 1) / 2]).T, rows.T, rcond=None)[0]
    np.testing.assert_allclose(found.std(axis=1), [0.01, 0.004, 0.002], rtol=5 / np.sqrt(2 * n))
    residual = rows.T - np.stack([np.ones_like(u), u, (3 * u * u - 1) / 2]).T @ found
    assert np.abs(residual).max() < 1e-12


def test_water_vapour_lies_in_its_two_regions() -> None:
    vapour = effects.water_vapour_spectrum(AXIS, 4.0)
    inside = ((AXIS > 1350) & (AXIS < 1900)) | ((AXIS > 3550) & (AXIS < 3950))
    assert vapour[~inside].max() < 1e-3
    assert vapour[(AXIS > 1350) & (AXIS < 1900)].max() > 0.9
    assert 0.4 < vapour[(AXIS > 3550) & (AXIS < 3950)].max() < 0.9


def test_vapour_lines_are_sharper_and_higher_at_better_resolution() -> None:
    axis = np.arange(4000.0, 1300.0, -0.1)
    areas = [np.trapezoid(effects.water_vapour_spectrum(axis, width), -axis) for width in (1.0, 4.0, 8.0)]
    np.testing.assert_allclose(areas, areas[0], rtol=1e-6)
    peaks = [effects.water_vapour_spectrum(axis, width).max() for width in (1.0, 4.0, 8.0)]
    assert peaks[0] > 2 * peaks[1] > 2 * peaks[2] * 1.2


def test_vapour_comes_with_either_sign() -> None:
    vapour = effects.water_vapour_spectrum(AXIS)
    rows = effects.atmosphere(np.zeros((2000, AXIS.size)), np.random.default_rng(5), 1e-3, vapour)
    amplitude = rows[:, vapour.argmax()] / vapour.max()
    # 99.9 % of binomial(2000, 1/2) lies within 926..1074
    assert 926 <= (amplitude > 0).sum() <= 1074
    assert amplitude.std() == pytest.approx(1e-3, rel=5 / np.sqrt(4000))


def test_carbon_dioxide_lies_where_it_should() -> None:
    gas = effects.carbon_dioxide_spectrum(AXIS)
    # Span about 2280-2390, Q branch 667.4 (published-values, section 1.5, from memory)
    inside = ((AXIS > 2275) & (AXIS < 2400)) | (AXIS < 690)
    assert gas[~inside].max() < 2e-3
    assert gas.max() == pytest.approx(1.0, abs=0.15)
    assert AXIS[AXIS < 1000][gas[AXIS < 1000].argmax()] == pytest.approx(667.4, abs=2)


def test_atr_probes_deeper_at_longer_waves() -> None:
    np.testing.assert_allclose(effects.atr_depth(np.ones(3), np.array([4000.0, 1000.0, 500.0])), [0.25, 1.0, 2.0])


@pytest.mark.parametrize("axis", [AXIS, AXIS[::-1]])
@pytest.mark.parametrize(("shift", "stretch"), [(0.4, 0.0), (-1.3, 0.0), (0.0, 2e-4), (2.5, -1e-4)])
def test_bands_appear_where_the_wrong_scale_puts_them(axis: np.ndarray, shift: float, stretch: float) -> None:
    for position in (3000.0, 1700.0, 900.0):
        seen = effects.shift_axis(band_profile(axis, Band(position, 30, 1, "gaussian"))[None], axis, shift, stretch)[0]
        expected = band_profile(axis, Band(position * (1 + stretch) + shift, 30, 1, "gaussian"))
        np.testing.assert_allclose(seen, expected, atol=1e-3)
        assert (axis * seen).sum() / seen.sum() == pytest.approx(position * (1 + stretch) + shift, abs=2e-3)


def test_a_right_scale_changes_nothing() -> None:
    rows = np.random.default_rng(6).standard_normal((3, AXIS.size))
    np.testing.assert_array_equal(effects.shift_axis(rows, AXIS, 0.0), rows)


def test_the_ends_go_on_when_the_axis_shifts() -> None:
    rows = np.linspace(0.2, 0.6, AXIS.size)[None]
    seen = effects.shift_axis(rows, AXIS, 50.0)
    assert seen[0, -10:] == pytest.approx(np.full(10, 0.6), abs=2e-2)
    assert np.isfinite(seen).all()
