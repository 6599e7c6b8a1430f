"""Samples below a detection limit: left out of the fit, checked on one side."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.below_limit import check_below_limit
from quant.calibration.calibrate import calibrate
from quant.calibration.split import split_samples
from quant.errors import AcquisitionMismatchError
from quant.prediction.predict import predict

FIXED = "[regression]\nfactors = 2"


def below(samples, limits):
    """Return samples of which the named only have an upper limit."""
    values, censored = samples.values.copy(), np.full(samples.values.shape, np.nan)
    for sample, limit in limits.items():
        place = samples.sample_ids.index(sample)
        values[place], censored[place] = np.nan, limit
    return replace(samples, values=values, censored=censored)


def test_they_are_left_out_with_their_reason(make_samples, make_recipe):
    recipe = make_recipe('[validation]\nsamples = ["S07..S09"]')
    split = split_samples(recipe, below(make_samples(n=12), {"S01": 1.5, "S08": 3.0}), None, "acid")
    assert [(item.sample, item.reason) for item in split.left_out] == [
        ("S01", "acid below the detection limit of 1.5 % m/m"),
        ("S08", "acid below the detection limit of 3 % m/m"),
    ]
    assert "S01" not in split.calibration.sample_ids
    assert split.validation.sample_ids == ("S07", "S09")
    assert [samples.sample_ids for samples in split.below_limit] == [("S01", "S08")]


def test_separate_samples_are_checked_too(make_samples, make_recipe):
    recipe = make_recipe('[validation]\nfiles = ["v.csv"]')
    separate = make_samples(n=12, seed=2).subset([9, 10, 11])  # true contents 7.5 to 9
    training = below(make_samples(n=12).subset(np.arange(9)), {"S02": 5.0})
    found = calibrate(recipe, training, below(separate, {"S11": 4.0}))["acid"]
    assert found.below_limit.sample_ids == ("S02", "S11")
    assert found.below_limit.contradicting == ("S11",)
    assert found.validation.sample_ids == ("S10", "S12")


def test_what_is_excluded_is_not_checked(make_samples, make_recipe):
    recipe = make_recipe('[[exclude]]\nsamples = ["S01"]\nreason = "spilt"\n' + FIXED)
    assert calibrate(recipe, below(make_samples(), {"S01": 0.1}))["acid"].below_limit is None


def test_the_lower_end_of_the_interval_decides(make_samples, make_recipe):
    # True contents: S01 1.00, S06 4.64, S07 5.36 % m/m.
    samples = make_samples(n=12)
    result = calibrate(make_recipe(FIXED), below(samples, {"S01": 1.2, "S06": 9.0, "S07": 2.0}))["acid"]
    row = predict(result.model, samples.spectra)["S06"]
    for limit, contradicts in ((row.low + 1e-6, False), (row.low - 1e-6, True)):  # the value itself lies above both
        known = below(samples, {"S01": 1.2, "S06": limit, "S07": 2.0}).subset([0, 5, 6])
        found = check_below_limit(result.model, [known])
        assert found.sample_ids == ("S01", "S06", "S07")
        assert found.limit.tolist() == [1.2, limit, 2.0]
        assert found.predicted == pytest.approx([1.0, row.value, 5.364], abs=0.1)
        assert found.low[1] == pytest.approx(row.low, abs=1e-9)
        assert found.contradicts.tolist() == [False, contradicts, True]
    assert found.contradicting == ("S06", "S07")
    assert found.lowest_calibrated == result.limits.lowest == samples.values[1, 0]


def test_what_is_told(make_samples, make_recipe):
    result = calibrate(make_recipe(FIXED), below(make_samples(n=12), {"S01": 1.2, "S07": 2.0}))["acid"]
    failed, blanks = result.remarks
    assert failed.startswith(
        "2 sample(s) below a detection limit of at most 2 % m/m took no part in the fit; predicted"
    )
    assert failed.endswith("interval: S07 (check labels, laboratory values, interference)")
    assert blanks.startswith("leaving them out cuts off the low end at 1.727 % m/m: prepare blanks and low standards")
    assert all(remark in str(result) for remark in result.remarks)
    fine = calibrate(make_recipe(FIXED), below(make_samples(n=12), {"S01": 1.2}))["acid"]
    assert fine.remarks[0].endswith("none of them is predicted above its limit")
    assert fine.to_dict()["below_limit"]["contradicts"] == [False]


def test_no_such_sample(make_samples, make_recipe):
    result = calibrate(make_recipe(FIXED), make_samples())["acid"]
    assert result.below_limit is None
    assert result.remarks == ()


def test_spectra_recorded_otherwise_are_refused(make_samples, make_recipe):
    samples = make_samples()
    stated = replace(samples, spectra=samples.spectra.with_notes({"technique": "ATR"}))
    model = calibrate(make_recipe(FIXED), stated).model
    other = replace(samples, spectra=samples.spectra.with_notes({"technique": "transmission"}))
    with pytest.raises(AcquisitionMismatchError, match="technique is transmission"):
        check_below_limit(model, [below(other, {"S01": 1.0}).subset([0])])
