"""Parts of the standard error, and distribution-free intervals against the definition."""

import numpy as np
import pytest

from quant.model.storage import load_model, save_model
from quant.prediction.predict import predict
from quant.prediction.uncertainty import NO_LEFT_OUT_MODELS
from quant.regression.pls import PLS
from quant.statistics.conformal import fit_level_function, jackknife_plus

PARTS = ("part_presentation", "part_calibration", "part_laboratory", "part_unexplained")
SHUFFLED = '[cross_validation]\nscheme = "leave_one_out"\n[regression]\nfactors = 2'


@pytest.mark.parametrize("count", [1, 2, 3, 5])
def test_the_squares_of_the_parts_add_up(make_model, new_spectra, count):
    model = make_model(replicates=3, laboratory_error=0.01)
    [row] = predict(model, new_spectra(np.array([4.0]), 2, replicates=count)).predictions
    known = model.uncertainty
    assert row.part_laboratory == 0.01
    assert row.part_presentation == pytest.approx(known.replicate_sd / np.sqrt(min(count, 3)))
    leverage = row.leverage * model.limits.leverage_warn
    assert row.part_calibration == pytest.approx(known.s0 * np.sqrt(leverage))
    if row.part_unexplained is not None:
        total = sum(getattr(row, name) ** 2 for name in PARTS)
        assert total == pytest.approx(row.standard_error**2)


def test_parts_that_are_not_known(make_model, new_spectra):
    [row] = predict(make_model(), new_spectra(np.array([4.0]), 2)).predictions
    assert (row.part_presentation, row.part_laboratory) == (None, None)
    assert row.part_unexplained**2 + row.part_calibration**2 == pytest.approx(row.standard_error**2)
    [row] = predict(make_model(laboratory_error=9.0), new_spectra(np.array([4.0]), 2)).predictions
    assert row.part_unexplained is None


def by_definition(new, probability):
    """Refit without each sample in turn, with the standards of `make_model`; see tests/prediction/conftest.py."""
    values = np.linspace(1.0, 9.0, 15)
    left_out, residual, predicted = [], [], []
    for i in range(15):
        keep = np.arange(15) != i
        model = PLS(2).fit(STANDARDS.values[keep], values[keep])
        own = float(model.predict(STANDARDS.values[i : i + 1])[0])
        left_out.append(own)
        residual.append(own - values[i])
        predicted.append(model.predict(new.values))
    plain = jackknife_plus(np.array(predicted), residual, probability)
    size = fit_level_function(left_out, residual)
    each = np.array(predicted)
    scaled = jackknife_plus(each, residual, probability, scales=size(left_out), new_scales=size(each))
    return plain, scaled


STANDARDS = None


@pytest.fixture
def standards(new_spectra):
    global STANDARDS
    STANDARDS = new_spectra(np.linspace(1.0, 9.0, 15), 1)


@pytest.mark.usefixtures("standards")
def test_jackknife_plus_is_that_of_refitted_models(make_model, new_spectra, tmp_path):
    model = make_model(SHUFFLED)
    new = new_spectra(np.linspace(2.0, 8.0, 6), 2)
    plain, scaled = by_definition(new, 0.9)
    for found in (predict(model, new), predict(load_model(save_model(model, tmp_path / "a.model")), new)):
        for i, row in enumerate(found.predictions):
            ends = (row.free_low, row.free_high, row.scaled_low, row.scaled_high)
            assert ends == pytest.approx((plain.low[i], plain.high[i], scaled.low[i], scaled.high[i]), abs=1e-6)
            assert row.free_note == "jackknife+, 90 %, marginal coverage"
            assert row.free_low < row.value < row.free_high


def test_a_band_has_them_too(make_model, new_spectra, band):
    [row] = predict(make_model(band), new_spectra(np.array([4.0]), 2)).predictions
    assert row.free_low < row.value < row.free_high


@pytest.mark.parametrize(
    ("tables", "note"),
    [
        ("[regression]\nfactors = 2\n[uncertainty]\ndistribution_free = false", "switched off in the recipe"),
        (
            '[[preprocessing]]\nstep = "msc"\n[regression]\nfactors = 2',
            "a preprocessing step learns from the standards",
        ),
        ("[regression]\nfactors = 2\n[uncertainty]\nprobability = 0.95", "15 samples are too few for 95 %; 19 are"),
    ],
)
def test_where_there_are_none_it_says_why(make_model, new_spectra, tables, note):
    [row] = predict(make_model(tables), new_spectra(np.array([4.0]), 2)).predictions
    assert (row.free_low, row.free_high, row.scaled_low, row.scaled_high) == (None,) * 4
    assert row.free_note.startswith(note)


def test_models_of_before_have_none(make_model, new_spectra):
    from dataclasses import replace

    model = replace(make_model(), left_out=None)
    [row] = predict(model, new_spectra(np.array([4.0]), 2)).predictions
    assert row.free_note == NO_LEFT_OUT_MODELS
