"""The record of all figures of merit, against published data as other programs summarise them."""

import json
from pathlib import Path

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.result import field_docs
from quant.statistics.figures import (
    Figures,
    figures_of_merit,
    press,
    range_error_ratio,
    rmse_confidence_interval,
    standard_error_of_calibration,
)

REFERENCE_VALUES = json.loads(
    (Path(__file__).parent.parent / "reference_values" / "figures.json").read_text(encoding="utf-8")
)
CASES = {"gasoline": REFERENCE_VALUES["gasoline_test_2_components"], **REFERENCE_VALUES["tecator_test"]}

PREDICTED = np.arange(2.0, 17.0, 2.0)
REFERENCE = np.array([2.3, 3.9, 6.2, 8.4, 10.1, 12.6, 14.2, 16.9])


@pytest.mark.parametrize("name", CASES)
def test_published_data_as_other_programs_summarise_them(name):
    # gasoline: Kalivas 1997; tecator: Borggaard & Thodberg 1992; statistics computed by R and SciPy, see figures.json.
    case = CASES[name]
    known = case["statistics"]
    figures = figures_of_merit(case["predicted"], case["reference"], kind="RMSEP", unit="x")
    other = figures_of_merit(case["predicted"], case["reference"], direction="predicted on reference")
    assert figures.bias_test is not None
    assert figures.line_test is not None
    found = {
        "n": figures.n_samples,
        "bias": figures.bias,
        "sep_bias_corrected": figures.sep,
        "rmsep": figures.rmse,
        "r2_determination": figures.r2_determination,
        "r_squared_correlation": figures.correlation_squared,
        "slope_ref_on_pred": figures.slope,
        "intercept_ref_on_pred": figures.intercept,
        "slope_pred_on_ref": other.slope,
        "intercept_pred_on_ref": other.intercept,
        "rpd_sd_over_sep": figures.rpd,
        "t_bias": figures.bias_test.t,
        "p_bias_two_sided": figures.bias_test.p,
        "t_crit_bias_95": figures.bias_test.critical,
        "t_slope_vs_1": figures.line_test.slope_t,
        "p_slope_two_sided": figures.line_test.slope_p,
        "residual_sd_ref_on_pred": figures.residual_sd,
    }
    assert set(found) == set(known)
    for key, value in known.items():
        assert found[key] == pytest.approx(value, rel=1e-9), key


def test_the_record_holds_what_the_functions_give():
    figures = figures_of_merit(PREDICTED, REFERENCE, unit="% m/m", kind="RMSEC", n_factors=2, probability=0.9)
    assert figures.sec == standard_error_of_calibration(PREDICTED, REFERENCE, 2)
    assert figures.press == press(PREDICTED, REFERENCE)
    assert figures.range_error_ratio == range_error_ratio(PREDICTED, REFERENCE)
    assert (figures.rmse_low, figures.rmse_high) == rmse_confidence_interval(figures.rmse, 8, 0.9)
    assert figures.bias_test is not None
    assert figures.bias_test.probability == 0.9
    assert figures.line_test is not None
    assert (figures.line_test.slope, figures.line_test.intercept) == (figures.slope, figures.intercept)


def test_sets_too_small_say_what_they_can_and_no_more():
    one = figures_of_merit([1.0], [2.0], n_factors=1)
    assert (one.n_samples, one.bias, one.rmse, one.press) == (1, -1.0, 1.0, 1.0)
    for missing in ("sec", "sep", "r2_determination", "correlation_squared", "rpd", "slope", "bias_test", "line_test"):
        assert getattr(one, missing) is None, missing
    two = figures_of_merit([1.0, 2.0], [2.0, 2.5])
    assert (two.slope, two.intercept) == (0.5, 1.5)
    assert two.bias_test is not None
    assert two.residual_sd is None
    assert two.line_test is None
    with pytest.raises(NotEnoughDataError, match="0 pair"):
        figures_of_merit([], [])


def test_samples_without_spread_say_what_they_can_and_no_more():
    perfect = figures_of_merit(REFERENCE, REFERENCE)
    assert (perfect.rmse, perfect.sep, perfect.r2_determination, perfect.slope) == (0.0, 0.0, 1.0, 1.0)
    assert (perfect.rpd, perfect.bias_test, perfect.line_test) == (None, None, None)
    one_level = figures_of_merit([9.9, 10.1, 10.3], [10.0, 10.0, 10.0])
    assert one_level.sep == pytest.approx(0.2)
    assert (one_level.r2_determination, one_level.correlation_squared) == (None, None)
    assert one_level.rpd == 0.0


def test_what_is_wrong_is_refused_and_not_left_out():
    with pytest.raises(SampleMismatchError, match="2 values of predicted values but 3"):
        figures_of_merit([1.0, 2.0], [1.0, 2.0, 3.0])
    with pytest.raises(ParameterError, match="not finite"):
        figures_of_merit([1.0, np.nan], [1.0, 2.0])
    with pytest.raises(ParameterError, match="direction = 'upwards'"):
        figures_of_merit([1.0], [2.0], direction="upwards")
    with pytest.raises(ParameterError, match="kind = 'SEP'"):
        figures_of_merit([1.0], [2.0], kind="SEP")
    with pytest.raises(ParameterError, match="n_factors = -1"):
        figures_of_merit([1.0, 2.0], [2.0, 3.0], n_factors=-1)


def test_the_record_prints_with_units_and_documents_its_keys():
    figures = figures_of_merit(PREDICTED, REFERENCE, unit="% m/m", kind="RMSECV")
    text = str(figures)
    lines = {" ".join(line.split()) for line in text.splitlines()}
    assert {"samples 8", "RMSECV 0.4359 % m/m", "bias -0.3250 % m/m", "bias significant yes", "slope 1.039"} <= lines
    assert any(line.startswith("Q² ") for line in lines)
    assert not any(line.startswith("SEC") for line in lines)
    assert list(field_docs(Figures)) == list(figures.to_dict())
    assert json.loads(figures.to_json())["bias_test"]["n_samples"] == 8
