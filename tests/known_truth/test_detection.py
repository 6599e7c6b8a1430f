"""Critical values and detection limits keep their word on simulated spectra, averaged over repeated calibrations."""

from dataclasses import asdict, dataclass

import numpy as np
import pytest

from quant.regression.band_area import BandArea
from quant.regression.pls import PLS
from quant.spectra.simulate import PureComponent, mixture_spectra
from quant.statistics.detection import NONCENTRAL_T, TWICE_T, detection_limits
from quant.statistics.detection_interval import DETECTION_FACTOR, detection_interval, result_sd
from quant.statistics.method_limits import ich_limits
from quant.statistics.net_analyte_signal import net_analyte_signal_of_vector

SEED = 20261201  # fixed before the first run
AXIS = np.arange(1800.0, 1659.0, -2.0)  # cm⁻¹
ANALYTE = PureComponent("analyte", [(1730.0, 18.0, 0.05, "gaussian")])
MATRIX = [
    PureComponent("matrix", [(1715.0, 25.0, 0.04, "gaussian"), (1690.0, 30.0, 0.05, "mixed")]),
    PureComponent("solvent", [(1745.0, 22.0, 0.04, "gaussian"), (1770.0, 20.0, 0.03, "mixed")]),
]
NOISE = 0.002  # absorbance, white
LABORATORY = 0.03  # standard error of a reference value; contents lie between 0 and 2


@dataclass
class LineCounts:
    """Of as many calibrations as blanks and samples: one of each a calibration."""

    calibrations: int = 0
    blanks_above: int = 0
    missed: int = 0  # at the detection limit by the noncentral t
    missed_twice_t: int = 0  # at the detection limit by twice t
    missed_at_critical: int = 0  # control: a sample at the critical value is missed every second time
    blanks_above_plain: int = 0  # control: 1.645·s/b, as if calibration and degrees of freedom did not matter
    missed_at_ich: int = 0  # at 3.3·σ/S with σ of the residuals: reported, held to nothing


@dataclass
class PlsCounts:
    """Ten blanks and samples a calibration, each with another background."""

    calibrations: int = 0
    samples: int = 0
    blanks_above: int = 0
    missed_at_low: int = 0
    missed_at_high: int = 0
    missed_at_half_low: int = 0  # control


def count_line(n_calibrations):
    """Band area of the analyte alone over six standards: four degrees of freedom."""
    counts, rng = LineCounts(calibrations=n_calibrations), np.random.default_rng(SEED)
    standards = np.arange(0.0, 2.4, 0.4)
    band = [{"signal": "area", "range": [1700, 1760], "baseline": [1690, 1770]}]

    def spectra(contents):
        return mixture_spectra([ANALYTE], contents[:, np.newaxis], AXIS) + NOISE * rng.normal(
            size=(len(contents), AXIS.size)
        )

    for _ in range(n_calibrations):
        model = BandArea(bands=band, axis=AXIS).fit(spectra(standards), standards)
        exact, twice = (detection_limits(model.line_, way=way) for way in (NONCENTRAL_T, TWICE_T))
        ich = ich_limits(model.line_)[0]
        contents = np.array([0.0, exact.detection, twice.detection, exact.critical, ich.detection])
        found = model.predict(spectra(contents))
        above = found > exact.critical
        counts.blanks_above += above[0]
        counts.missed += not above[1]
        counts.missed_twice_t += not above[2]
        counts.missed_at_critical += not above[3]
        counts.missed_at_ich += not above[4]
        counts.blanks_above_plain += found[0] > 1.645 * ich.sigma / ich.slope
    return plain(counts)


def count_pls(n_calibrations, n_samples=10):
    """PLS with three factors on three substances that overlap and vary independently."""
    counts, rng = (
        PlsCounts(calibrations=n_calibrations, samples=n_calibrations * n_samples),
        np.random.default_rng(SEED),
    )

    def spectra(contents):
        others = rng.uniform(0.5, 2.0, (len(contents), 2))
        pure = mixture_spectra([ANALYTE, *MATRIX], np.column_stack([contents, others]), AXIS)
        return pure + NOISE * rng.normal(size=pure.shape)

    for _ in range(n_calibrations):
        truth = rng.uniform(0.0, 2.0, 30)
        training, reference = spectra(truth), truth + LABORATORY * rng.normal(size=30)
        model = PLS(n_factors=3).fit(training, reference)
        sensitivity = net_analyte_signal_of_vector(model.coefficients_[-1]).sensitivity
        noise = {"sensitivity": sensitivity, "signal_sd": NOISE, "reference_sd": LABORATORY}
        limits = detection_interval(reference, model.leverage_each(training)[-1], **noise)

        def n_above(content, model=model, noise=noise):
            new = spectra(np.full(n_samples, content))
            critical = DETECTION_FACTOR / 2 * result_sd(model.leverage_each(new)[-1], **noise)
            return np.count_nonzero(model.predict(new) > critical)

        counts.blanks_above += n_above(0.0)
        counts.missed_at_low += n_samples - n_above(limits.low)
        counts.missed_at_high += n_samples - n_above(limits.high)
        counts.missed_at_half_low += n_samples - n_above(limits.low / 2)
    return plain(counts)


def plain(counts):
    """Counts by name, as plain numbers."""
    return {name: int(value) for name, value in asdict(counts).items()}


def check_line(counts):
    """Shares of 5 ± 3 %; the controls lie far outside."""
    share = {name: value / counts["calibrations"] for name, value in counts.items()}
    for name in ("blanks_above", "missed", "missed_twice_t"):
        assert 0.02 <= share[name] <= 0.08, name
    assert 0.4 < share["missed_at_critical"] < 0.6
    assert share["blanks_above_plain"] > 0.08


def check_pls(counts):
    """At most 8 % missed at LOD_max, at least 2 % at LOD_min."""
    share = {name: value / counts["samples"] for name, value in counts.items()}
    assert 0.02 <= share["blanks_above"] <= 0.08
    assert share["missed_at_high"] <= 0.08
    assert share["missed_at_low"] >= 0.02
    assert share["missed_at_low"] > share["missed_at_high"]
    assert share["missed_at_half_low"] > 0.3


def test_a_band_area_line_keeps_its_word():
    check_line(count_line(800))


def test_pls_keeps_its_word():
    check_pls(count_pls(80))


@pytest.mark.long
def test_a_band_area_line_keeps_its_word_5000_times(keep_result):
    counts = count_line(5000)
    keep_result("detection_band_area", counts)
    check_line(counts)


@pytest.mark.long
def test_pls_keeps_its_word_500_times(keep_result):
    counts = count_pls(500)
    keep_result("detection_pls", counts)
    check_pls(counts)
