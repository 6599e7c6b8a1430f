"""An instrument in some state."""

from dataclasses import FrozenInstanceError, replace

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.spectra.simulate import PureComponent, mixture_spectra
from quant.spectra.simulate_effects import carbon_dioxide_spectrum, water_vapour_spectrum
from quant.spectra.simulate_instrument import InstrumentState, measure

AXIS = np.arange(4000.0, 649.0, -2.0)
PRODUCT = PureComponent("product", [(1700, 18, 0.6, "mixed"), (1280, 20, 0.8, "mixed"), (2950, 40, 0.2, "gaussian")])
GREASE = PureComponent("grease", [(2920, 24, 0.05, "mixed"), (1460, 20, 0.02, "mixed")])
TRUTH = mixture_spectra([PRODUCT], [[1.0], [0.5], [0.1]], AXIS)
REAL = InstrumentState(
    noise=2e-4,
    resolution=4.0,
    path_variation=0.1,
    baseline_offset=3e-3,
    baseline_slope=2e-3,
    baseline_curvature=1e-3,
    water_vapour=3e-4,
    carbon_dioxide=1e-3,
)


def seen(state: InstrumentState, seed: int = 1) -> np.ndarray:
    return measure(TRUTH, AXIS, np.random.default_rng(seed), state)


def test_a_perfect_instrument_reports_the_truth() -> None:
    np.testing.assert_allclose(seen(InstrumentState()), TRUTH, atol=1e-12)


def test_a_real_one_does_not_but_comes_near() -> None:
    difference = seen(REAL) - TRUTH
    assert 1e-3 < difference.std() < 5e-2


def test_equal_generators_give_equal_spectra() -> None:
    np.testing.assert_array_equal(seen(REAL), seen(REAL))
    assert np.abs(seen(REAL) - seen(REAL, seed=2)).max() > 1e-4


def test_nothing_that_is_handed_in_is_changed() -> None:
    truth, axis = TRUTH.copy(), AXIS.copy()
    measure(truth, axis, np.random.default_rng(1), replace(REAL, interferent=GREASE, interferent_amount=1.0, shift=1.0))
    np.testing.assert_array_equal(truth, TRUTH)
    np.testing.assert_array_equal(axis, AXIS)


def test_only_what_a_service_changed_differs_under_equal_generators() -> None:
    before = seen(REAL)
    np.testing.assert_allclose(seen(replace(REAL, offset=0.01)) - before, 0.01, atol=1e-14)
    without_gases = replace(REAL, water_vapour=0.0, carbon_dioxide=0.0)
    span = (AXIS > 2450) & (AXIS < 2800)  # no gas absorbs here
    np.testing.assert_allclose(seen(without_gases)[:, span], before[:, span], atol=1e-9)
    assert np.abs(seen(without_gases) - before)[:, (AXIS > 2300) & (AXIS < 2380)].max() > 1e-4


def test_gain_and_interferent_act_on_the_absorbance() -> None:
    np.testing.assert_allclose(seen(InstrumentState(gain=1.05)), 1.05 * TRUTH, atol=1e-12)
    with_grease = InstrumentState(interferent=GREASE, interferent_amount=2.0)
    np.testing.assert_allclose(seen(with_grease), TRUTH + 2.0 * GREASE.spectrum(AXIS), atol=1e-12)


@pytest.mark.parametrize(("shift", "stretch"), [(0.5, 2e-4), (0.5, 0.0), (0.0, 5e-4)])
def test_shift_and_stretch_move_bands(shift: float, stretch: float) -> None:
    moved = [(p * (1 + stretch) + shift, w, h, s) for p, w, h, s in PRODUCT.bands]
    expected = PureComponent("moved", moved).spectrum(AXIS)
    found = seen(InstrumentState(shift=shift, stretch=stretch))[0]
    np.testing.assert_allclose(found, expected, atol=2e-3)
    assert np.abs(TRUTH[0] - expected).max() > 10e-3


def test_noise_is_as_stated_where_energy_is_best_and_greater_at_the_ends() -> None:
    blank = measure(np.zeros((400, AXIS.size)), AXIS, np.random.default_rng(1), InstrumentState(noise=1e-3))
    best, low_end = (AXIS > 1100) & (AXIS < 1700), AXIS < 670
    # s_A = 0.4343·s_T at T = 1; at 650 cm⁻¹ 2.5 times as much. Five standard errors of a standard deviation.
    assert blank[:, best].std() == pytest.approx(0.4343e-3, rel=5 / np.sqrt(2 * 400 * best.sum()))
    assert 2.1 < blank[:, low_end].std() / 0.4343e-3 < 2.5


def test_line_shape_acts_on_light_and_lowers_strong_bands_more() -> None:
    strong = measure(3.0 * TRUTH[:1], AXIS, np.random.default_rng(1), InstrumentState(resolution=16.0))[0]
    weak = measure(0.03 * TRUTH[:1], AXIS, np.random.default_rng(1), InstrumentState(resolution=16.0))[0]
    top = TRUTH[0].argmax()
    assert strong[top] / (3.0 * TRUTH[0, top]) < weak[top] / (0.03 * TRUTH[0, top]) < 1.0


def test_stray_light_limits_the_absorbance() -> None:
    found = measure(np.full((1, AXIS.size), 5.0), AXIS, np.random.default_rng(1), InstrumentState(stray_light=0.001))
    np.testing.assert_allclose(found, -np.log10((1e-5 + 1e-3) / 1.001), rtol=1e-12)


def test_each_random_effect_keeps_to_its_own_shape() -> None:
    def residue(state: InstrumentState, shapes: np.ndarray) -> float:
        difference = (seen(state) - TRUTH).T
        left = difference - shapes.T @ np.linalg.lstsq(shapes.T, difference, rcond=None)[0]
        return float(np.abs(left).max() / np.abs(difference).max())

    assert residue(InstrumentState(water_vapour=1e-3), water_vapour_spectrum(AXIS, 4.0)[None]) < 1e-9
    assert residue(InstrumentState(carbon_dioxide=1e-3), carbon_dioxide_spectrum(AXIS)[None]) < 1e-9
    assert residue(InstrumentState(path_variation=0.1), TRUTH[:1]) < 1e-9
    assert residue(InstrumentState(baseline_offset=1e-3, baseline_slope=1e-3), np.stack([AXIS**0, AXIS])) < 1e-9
    assert residue(InstrumentState(noise=1e-3), np.stack([AXIS**0, AXIS])) > 0.5


def test_a_rising_axis_reads_the_same() -> None:
    state = replace(REAL, noise=0.0, shift=0.7)
    rising = measure(TRUTH[:, ::-1], AXIS[::-1], np.random.default_rng(1), state)[:, ::-1]
    np.testing.assert_allclose(rising, seen(state), atol=1e-12)


def test_a_state_is_frozen() -> None:
    with pytest.raises(FrozenInstanceError):
        REAL.noise = 0.0  # type: ignore[misc]


@pytest.mark.parametrize(
    ("wrong", "words"),
    [
        ({"noise": -1e-4}, "noise is -0.0001; expected 0 or more"),
        ({"gain": np.nan}, "gain is nan; expected a finite number"),
        ({"stretch": 0.5}, "stretch is 0.5"),
    ],
)
def test_states_that_cannot_be(wrong: dict[str, float], words: str) -> None:
    with pytest.raises(ParameterError, match=words):
        InstrumentState(**wrong)  # type: ignore[arg-type]


def test_axes_that_cannot_be() -> None:
    rng = np.random.default_rng(1)
    with pytest.raises(ParameterError, match="axis of 3 points for spectra of 1676"):
        measure(TRUTH, AXIS[:3], rng, REAL)
    with pytest.raises(ParameterError, match="unevenly spaced"):
        measure(TRUTH, 1e7 / AXIS, rng, REAL)
