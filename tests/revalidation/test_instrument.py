"""Noise, level and energy."""

import numpy as np
import pytest

from quant.errors import AxisMismatchError, QuantityError
from quant.revalidation.instrument import expected_range, instrument_evidence, line_noise
from quant.spectra.axis import SpectralAxis
from quant.spectra.spectra_set import SpectraSet

AXIS = SpectralAxis(np.arange(4200.0, 399.0, -2.0), "cm-1")


def lines(sd: float, level: float = 1.0, n: int = 1, seed: int = 1) -> SpectraSet:
    values = level + np.random.default_rng(seed).normal(0, sd, (n, len(AXIS)))
    return SpectraSet(values, AXIS, [f"line {i}" for i in range(n)], "transmittance")


@pytest.mark.parametrize(
    ("n", "published"),  # published-values.md 1.4 [computed]: expected range / sigma
    [(10, 3.078), (20, 3.735), (25, 3.931), (50, 4.498), (52, 4.529), (100, 5.015), (200, 5.492)],
)
def test_peak_to_peak_of_white_noise(n: int, published: float) -> None:
    assert expected_range(n) == pytest.approx(published, abs=6e-4)


def test_rms_by_hand() -> None:
    # A line of slope 1 with +1, −1, −1, +1 on it, which no straight line takes up: √(4/(4 − 2))
    rms, peak, level = line_noise(np.array([0.0, 1.0, 2.0, 3.0]), np.array([1.0, 0.0, 1.0, 4.0]))
    assert (rms, peak, level) == pytest.approx((np.sqrt(2.0), 2.0, 1.5))


def test_noise_in_absorbance() -> None:
    # published-values.md 1.4: s_A = 0.4343·s_T/T, from memory of ASTM E1421
    window = instrument_evidence(lines(1e-3, level=0.5)).noise[1]
    assert window.rms_absorbance == pytest.approx(0.4343 * window.rms / window.level, rel=1e-4)
    assert window.rms == pytest.approx(0.1, rel=0.4)  # %T
    assert window.peak_to_peak == pytest.approx(window.expected_peak_to_peak, rel=0.5)


def test_windows_are_stated_and_cover_the_axis() -> None:
    found = instrument_evidence(lines(1e-3))
    assert [(w.low, w.high) for w in found.noise] == [(3950, 4050), (2950, 3050), (1950, 2050), (950, 1050), (450, 550)]
    assert found.noisier is None
    assert all(w.p_value is None for w in found.noise)


def test_more_noise_is_seen_and_equal_noise_is_not() -> None:
    worse = instrument_evidence(lines(2e-3, seed=2), lines(1e-3, seed=3))
    assert worse.noisier
    assert "against the last record" in worse.words[1]
    better = instrument_evidence(lines(1e-3, seed=2), lines(2e-3, seed=3))
    assert better.noisier is False


def test_equal_noise_is_seldom_called_worse() -> None:
    calls = [instrument_evidence(lines(1e-3, seed=2 * s), lines(1e-3, seed=2 * s + 1)).noisier for s in range(100)]
    # Neighbouring points are taken to share their noise (usual zero filling): for white noise the test is cautious.
    assert sum(bool(call) for call in calls) <= 9  # 99.9 % bound about 2.5 %


def test_the_photometric_level_is_told() -> None:
    found = instrument_evidence(lines(1e-4, level=0.97))
    assert found.noise[0].level == pytest.approx(97.0, abs=0.01)
    assert "97.0" in found.words[-1]


def test_absorbance_lines_tell_the_same() -> None:
    light = lines(1e-3)
    dark = SpectraSet(-np.log10(light.values), AXIS, light.sample_ids)
    assert instrument_evidence(dark).noise[2].rms == pytest.approx(instrument_evidence(light).noise[2].rms)


@pytest.mark.parametrize(("tilt", "word"), [(0.0, "alike"), (1e-4, "differently")])
def test_energy(tilt: float, word: str) -> None:
    old = SpectraSet(np.full((1, len(AXIS)), 10.0), AXIS, ["beam"], "arbitrary")
    now = SpectraSet(old.values * (0.6 + tilt * (AXIS.values - 2000.0)), AXIS, ["beam"], "arbitrary")
    found = instrument_evidence(None, energy=now, previous_energy=old)
    assert found.noise == ()
    assert word in found.words[0]
    assert found.energy[2].ratio == pytest.approx(0.6, abs=1e-3)
    assert str(found)


def test_what_cannot_be_judged_is_refused() -> None:
    beam = SpectraSet(np.ones((1, len(AXIS))), AXIS, ["beam"], "arbitrary")
    with pytest.raises(QuantityError, match="handed over as energy"):
        instrument_evidence(beam)
    nm = SpectraSet(np.ones((1, 50)), SpectralAxis(np.linspace(900, 1700, 50), "nm"), ["line"], "transmittance")
    with pytest.raises(AxisMismatchError, match="cm⁻¹"):
        instrument_evidence(nm)
    short = SpectraSet(np.ones((1, 50)), SpectralAxis(np.linspace(1500, 1700, 50), "cm-1"), ["line"], "transmittance")
    with pytest.raises(AxisMismatchError, match="3950-4050"):
        instrument_evidence(short)
    holes = np.ones((1, len(AXIS)))
    holes[0, 3] = np.nan
    with pytest.raises(QuantityError, match="missing points"):
        instrument_evidence(SpectraSet(holes, AXIS, ["line"], "transmittance"))
