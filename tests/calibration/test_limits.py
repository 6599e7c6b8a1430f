"""Limits and intervals are made of left-out samples, and can be computed by hand."""

import numpy as np
import pytest
from scipy import stats

from quant.calibration.calibrate import calibrate
from quant.calibration.limits import (
    LOST_TO_LEVERAGE,
    LOST_TO_RANGE,
    LOST_TO_RESIDUAL,
    applicability_limits,
    degrees_of_freedom,
)
from quant.errors import NotEnoughDataError
from quant.regression.pls import PLS

TWO = "[regression]\nfactors = 2\n"


def test_parts_of_the_interval_by_hand(make_samples, make_recipe):
    samples = make_samples(n=12, replicates=2, laboratory_error=0.01)
    found = calibrate(make_recipe(TWO), samples)["acid"]
    crossed = found.cross_validation
    error, leverage = crossed.predicted[0, 2] - crossed.reference, crossed.leverage[0, 2]
    parts = found.uncertainty
    assert parts == found.model.uncertainty
    assert parts.s0 == pytest.approx(np.sqrt(np.mean(error**2 / (1 + leverage))))
    assert parts.degrees_of_freedom == 12 - 2 - 1
    assert parts.t == pytest.approx(stats.t.ppf(0.975, 9))
    assert parts.replicate_sd == pytest.approx(np.sqrt(crossed.replicate_variance[2]))
    assert (parts.laboratory_error, parts.replicates) == (0.01, 2.0)


def test_limits_by_hand(make_samples, make_recipe):
    found = calibrate(make_recipe(TWO), make_samples(n=12))["acid"]
    crossed, limits = found.cross_validation, found.limits

    def upper(values, probability, forward, back):
        scaled = forward(values)
        wide = stats.t.ppf(probability, 11) * scaled.std(ddof=1) * np.sqrt(1 + 1 / 12)
        return back(scaled.mean() + wide)

    residual, excess = crossed.residual[0, 2], np.maximum(crossed.leverage[0, 2] - 1 / 12, 0)
    assert limits.residual_warn == pytest.approx(upper(residual, 0.95, np.log, np.exp))
    assert limits.residual_stop == pytest.approx(upper(residual, 1 - LOST_TO_RESIDUAL, np.log, np.exp))
    cube = np.cbrt, lambda x: x**3
    assert limits.leverage_warn == pytest.approx(1 / 12 + upper(excess, 0.95, *cube))
    assert limits.leverage_stop == pytest.approx(1 / 12 + upper(excess, 1 - LOST_TO_LEVERAGE, *cube))
    assert (limits.lowest, limits.highest) == (1.0, 9.0)
    assert limits.margin_t == pytest.approx(stats.t.ppf(1 - LOST_TO_RANGE, 9))


def test_all_stop_limits_together_lose_at_most_one_in_a_hundred():
    assert LOST_TO_RESIDUAL + LOST_TO_LEVERAGE + LOST_TO_RANGE <= 0.01


def test_a_perfect_fit_has_limits_above_rounding_errors(make_samples, make_recipe):
    samples = make_samples(n=12)
    found = calibrate(make_recipe(TWO), samples)["acid"]
    crossed = found.cross_validation
    crossed.residual[:] = 0.0
    limits = applicability_limits(crossed, 2, samples.spectra.values, 9)
    assert 0 < limits.residual_warn <= limits.residual_stop < 1e-15


def test_batches_count_as_the_units(make_samples, make_recipe):
    plain = calibrate(make_recipe(TWO + '[cross_validation]\nscheme = "interleaved"\nfolds = 4'), make_samples(n=12))
    notes = [{"batch": "ABCD"[i % 4]} for i in range(12)]
    batches = calibrate(make_recipe(TWO), make_samples(n=12, notes=notes))
    assert plain["acid"].cross_validation.rmsecv == pytest.approx(batches["acid"].cross_validation.rmsecv)
    assert batches["acid"].limits.residual_warn > plain["acid"].limits.residual_warn  # four units tell less than twelve


def test_no_degree_of_freedom_left(make_samples, make_recipe):
    recipe = make_recipe('[regression]\nfactors = 3\n[cross_validation]\nscheme = "leave_one_out"')
    assert calibrate(recipe, make_samples(n=5))["acid"].uncertainty.degrees_of_freedom == 1
    assert degrees_of_freedom(PLS(4), 6, 4) == 1
    with pytest.raises(
        NotEnoughDataError, match="5 samples leave no degree of freedom for 4 factors; expected at least 6"
    ):
        degrees_of_freedom(PLS(4), 5, 4)
