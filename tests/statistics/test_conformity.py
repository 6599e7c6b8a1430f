"""Guard bands and three outcomes against computed cases; shares of false acceptance by simulation."""

import math

import numpy as np
import pytest
from scipy import special, stats

from quant.errors import ParameterError
from quant.statistics.conformity import (
    ACCEPT,
    CANNOT_DECIDE,
    NOT_APPLICABLE,
    REJECT,
    UNDECIDED,
    decide,
    guard_band,
    probability_of_conformity,
    replicates_to_decide,
)

Z95 = 1.644854


def test_the_toluene_case():
    # L = 890 ppm, u = 40 (computed): pass up to 824.2, fail from 955.8; with k = 2 810 and 970.
    found = decide(800, 40, 890, Z95)
    assert (found.acceptance_limit, found.rejection_limit) == pytest.approx((824.2, 955.8), abs=0.05)
    wide = decide(800, 40, 890, 2.0)
    assert (wide.acceptance_limit, wide.rejection_limit) == (810.0, 970.0)
    outcomes = [decide(x, 40, 890, 2.0).outcome for x in (810, 810.1, 890, 970, 970.1)]
    assert outcomes == [ACCEPT, UNDECIDED, UNDECIDED, UNDECIDED, REJECT]
    for x, p in ((800, 0.9878), (824.2, 0.9500), (850, 0.8413), (890, 0.5), (930, 0.1587), (955.8, 0.0500)):
        assert decide(x, 40, 890, Z95).conformity == pytest.approx(p, abs=5.1e-5)
    assert "accepted up to" in str(found)


def test_jcgm_106():
    # Breakdown voltage (from memory, number recomputed): limit -5.40 V, result -5.47 V, u = 0.05 V.
    assert probability_of_conformity(-5.47, 0.05, -5.40) == pytest.approx(0.91924, abs=5e-6)
    # A result on the acceptance limit, guard band U = 2u (computed).
    assert probability_of_conformity(-2.0, 1.0, 0.0) == pytest.approx(0.97725, abs=5e-6)


@pytest.mark.parametrize(
    ("risk", "factor"), [(0.2, 0.8416), (0.05, 1.6449), (0.025, 1.9600), (0.01, 2.3263), (0.001, 3.0902)]
)
def test_the_factor_belongs_to_the_risk(risk, factor):
    # Quantiles computed: 1.6449·u for 5 %, 2.3263·u for 1 %.
    assert probability_of_conformity(-factor, 1.0, 0.0) == pytest.approx(1 - risk, abs=2e-5)
    assert guard_band(2.0, factor) == 2 * factor


@pytest.mark.parametrize("dof", [1, 2, 3, 4, 9, 30, 101, 5000])
def test_few_degrees_of_freedom_take_students_t(dof):
    for t in (-12.0, -2.0, -0.3, 0.0, 1.0, 5.0):
        p = probability_of_conformity(-t, 1.0, 0.0, degrees_of_freedom=dof)
        assert p == pytest.approx(special.stdtr(dof, t), rel=1e-6, abs=1e-13)
        assert p == probability_of_conformity(-t, 1.0, 0.0, degrees_of_freedom=dof + 0.9)  # fractions are cut off
    assert probability_of_conformity(1.0, 1.0, 0.0, degrees_of_freedom=1e9) == pytest.approx(special.ndtr(-1.0))


def test_a_lower_limit_mirrors_an_upper_one():
    for x in (98.0, 98.9, 99.2, 99.6):
        lower, upper = decide(x, 0.2, 99.0, Z95, side="lower"), decide(-x, 0.2, -99.0, Z95)
        assert (lower.outcome, lower.conformity) == (upper.outcome, upper.conformity)
        assert lower.acceptance_limit == -upper.acceptance_limit


def test_what_comes_before_any_decision():
    assert decide(1, 0.1, 890, Z95, applicable=False, smallest_decidable=1000).outcome == NOT_APPLICABLE
    blind = decide(1, 0.1, 890, Z95, smallest_decidable=890.1)
    assert (blind.outcome, blind.conformity) == (CANNOT_DECIDE, None)
    assert decide(1, 0.1, 890, Z95, smallest_decidable=890).outcome == ACCEPT
    certain = decide(890, 0.0, 890, Z95)
    assert (certain.outcome, certain.conformity) == (ACCEPT, 1.0)
    assert decide(891, 0.0, 890, Z95).conformity == 0.0


def test_replicates_shrink_repeatability_only():
    # 850 against 890, factor 2: u has to come down to 20. Calibration 12: 16² is left for 40²/m, so m = 6.25 -> 7.
    number = replicates_to_decide(850, 890, 2.0, 12.0, 40.0)
    assert number == 7
    for m, outcome in ((number, ACCEPT), (number - 1, UNDECIDED)):
        assert decide(850, math.hypot(12, 40 / math.sqrt(m)), 890, 2.0).outcome == outcome
    assert replicates_to_decide(930, 890, 2.0, 12.0, 40.0) == 7  # the same on the other side
    assert replicates_to_decide(850, 890, 2.0, 12.0, 32.0) == 4  # exactly four


def test_where_the_calibration_alone_spans_the_limit_no_number_decides():
    for fixed in (20.0, 25.0):
        assert replicates_to_decide(850, 890, 2.0, fixed, 40.0) is None
        assert decide(850, math.hypot(fixed, 40 / math.sqrt(10**9)), 890, 2.0).outcome == UNDECIDED
    assert replicates_to_decide(890, 890, 2.0, 0.0, 40.0) is None
    assert replicates_to_decide(850, 890, 2.0, 20.0, 0.0) == 1
    assert replicates_to_decide(850, 890, 2.0, 20.1, 0.0) is None


@pytest.mark.parametrize(("risk", "dof"), [(0.05, 6), (0.05, 60), (0.01, 12)])
def test_20000_batches_at_the_limit_are_accepted_at_most_at_the_stated_risk(risk, dof):
    rng = np.random.default_rng([20261201, dof])
    n, limit, u = 20_000, 890.0, 40.0
    value = limit + u * rng.normal(size=n)
    estimated = u * np.sqrt(rng.chisquare(dof, n) / dof)
    highest = risk + 3 * math.sqrt(risk * (1 - risk) / n)

    def accepted(factor):
        return np.mean([decide(x, s, limit, factor).outcome == ACCEPT for x, s in zip(value, estimated, strict=True)])

    assert accepted(stats.t.ppf(1 - risk, dof)) <= highest
    assert accepted(0.0) > 0.45  # control: simple acceptance shares the risk evenly
    if dof == 6:
        assert accepted(stats.norm.ppf(1 - risk)) > highest  # control: the normal quantile takes s for σ


def test_20000_batches_at_half_the_limit_are_accepted():
    rng = np.random.default_rng(20261202)
    n, limit, dof = 20_000, 890.0, 6
    u = limit / 10
    value, estimated = limit / 2 + u * rng.normal(size=n), u * np.sqrt(rng.chisquare(dof, n) / dof)
    factor = stats.t.ppf(0.95, dof)
    outcomes = [decide(x, s, limit, factor).outcome for x, s in zip(value, estimated, strict=True)]
    assert outcomes.count(ACCEPT) >= 0.9 * n
    assert outcomes.count(REJECT) == 0


def test_impossible_questions_are_refused():
    with pytest.raises(ParameterError, match="standard_uncertainty = -1"):
        decide(1, -1, 2, Z95)
    with pytest.raises(ParameterError, match="finite"):
        decide(math.nan, 1, 2, Z95)
    with pytest.raises(ParameterError, match="side"):
        decide(1, 1, 2, Z95, side="left")
    with pytest.raises(ParameterError, match="1 or more"):
        probability_of_conformity(1, 1, 2, degrees_of_freedom=0.5)
    with pytest.raises(ParameterError, match="0 or more"):
        replicates_to_decide(1, 2, -1.0, 0.1, 0.1)
