"""Purity by difference across models: the sum, its uncertainty with and without known correlations, an upper bound."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.purity import FROM_LEFT_OUT, LARGEST_POSSIBLE, purity
from quant.errors import NotEnoughDataError, SampleMismatchError
from quant.prediction.predict import predict
from quant.statistics.purity import UPPER_BOUND


@pytest.fixture
def acid(make_recipe, make_samples):
    """A calibration, and predictions of new samples."""
    result = calibrate(make_recipe("[regression]\nfactors = 2"), make_samples(20))
    return result, predict(result.model, make_samples(5, seed=3).spectra)


def named(found, name, **changes):
    rows = tuple(replace(row, analyte=name, **changes) for row in found.predictions)
    return replace(found, predictions=rows)


def test_one_impurity(acid):
    _, found = acid
    result = purity([found])
    row = found.predictions[0]
    assert result[row.sample].value == pytest.approx(100 - row.value)
    assert result[row.sample].standard_uncertainty == pytest.approx(row.standard_error)
    assert result.statement == UPPER_BOUND
    assert UPPER_BOUND in str(result)


def test_correlations_are_those_of_left_out_errors(acid):
    calibration, found = acid
    first = calibration.analytes[0]
    other = replace(first, analyte="water")  # the same errors: correlation 1
    both = replace(calibration, analytes=(first, other))
    row = found.predictions[0]
    known = purity([found, named(found, "water")], both)
    assert known.correlation_source == FROM_LEFT_OUT
    assert known[row.sample].standard_uncertainty == pytest.approx(2 * row.standard_error)
    opposite = replace(
        first.cross_validation, reference=2 * first.cross_validation.left_out_predictions(2) - first.reference
    )
    contrary = replace(calibration, analytes=(first, replace(other, cross_validation=opposite)))
    assert purity([found, named(found, "water")], contrary)[row.sample].standard_uncertainty == pytest.approx(
        0, abs=1e-6
    )
    unknown = purity([found, named(found, "water")])
    assert unknown.correlation_source == LARGEST_POSSIBLE
    assert unknown[row.sample].standard_uncertainty == pytest.approx(2 * row.standard_error)


def test_a_model_that_does_not_apply_gives_no_purity(acid):
    _, found = acid
    strange = named(found, "water", applicability="not applicable")
    result = purity([found, strange])
    assert {row.value for row in result.samples} == {None}
    assert result.samples[0].note == "the calibration of water is not applicable to this spectrum"


def test_what_does_not_belong_together_is_refused(acid):
    _, found = acid
    with pytest.raises(NotEnoughDataError, match="There is no prediction"):
        purity([])
    with pytest.raises(SampleMismatchError, match="expected different ones in one unit"):
        purity([found, found])
    with pytest.raises(SampleMismatchError, match="expected different ones in one unit"):
        purity([found, named(found, "water", unit="mg/kg")])
    with pytest.raises(SampleMismatchError, match="different samples"):
        purity([found, replace(named(found, "water"), predictions=named(found, "water").predictions[:2])])


def test_negative_contents_are_taken_as_they_are(acid):
    _, found = acid
    assert purity([named(found, "water", value=-0.2)]).samples[0].value == pytest.approx(100.2)
    assert np.isfinite(purity([found], total=1.0).samples[0].value)
