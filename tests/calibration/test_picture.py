"""The numbers behind the pictures."""

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.picture import MOST_SHOWN

BANDS = """
[regression]
method = "band_area"
bands = [{ range = [1760, 1700], baseline = [1700, 1760] }, { signal = "height_at", position = 1720 }]
reference_band = { signal = "height", range = [1640, 1690] }
"""


def test_pls(make_samples, make_recipe):
    samples = make_samples(n=12, replicates=2)
    recipe = make_recipe('[[preprocessing]]\nstep = "keep_ranges"\nranges = [[1760, 1640]]\n[regression]\nfactors = 2')
    found = calibrate(recipe, samples)["acid"]
    shown, model = found.picture, found.model
    mean = samples.mean_by_sample(samples.spectra.values)
    assert shown.axis.tolist() == samples.spectra.axis.values.tolist()
    assert shown.spectra == pytest.approx(mean, abs=1e-5)
    assert (shown.processed_axis[0], shown.processed_axis[-1]) == (1760, 1640)
    assert shown.regression_vector.shape == shown.processed_axis.shape
    assert shown.rmsec[2] == pytest.approx(found.calibration.rmse)
    assert shown.leverage.sum() == pytest.approx(3, abs=0.1)  # factors + 1, but for the scatter of replicates
    assert shown.residual == pytest.approx(
        samples.mean_by_sample(model.method.residual_each(model.process(samples.spectra.values))[-1])
    )
    assert (shown.bands, shown.signals, shown.line) == ((), None, None)


def test_band_area(make_samples, make_recipe):
    samples = make_samples(n=12)
    found = calibrate(make_recipe(BANDS), samples)["acid"].picture
    assert found.bands == ((1700, 1760), (1720, 1720), (1640, 1690))
    assert (found.regression_vector, found.explained_x, found.explained_y) == (None, None, None)
    assert found.line == pytest.approx(np.polyfit(samples.values[:, 0], found.signals, 1))


def test_at_most_sixty_spectra_are_shown(make_samples, make_recipe):
    recipe = make_recipe('[regression]\nfactors = 2\n[cross_validation]\nscheme = "interleaved"')
    found = calibrate(recipe, make_samples(n=70))["acid"].picture
    assert len(found.shown) == len(found.spectra) == MOST_SHOWN
    assert {"S01", "S70"} <= set(found.shown)
    assert found.leverage.shape == (70,)
