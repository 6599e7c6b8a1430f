"""Values, standard errors and intervals, by hand."""

from dataclasses import replace

import numpy as np
import pytest

from quant.errors import AxisMismatchError
from quant.prediction.predict import predict
from quant.prediction.uncertainty import NOT_STATED, true_value_interval
from quant.spectra.axis import SpectralAxis
from quant.statistics.intervals import NOT_RESOLVABLE


def test_pls_interval_by_hand(make_model, new_spectra):
    model, new = make_model(), new_spectra(np.array([3.0, 7.0]), 2)
    method, known = model.method, model.uncertainty
    centred = new.values - method.x_mean_
    value = method.y_mean_ + centred @ method.coefficients_[2]
    leverage = 1 / 15 + np.sum((centred @ method.rotations_) ** 2, axis=1)
    error = known.s0 * np.sqrt(1 + leverage)
    for i, row in enumerate(predict(model, new).predictions):
        assert row.value == pytest.approx(value[i])
        assert row.standard_error == pytest.approx(error[i])
        assert (row.low, row.high) == pytest.approx((value[i] - known.t * error[i], value[i] + known.t * error[i]))
        assert row.leverage == pytest.approx(leverage[i] / model.limits.leverage_warn)
        assert (row.analyte, row.unit, row.n_spectra, row.spread, row.model_state) == (
            "acid",
            "% m/m",
            1,
            None,
            "draft",
        )


def test_replicates_are_averaged(make_model, new_spectra):
    model, new = make_model(replicates=3), new_spectra(np.array([3.0, 7.0]), 2, replicates=3)
    found = predict(model, new)
    single = model.predict_values(new.values).reshape(2, 3)
    for row, values in zip(found.predictions, single, strict=True):
        assert row.n_spectra == 3
        assert row.value == pytest.approx(values.mean())
        assert row.spread == pytest.approx(values.std(ddof=1))
    assert found["S02"] is found.predictions[1]
    residual = model.method.residual_each(new.values)[-1].reshape(2, 3).mean(axis=1)
    assert [row.residual for row in found.predictions] == pytest.approx(residual / model.limits.residual_warn)


@pytest.mark.parametrize("kind", ["pls", "band"])
def test_fewer_replicates_widen_the_interval(make_model, new_spectra, band, kind):
    model = make_model(band if kind == "band" else "[regression]\nfactors = 2", replicates=4)
    new = new_spectra(np.array([5.0]), 2, replicates=4)
    sd = model.uncertainty.replicate_sd
    assert sd > 0
    errors = {m: predict(model, new[:m]).predictions[0].standard_error for m in (1, 2, 3, 4)}
    assert errors[1] > errors[2] > errors[3] > errors[4]
    assert model.uncertainty.replicates == pytest.approx(4)
    for m, error in errors.items():
        row = predict(model, new[:m]).predictions[0]
        alone = predict(replace(model, uncertainty=replace(model.uncertainty, replicate_sd=None)), new[:m]).predictions[
            0
        ]
        assert error**2 == pytest.approx(alone.standard_error**2 + sd**2 * (1 / m - 1 / 4))
        assert row.high - row.value == pytest.approx(model.uncertainty.t * error)


def test_more_replicates_than_the_calibration_had_promise_no_more(make_model, new_spectra):
    model, new = make_model(replicates=2), new_spectra(np.array([5.0]), 2, replicates=6)
    plain = replace(model, uncertainty=replace(model.uncertainty, replicate_sd=None))
    assert predict(model, new).predictions[0].standard_error == predict(plain, new).predictions[0].standard_error


def test_true_value_interval_by_hand(make_model, new_spectra):
    laboratory = 0.01
    model, new = make_model(laboratory_error=laboratory), new_spectra(np.array([4.0]), 2)
    assert laboratory**2 < model.uncertainty.s0**2 / 2
    [row] = predict(model, new).predictions
    half = model.uncertainty.t * np.sqrt(row.standard_error**2 - laboratory**2)
    assert (row.true_low, row.true_high) == pytest.approx((row.value - half, row.value + half))
    assert row.true_note == ""
    assert row.low < row.true_low < row.true_high < row.high


@pytest.mark.parametrize("kind", ["pls", "band"])
def test_no_true_value_interval_where_the_laboratory_error_is_large(make_model, new_spectra, band, kind):
    tables = band if kind == "band" else "[regression]\nfactors = 2"
    new = new_spectra(np.array([4.0]), 2)
    unstated = make_model(tables)
    [row] = predict(unstated, new).predictions
    assert (row.true_low, row.true_high, row.true_note) == (None, None, NOT_STATED)
    base = row.standard_error if kind == "band" else unstated.uncertainty.s0
    for share, told in ((0.99, ""), (1.01, NOT_RESOLVABLE)):
        [row] = predict(make_model(tables, laboratory_error=share * base / np.sqrt(2)), new).predictions
        assert row.true_note == told
        assert (row.true_low is None) == (row.true_high is None) == bool(told)


def test_band_interval_is_that_of_the_line_read_backwards(make_model, new_spectra, band):
    model, new = make_model(band), new_spectra(np.array([4.0]), 2)
    signal = float(new.values[0, new.axis.values == 1730][0])
    line, t = model.method.line_, model.uncertainty.t
    x0 = (signal - line.intercept) / line.slope
    error = line.residual_sd / line.slope * np.sqrt(1 + 1 / 15 + (x0 - 5.0) ** 2 / line.sxx)
    [row] = predict(model, new).predictions
    assert row.value == pytest.approx(x0)
    assert row.standard_error == pytest.approx(error)
    assert (row.low, row.high) == pytest.approx((x0 - t * error, x0 + t * error))


def test_a_perfect_line_has_an_interval_of_no_width(make_model, new_spectra, band):
    model = make_model(band)
    line = {**model.method.line_values_, "residual_sd": 0.0}
    model.method.line_values_ = line
    [row] = predict(model, new_spectra(np.array([4.0]), 2)).predictions
    assert row.low == row.value == row.high
    assert row.standard_error == 0
    assert true_value_interval(model, row.value, 0.0, row.low, row.high) == NOT_STATED


def test_nothing_is_clipped_at_zero(make_model, new_spectra):
    [row] = predict(make_model(), new_spectra(np.array([-0.5]), 2)).predictions
    assert row.value < 0
    assert row.low < row.value


def test_samples_come_in_the_order_read(make_model, new_spectra):
    new = new_spectra(np.array([3.0, 7.0, 5.0]), 2)[[2, 0, 1, 2]]
    values = new.values.copy()
    values[3] += 1e-4
    found = predict(make_model(), replace(new, values=values))
    assert [(row.sample, row.n_spectra) for row in found.predictions] == [("S03", 2), ("S01", 1), ("S02", 1)]


def test_a_copy_counts_once(make_model, new_spectra):
    new, model = new_spectra(np.array([3.0, 7.0]), 2), make_model()
    [once, other] = predict(model, new).predictions
    [copied, same] = predict(model, new[[0, 1, 0, 0]]).predictions
    assert (copied.n_spectra, copied.spread, same) == (1, None, other)
    assert copied == replace(once, remarks=(*once.remarks, "2 copied spectra left out"))


def test_another_axis_only_where_the_recipe_resamples(make_model, new_spectra):
    new = new_spectra(np.array([3.0]), 2)
    fine = SpectralAxis(np.linspace(1805.0, 1595.0, 211), "cm-1")
    bands = np.stack([np.exp(-(((fine.values - centre) / 15) ** 2)) for centre in (1730.0, 1670.0)])
    other = type(new)(0.1 * np.array([[3.0, 5.0]]) @ bands, fine, ["S01"])
    model = make_model()
    with pytest.raises(AxisMismatchError, match="or set resample = true under"):
        predict(model, other)
    [row] = predict(replace(model, reading={"resample": True}), other).predictions
    assert row.value == pytest.approx(3.0, abs=0.1)
    assert row.remarks == ("resampled onto the model's axis",)


def test_notes_that_are_not_stated_are_remarked(make_model, new_spectra):
    model = make_model(notes=[{"technique": "ATR", "resolution": "4"}] * 15)
    new = new_spectra(
        np.array([3.0, 4.0]), 2, notes=[{"technique": "atr", "resolution": "4.0 cm-1"}, {"technique": "ATR"}]
    )
    found = predict(model, new)
    assert [row.remarks for row in found.predictions] == [(), ("resolution not stated",)]
    assert "S02: resolution not stated" in str(found)
