"""The laboratory's standard error: stated, from repeats, or neither."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.laboratory import FROM_REPEATS, STATED, laboratory_of
from quant.model.manifest import from_manifest, to_manifest
from quant.spectra.reference_table import Repeatability


def repeated(samples, determinations, spread=0.2, freedom=12):
    return replace(
        samples,
        determinations=np.array(determinations)[:, None],
        repeatability={"acid": Repeatability(spread, freedom, 8)},
    )


def test_from_repeats(make_samples):
    # By hand: s = 0.2, half of the samples determined once, half four times: 0.2·√((1 + 1/4)/2) = 0.158114.
    analyte, source, found = laboratory_of(repeated(make_samples(n=12), [1, 4] * 6), "acid")
    assert analyte.laboratory_error == found.standard_error == pytest.approx(0.158113883)
    assert found.standard_errors == pytest.approx([0.2, 0.1] * 6)
    assert (source, found.used) == (FROM_REPEATS, True)
    assert found.remarks() == (
        "repeated determinations have a standard deviation of 0.2 % m/m (12 degrees of freedom, 8 samples determined "
        "more than once); values are means of 1 to 4 determinations, their root mean square standard error is 0.158 "
        "% m/m; used as the laboratory error",
    )


def test_few_repeats_are_told(make_samples):
    _, _, found = laboratory_of(repeated(make_samples(n=12), [2] * 12, freedom=5), "acid")
    assert "values are means of 2 determinations" in found.remarks()[0]
    assert found.remarks()[0].endswith("used as the laboratory error though known from few: repeat more samples")


def test_what_the_recipe_states_comes_first(make_samples):
    analyte, source, found = laboratory_of(repeated(make_samples(n=12, laboratory_error=0.3), [2] * 12), "acid")
    assert (analyte.laboratory_error, source, found.used) == (0.3, STATED, False)
    assert found.remarks()[0].endswith("; the laboratory error is the one stated in the recipe")


def test_copies_are_no_determinations(make_samples):
    analyte, source, found = laboratory_of(repeated(make_samples(n=12), [2] * 12, spread=0.0), "acid")
    assert (analyte.laboratory_error, source, found.used) == (None, "", False)
    assert "they may be copies: not used" in found.remarks()[0]


def test_neither(make_samples):
    analyte, source, found = laboratory_of(make_samples(n=12), "acid")
    assert (analyte.laboratory_error, source, found) == (None, "", None)
    assert laboratory_of(make_samples(n=12, laboratory_error=0.1), "acid")[1:] == (STATED, None)


def test_the_model_carries_it(make_samples, make_recipe):
    samples = repeated(make_samples(n=12), [1, 4] * 6, spread=0.002)
    result = calibrate(make_recipe('[validation]\nsamples = ["S03", "S05"]\n[regression]\nfactors = 2'), samples)[
        "acid"
    ]
    count = np.array([1, 4, 4, 4, 1, 4, 1, 4, 1, 4])  # S03 and S05 left
    expected = 0.002 * np.sqrt(np.mean(1 / count))
    model = from_manifest(*to_manifest(result.model))
    assert model.uncertainty.laboratory_error == model.analyte.laboratory_error == pytest.approx(expected)
    assert model.uncertainty.laboratory_error_source == FROM_REPEATS
    assert model.analyte == result.model.analyte
    assert result.laboratory.determinations.tolist() == count.tolist()
    assert result.to_dict()["laboratory"]["standard_error"] == pytest.approx(expected)
    assert result.laboratory.remarks()[0] in str(result)
