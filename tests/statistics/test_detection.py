"""Critical value and detection limit against computed cases; how often they keep their word is counted elsewhere."""

import math

import numpy as np
import pytest
from scipy import stats

from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.detection import (
    NONCENTRAL_T,
    TWICE_T,
    critical_value,
    detection_limit,
    detection_limits,
    zero_standard_deviation,
)
from quant.statistics.straight_line import fit_line, fit_line_through_origin

# Miller & Miller, fluorescein: from memory, reproduced.
FLUORESCEIN = fit_line([0, 2, 4, 6, 8, 10, 12], [2.1, 5.0, 9.0, 12.6, 17.3, 21.0, 24.7])


def test_currie_with_known_sigma():
    # Currie 1968 (from memory): L_C = 1.645·s0, L_D = 3.29·s0.
    assert critical_value(1.0, math.inf) == pytest.approx(1.645, abs=5e-4)
    assert detection_limit(1.0, math.inf) == pytest.approx(3.290, abs=5e-4)
    assert detection_limit(2.0, math.inf, way=TWICE_T) == pytest.approx(6.580, abs=1e-3)


@pytest.mark.parametrize(("dof", "expected"), [(5, 4.03), (9, 3.67), (19, 3.46)])
def test_twice_t(dof, expected):
    assert detection_limit(1.0, dof, way=TWICE_T) == pytest.approx(expected, abs=6e-3)  # computed
    assert critical_value(1.0, dof) == pytest.approx(expected / 2, abs=3e-3)


@pytest.mark.parametrize("dof", [1, 2, 5, 10, 30, 500])
@pytest.mark.parametrize(("alpha", "beta"), [(0.05, 0.05), (0.01, 0.2), (0.4, 0.001)])
def test_the_noncentral_t_leaves_beta_below_the_critical_value(dof, alpha, beta):
    # By integration over the estimated standard deviation, a way of its own: P(Z + δ < t·sqrt(χ²/ν)).
    delta, t = detection_limit(1.0, dof, alpha, beta), critical_value(1.0, dof, alpha)
    quantiles = (np.arange(20_000) + 0.5) / 20_000
    missed = np.mean(stats.norm.cdf(t * np.sqrt(stats.chi2.ppf(quantiles, dof) / dof) - delta))
    assert missed == pytest.approx(beta, rel=2e-3)


def test_the_noncentral_t_is_close_to_twice_t_from_ten_degrees_of_freedom():
    # Clayton 1987 (from memory).
    for dof in (10, 20, 50):
        exact, twice = detection_limit(1.0, dof), detection_limit(1.0, dof, way=TWICE_T)
        assert 0.97 * twice < exact < twice


def test_twice_t_is_exact_where_each_calibration_states_its_own_limit():
    # By integration over the estimated s0: a sample at 2·t·s0 is missed where Z < -t·s0/σ, in 5 % by the law of t.
    dof = 4
    s0 = np.sqrt(stats.chi2.ppf((np.arange(20_000) + 0.5) / 20_000, dof) / dof)
    for way, missed in ((TWICE_T, 0.05), (NONCENTRAL_T, stats.t.cdf(2.1318 - detection_limit(1.0, dof), dof))):
        at_limit, critical = detection_limit(1.0, dof, way=way) * s0, critical_value(1.0, dof) * s0
        assert np.mean(stats.norm.cdf(critical - at_limit)) == pytest.approx(missed, rel=2e-3)
    assert 0.05 < missed < 0.07


def test_the_calibration_term():
    # Fluorescein (computed): 3.3·(s/b)·sqrt(1 + 0.46429) = 0.8954, against 0.7400 without the calibration's share.
    assert 3.3 * zero_standard_deviation(FLUORESCEIN) == pytest.approx(0.8954, abs=5e-5)
    assert 3.3 * zero_standard_deviation(FLUORESCEIN, readings=10**12) == pytest.approx(
        0.7400 * math.sqrt(0.46429), abs=5e-5
    )
    found = detection_limits(FLUORESCEIN, readings=4)
    assert found.zero_sd == pytest.approx(0.432848 / 1.930357 * math.sqrt(1 / 4 + 1 / 7 + 36 / 112), rel=1e-6)
    assert found.critical == pytest.approx(2.01505 * found.zero_sd, rel=1e-5)
    assert found.critical < found.detection < found.quantification == pytest.approx(10 * found.zero_sd)
    assert "detection limit (5 % missed)" in str(found)


def test_through_the_origin_and_with_weights():
    origin = fit_line_through_origin([1, 2, 3], [1.1, 1.9, 3.2])
    assert zero_standard_deviation(origin, 2) == pytest.approx(origin.residual_sd / origin.slope / math.sqrt(2))
    line = fit_line([1, 2, 3, 4], [1.1, 1.9, 3.2, 4.4], weights=[4, 1, 0.5, 0.25])
    share = 1 / 4 + 1 / 5.75 + line.x_mean**2 / line.sxx  # the reading at zero weighs as the lowest standard
    assert zero_standard_deviation(line, weight=4) == pytest.approx(line.residual_sd / line.slope * math.sqrt(share))
    falling = fit_line([0, 1, 2, 3], [5.0, 4.1, 2.9, 2.0])
    assert detection_limits(falling).critical > 0


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError, match="slope zero"):
        zero_standard_deviation(fit_line([1, 2, 3], [1, 1, 1]))
    with pytest.raises(NotEnoughDataError, match="degrees of freedom"):
        detection_limits(fit_line([1, 2], [1, 3]))
    with pytest.raises(ParameterError, match="readings = 0"):
        zero_standard_deviation(FLUORESCEIN, 0)
    with pytest.raises(ParameterError, match="below 1"):
        detection_limit(1.0, 5, 0.5, 0.5)
    with pytest.raises(ParameterError, match="share"):
        critical_value(1.0, 5, 0.0)
    with pytest.raises(ParameterError, match="zero_sd"):
        critical_value(-1.0, 5)
    with pytest.raises(ParameterError, match="way"):
        detection_limit(1.0, 5, way="thrice t")
