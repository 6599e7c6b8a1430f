"""Detection figures against their definitions, and where limits are refused for them."""

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.detection_limits import EXTRAPOLATED, FROM_LEFT_OUT, FROM_REPLICATES, FROM_RESIDUALS
from quant.statistics.detection import detection_limits
from quant.statistics.detection_interval import detection_interval

RECIPE = "[regression]\nfactors = 2\n"
BAND = '[regression]\nmethod = "band_area"\nbands = [{ signal = "height_at", position = 1730 }]\n'


def test_a_line_is_that_of_currie(make_recipe, make_samples):
    result = calibrate(make_recipe(BAND), make_samples()).analytes[0]
    found, line = result.audit.detection, result.model.method.line_
    expected = detection_limits(line)
    assert (found.line.critical, found.line.detection) == pytest.approx((expected.critical, expected.detection))
    assert [row.way for row in found.ich] == ["residual SD", "intercept SD"]
    assert found.method_sd == pytest.approx(line.residual_sd / line.slope)
    assert found.smallest_decidable == found.line.quantification == pytest.approx(10 * expected.zero_sd)
    assert result.model.smallest_decidable == found.smallest_decidable
    assert result.model.smallest_from == "limit of quantification"


@pytest.mark.parametrize("option", ["through_origin = true", 'curve = "quadratic"', 'line_weights = "1/x"'])
def test_other_lines_count_a_result_at_zero(make_recipe, make_samples, option):
    result = calibrate(make_recipe(BAND + option), make_samples(values=np.linspace(0.0, 9.0, 12) + 0.1)).analytes[0]
    found, method = result.audit.detection, result.model.method
    at_zero = method.inverse_interval(method.signal_at([0.0]), 2.0).standard_error[0]
    assert found.line.zero_sd == pytest.approx(at_zero)


@pytest.mark.parametrize(("replicates", "source"), [(1, FROM_RESIDUALS), (4, FROM_REPLICATES)])
def test_pls_is_that_of_allegrini_and_olivieri(make_recipe, make_samples, replicates, source):
    samples = make_samples(replicates=replicates, laboratory_error=0.01)
    result = calibrate(make_recipe(RECIPE), samples).analytes[0]
    found = result.audit.detection
    vector = result.model.method.coefficients_[-1]
    sensitivity = 1 / np.linalg.norm(vector)
    noise = found.signal_sd
    assert noise == pytest.approx(0.002 / np.sqrt(replicates), rel=0.35)  # as simulated
    expected = detection_interval(
        result.reference, result.picture.leverage, sensitivity=sensitivity, signal_sd=noise, reference_sd=0.01
    )
    assert found.interval.to_dict() == pytest.approx(expected.to_dict())
    assert found.signal_sd_source == source
    assert found.smallest_decidable == expected.quantification_high
    assert 0 < found.selectivity <= 1


def test_without_a_laboratory_error_that_of_left_out_samples_serves(make_recipe, make_samples):
    result = calibrate(make_recipe(RECIPE), make_samples()).analytes[0]
    found = result.audit.detection
    assert (found.reference_sd, found.reference_sd_source) == (result.uncertainty.s0, FROM_LEFT_OUT)


def test_far_from_zero_nothing_is_refused(make_recipe, make_samples):
    result = calibrate(make_recipe(RECIPE), make_samples(values=np.linspace(85.0, 90.0, 12))).analytes[0]
    found = result.audit.detection
    assert (found.remark, found.smallest_decidable, result.model.smallest_decidable) == (EXTRAPOLATED, None, None)
