"""Models without each sample are stored so that they repeat the cross-validation's left-out predictions."""

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.left_out_models import LEARNS, NOT_LINEAR, SWITCHED_OFF

BAND = '[regression]\nmethod = "band_area"\nbands = [{ signal = "height_at", position = 1730 }]\n'
PLS = "[regression]\nfactors = 2\n"


@pytest.mark.parametrize(
    ("tables", "way", "models"),
    [
        (f'{PLS}[cross_validation]\nscheme = "leave_one_out"', "jackknife+", 12),
        (f'{PLS}[cross_validation]\nscheme = "random_folds"\nfolds = 4', "CV+", 4),
        (f'{PLS}[[preprocessing]]\nstep = "snv"\n', "jackknife+", 12),
        (BAND, "jackknife+", 12),
        (f"{BAND}through_origin = true", "jackknife+", 12),
        (f'{BAND}line_weights = "1/x"', "jackknife+", 12),
        ('[regression]\nmethod = "pcr"\nfactors = 2', "jackknife+", 12),
    ],
)
@pytest.mark.parametrize("replicates", [1, 2])
def test_they_repeat_left_out_predictions(make_recipe, make_samples, tables, way, models, replicates):
    samples = make_samples(replicates=replicates)
    found = calibrate(make_recipe(tables), samples)
    model, kept = found.model, found.model.left_out
    assert (kept.way, len(kept.vectors)) == (way, models)
    mean = samples.mean_by_sample(model.process(samples.spectra.values))
    each = kept.predictions(model.method, mean, model.method.predict(mean))
    left_out = found.analytes[0].cross_validation.at(model.factors)[0][0]
    own = each[kept.fold, np.arange(len(samples))]
    assert own == pytest.approx(left_out, abs=1e-6)
    assert kept.residuals == pytest.approx(left_out - found.analytes[0].reference)


@pytest.mark.parametrize(
    ("tables", "note"),
    [
        (f"{PLS}[uncertainty]\ndistribution_free = false", SWITCHED_OFF),
        (f'{PLS}[[preprocessing]]\nstep = "scale_columns"\n', LEARNS),
        (f'{BAND}curve = "quadratic"', NOT_LINEAR),
    ],
)
def test_where_there_are_none(make_recipe, make_samples, tables, note):
    found = calibrate(make_recipe(tables), make_samples())
    assert found.model.left_out is None
    assert found.model.left_out_note == found.analytes[0].audit.free_intervals == note
