"""Validation: predictions of samples that took no part, beside their values."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.split import INTERNAL
from quant.calibration.validate import regression_direction, validate
from quant.errors import AcquisitionMismatchError, QuantityError, SampleMismatchError
from quant.prediction.predict import predict
from quant.spectra.reference_table import Analyte
from quant.statistics.significance import PREDICTED_ON_REFERENCE, REFERENCE_ON_PREDICTED


@pytest.fixture
def model(make_samples, make_recipe):
    return calibrate(make_recipe("[regression]\nfactors = 2"), make_samples(n=12, replicates=2)).model


def test_errors_are_predicted_minus_reference(model, make_samples):
    samples = make_samples(n=6, replicates=2, seed=2)
    found = validate(model, samples)
    error = found.predicted - found.reference
    assert found.figures.n_samples == 6
    assert found.figures.bias == pytest.approx(error.mean())
    assert found.figures.rmse == pytest.approx(np.sqrt(np.mean(error**2)))
    assert found.figures.sep == pytest.approx(error.std(ddof=1))
    assert (found.kind, found.how, found.accepted) == ("independent validation", "6 samples", True)
    assert (found.inside == ((found.low <= found.reference) & (found.reference <= found.high))).all()


def test_predictions_are_those_of_everyday(model, make_samples):
    samples = make_samples(n=6, replicates=2, seed=2)
    found, rows = validate(model, samples), predict(model, samples.spectra).predictions
    assert found.sample_ids == tuple(row.sample for row in rows)
    for name, values in (("value", found.predicted), ("low", found.low), ("high", found.high)):
        assert [getattr(row, name) for row in rows] == values.tolist()
    assert found.applicability == tuple(row.applicability for row in rows)


def test_each_origin_has_figures_of_its_own(model, make_samples):
    notes = [{"origin": origin} for origin in ("spiked", "spiked", "process", "process", "process", "not stated")]
    found = validate(model, make_samples(n=6, seed=2, notes=notes))
    assert {origin: figures.n_samples for origin, figures in found.by_origin.items()} == {"spiked": 2, "process": 3}
    assert "spiked: n 2, RMSEP" in str(found)
    assert validate(model, make_samples(n=6, seed=2, notes=[{"origin": "spiked"}] * 6)).by_origin == {}


def test_an_internal_test_proves_nothing(model, make_samples):
    found = validate(model, make_samples(n=6, seed=2), kind=INTERNAL, how="drawn")
    assert not found.accepted
    assert str(found).startswith("Internal test of acid: drawn\n")


def test_a_reversed_axis_is_turned(model, make_samples):
    samples = make_samples(n=6, seed=2)
    spectra = samples.spectra
    mirrored = replace(spectra, values=spectra.values[:, ::-1], axis=spectra.axis.reversed())
    turned = replace(samples, spectra=mirrored)
    assert validate(model, turned).predicted.tolist() == validate(model, samples).predicted.tolist()


def test_spectra_recorded_otherwise_are_refused(make_samples, make_recipe):
    samples = make_samples(n=12)
    stated = replace(samples, spectra=samples.spectra.with_notes({"technique": "ATR"}))
    model = calibrate(make_recipe(), stated).model
    other = replace(samples, spectra=samples.spectra.with_notes({"technique": "transmission"}))
    with pytest.raises(
        AcquisitionMismatchError, match="technique is transmission for S01, S02, S03, S04, S05 and 7 more"
    ):
        validate(model, other)
    reflectance = replace(samples, spectra=replace(samples.spectra, quantity="reflectance"))
    with pytest.raises(QuantityError, match="The spectra are reflectance, but the model was made from absorbance"):
        validate(model, reflectance)


def test_direction_of_the_line(model, make_samples, make_recipe):
    band = '[regression]\nmethod = "band_area"\nbands = [{ range = [1700, 1760], baseline = [1700, 1760] }]'
    assert regression_direction(model) == REFERENCE_ON_PREDICTED
    assert regression_direction(calibrate(make_recipe(band), make_samples()).model) == PREDICTED_ON_REFERENCE


def test_values_on_another_basis_are_refused(model, make_samples, make_recipe):
    samples = make_samples(n=12)
    dry, wet = (Analyte("acid", "% m/m", basis=basis) for basis in ("dry", "wet"))
    stated = calibrate(make_recipe("[regression]\nfactors = 2"), replace(samples, analytes=(dry,)))["acid"]
    assert (stated.unit, stated.model.analyte.basis) == ("% m/m dry basis", "dry")
    assert "9 % m/m dry basis" in str(stated.model)
    assert predict(stated.model, samples.spectra).predictions[0].unit == "% m/m dry basis"
    with pytest.raises(SampleMismatchError, match="are in % m/m dry basis, the validation's in % m/m wet basis"):
        validate(stated.model, replace(samples, analytes=(wet,)))
    with pytest.raises(SampleMismatchError, match="are in % m/m, the validation's in mg/kg"):
        validate(model, replace(samples, analytes=(Analyte("acid", "mg/kg"),)))
