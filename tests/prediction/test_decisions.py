"""Decisions against a limit: outcome, guard band, probability, what would settle it, and what comes first."""

from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from quant.errors import ParameterError
from quant.prediction.decisions import decide_sample, decision_rule, guard_factor
from quant.prediction.predict import predict
from quant.prediction.result import ACCEPT
from quant.prediction.uncertainty import standard_uncertainty
from quant.statistics import conformity
from quant.statistics.conformity import CANNOT_DECIDE, REJECT, UNDECIDED


def with_limit(model, limit, **options):
    return replace(model, decision=decision_rule(model, limit, **options))


def test_one_word_for_acceptance():
    assert ACCEPT == conformity.ACCEPT


@pytest.mark.parametrize("risk", [0.5, 0.05, 0.025, 0.001])
@pytest.mark.parametrize("freedom", [1, 2, 12, 36, 500])
def test_the_factor_is_the_quantile_of_student(risk, freedom):
    assert guard_factor(risk, freedom) == pytest.approx(stats.t.ppf(1 - risk, freedom), rel=1e-9, abs=1e-12)


@pytest.mark.parametrize(("kind", "sign"), [("upper", 1.0), ("lower", -1.0)])
def test_guard_band_by_hand(make_model, new_spectra, kind, sign):
    model = make_model(laboratory_error=0.01)
    new = new_spectra(np.array([5.0]), 2)
    [plain] = predict(model, new).predictions
    known = model.uncertainty
    u = np.sqrt(plain.standard_error**2 - 0.01**2)
    band = stats.t.ppf(0.95, known.degrees_of_freedom) * u
    for distance, outcome in ((1.001, ACCEPT), (0.999, UNDECIDED), (-0.999, UNDECIDED), (-1.001, REJECT)):
        limit = plain.value + sign * distance * band
        [row] = predict(with_limit(model, limit, kind=kind), new).predictions
        assert row.decision == outcome
        assert (row.uncertainty, row.guard_band, row.limit) == pytest.approx((u, band, limit))
        expected = stats.t.cdf(sign * (limit - row.value) / u, known.degrees_of_freedom)
        assert row.conformity == pytest.approx(expected)


def test_the_laboratory_counts_where_it_cannot_be_taken_out(make_model):
    assert standard_uncertainty(make_model(), 0.2) == 0.2
    model = make_model(laboratory_error=1.0)  # far more than half of s0²
    assert standard_uncertainty(model, 0.2) == 0.2


def test_not_applicable_comes_first(make_model, new_spectra):
    model = replace(with_limit(make_model(), 100.0), smallest_decidable=200.0)
    [row] = predict(model, new_spectra(np.array([30.0]), 2)).predictions
    assert row.applicability == "not applicable"
    assert row.decision == "not applicable to this spectrum"
    assert row.conformity is None


def test_a_limit_below_what_can_be_seen_is_never_decided(make_model, new_spectra):
    model = with_limit(make_model(), 4.0)
    new = new_spectra(np.array([1.5, 8.0]), 2)
    assert [row.decision for row in predict(model, new).predictions] == [ACCEPT, REJECT]
    blind = replace(model, smallest_decidable=4.5, smallest_from="limit of quantification")
    found = predict(blind, new)
    assert {row.decision for row in found.predictions} == {CANNOT_DECIDE}
    assert {row.decision_remark for row in found.predictions} == {
        "the limit lies below the limit of quantification of 4.5 % m/m"
    }
    assert not found.accepted


def settled(model, value, limit, count=1, uncertainty=0.1):
    rule = decision_rule(model, limit)
    found = decide_sample(model, rule, value=value, uncertainty=uncertainty, n_spectra=count, applicable=True)
    assert found["decision"] == UNDECIDED
    return found["decision_remark"]


def test_what_would_settle_it(make_model):
    base = make_model(replicates=4)
    model = replace(base, uncertainty=replace(base.uncertainty, replicate_sd=0.08, replicates=4.0))
    # fixed² = 0.1² - 0.08²/1 = 0.06²; the factor is t(0.95, 12) = 1.7823
    assert settled(model, 4.0, 4.0 + 1.7823 * 0.08) == "the mean of 3 spectra would decide, if it stayed at 4"
    far = settled(model, 4.0, 4.0 + 1.7823 * 0.063)
    assert far.startswith(
        "the mean of 18 spectra would decide, if it stayed at 4; the calibration's samples have 4 each"
    )
    assert settled(model, 4.0, 4.0 + 1.7823 * 0.059).startswith(
        "no number of replicates will decide: the calibration's"
    )
    single = replace(base, uncertainty=replace(base.uncertainty, replicate_sd=None))
    assert settled(single, 4.0, 4.1).startswith("whether more spectra would decide cannot be told")


def test_an_uncertainty_without_bound_decides_nothing(make_model):
    model = make_model()
    found = decide_sample(model, decision_rule(model, 4.0), value=3.0, uncertainty=np.inf, n_spectra=1, applicable=True)
    assert found["decision"] == CANNOT_DECIDE
    assert found["decision_remark"] == "the uncertainty of this value has no bound"


@pytest.mark.parametrize(
    ("limit", "options"),
    [(np.nan, {}), (np.inf, {}), (1.0, {"kind": "both"}), (1.0, {"risk": 0.0}), (1.0, {"risk": 0.51})],
)
def test_rules_out_of_bounds(make_model, limit, options):
    with pytest.raises(ParameterError, match="expected"):
        decision_rule(make_model(), limit, **options)


def test_the_table_shows_rule_decision_and_probability(make_model, new_spectra):
    model = with_limit(make_model(), 5.0)
    found = predict(model, new_spectra(np.array([2.0, 5.0, 8.0]), 2))
    lines = str(found).splitlines()
    assert lines[1] == "upper limit 5 % m/m (given with the samples), risk 5 %"
    assert lines[2].endswith("applies?    decision   conforms")
    assert lines[3].endswith("applicable  accept     > 99.9 %")
    assert lines[5].endswith("applicable  reject     < 0.1 %")
    assert not found.accepted
    other = predict(model, new_spectra(np.array([2.0]), 2), rule=decision_rule(model, 9.0, risk=0.01))
    assert other.rule == "upper limit 9 % m/m (given with the samples), risk 1 %"
    assert other.accepted
