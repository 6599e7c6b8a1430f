"""Laws of the statistics that an audit asks for: changes of unit, order and origin, and what must grow with what."""

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st
from scipy import stats

from quant.statistics.conformal import jackknife_plus, least_samples, ranks
from quant.statistics.conformity import (
    ACCEPT,
    REJECT,
    UNDECIDED,
    decide,
    probability_of_conformity,
    replicates_to_decide,
)
from quant.statistics.detection import TWICE_T, detection_limits
from quant.statistics.detection_interval import blank_leverages
from quant.statistics.error_budget import Situation, error_budget
from quant.statistics.hotelling import hotelling_t_squared, t_squared_limit_calibration, t_squared_limit_new
from quant.statistics.influence import cooks_distance, studentised_residuals
from quant.statistics.joint_ellipse import joint_test
from quant.statistics.linearity import lack_of_fit_test, mandel_test
from quant.statistics.nearest_neighbour import gap_limit, nearest_neighbour_distance
from quant.statistics.net_analyte_signal import net_analyte_signal, net_analyte_signal_of_vector
from quant.statistics.normality import normality
from quant.statistics.purity import purity_by_difference
from quant.statistics.randomisation import randomisation_test
from quant.statistics.replicate_parts import propagated_variance, replicate_components, replicate_covariance
from quant.statistics.residual_limits import box, chi_square_by_moments, jackson_mudholkar
from quant.statistics.straight_line import fit_line

seeds = st.integers(0, 2**32 - 1)
factors = st.floats(1e-3, 1e3)
shares = st.floats(0.005, 0.4)


@given(seeds, st.integers(1, 5))
def test_distances_in_score_space_do_not_depend_on_the_axes(seed, n_factors):
    rng = np.random.default_rng(seed)
    calibration, new = rng.normal(size=(20, n_factors)), rng.normal(size=(6, n_factors))
    turn = np.linalg.qr(rng.normal(size=(n_factors, n_factors)))[0] * rng.uniform(0.1, 10, n_factors)
    shift = rng.normal(size=n_factors)

    def turned(scores):
        return scores @ turn + shift

    for distance in (hotelling_t_squared, nearest_neighbour_distance):
        assert distance(turned(new), turned(calibration)) == pytest.approx(distance(new, calibration), rel=1e-6)
    assert gap_limit(turned(calibration)) == pytest.approx(gap_limit(calibration), rel=1e-6)
    assert nearest_neighbour_distance(calibration, calibration) == pytest.approx(np.zeros(20), abs=1e-12)
    # The sum over the calibration is A·(n - 1), whatever the scores.
    assert hotelling_t_squared(calibration, calibration).sum() == pytest.approx(19 * n_factors)


@given(st.integers(8, 200), st.integers(1, 5), st.floats(0.5, 0.999))
def test_new_samples_have_the_wider_limit(n, n_factors, probability):
    assert t_squared_limit_new(n, n_factors, probability) > t_squared_limit_calibration(n, n_factors, probability)
    assert t_squared_limit_calibration(n, n_factors, probability) < (n - 1) ** 2 / n  # no sample can lie farther out


@given(seeds, factors, st.sampled_from([jackson_mudholkar, box, chi_square_by_moments]))
def test_limits_of_residuals_scale_and_rise_with_the_probability(seed, factor, limit):
    values = np.random.default_rng(seed).uniform(0.1, 1, 12)
    assert limit(factor * values) == pytest.approx(factor * limit(values), rel=1e-9)
    assert limit(values, 0.99) > limit(values, 0.95) > limit(values, 0.9)


@given(seeds, factors)
def test_the_joint_test_does_not_depend_on_the_unit_and_always_holds_its_own_line(seed, factor):
    rng = np.random.default_rng(seed)
    x = rng.uniform(1, 9, 12)
    y = x + 0.3 * rng.normal(size=12)
    one, other = joint_test(x, y), joint_test(factor * x, factor * y)
    assert other.statistic == pytest.approx(one.statistic, rel=1e-6)
    assert joint_test(x, y, intercept=one.intercept, slope=one.slope).inside


@given(seeds, st.integers(1, 12), factors)
def test_the_randomisation_test_knows_neither_unit_nor_order(seed, n, factor):
    rng = np.random.default_rng(seed)
    one, other = rng.chisquare(1, (2, n))
    p = randomisation_test(one, other).p
    order = rng.permutation(n)
    assert randomisation_test(factor * one[order], factor * other[order]).p == p
    assert 1 / 2**n <= p <= 1
    reverse = randomisation_test(other, one).p
    assert p + reverse == pytest.approx(1 + 1 / 2**n, abs=1e-12)  # without ties only the observed pattern is in both


@given(seeds, factors, factors, st.integers(1, 9), shares, shares)
def test_detection_follows_the_units_and_gains_by_readings(seed, x_factor, y_factor, readings, alpha, beta):
    rng = np.random.default_rng(seed)
    x = np.linspace(0, 5, 9)
    y = 1 + 2 * x + 0.1 * rng.normal(size=9)
    options = {"alpha": alpha, "beta": beta}
    one = detection_limits(fit_line(x, y), readings=readings, **options)
    other = detection_limits(fit_line(x_factor * x, y_factor * y - 3 * y_factor), readings=readings, **options)
    for name in ("critical", "detection", "quantification"):
        assert getattr(other, name) == pytest.approx(x_factor * getattr(one, name), rel=1e-6)
    assert 0 < one.critical < one.detection
    more = detection_limits(fit_line(x, y), readings=readings + 1, **options)
    assert more.detection < one.detection
    assert (
        detection_limits(fit_line(x, y), readings=readings, way=TWICE_T).detection
        > detection_limits(fit_line(x, y), readings=readings).detection
    )


@given(seeds, factors)
def test_blank_leverages_know_no_unit(seed, factor):
    rng = np.random.default_rng(seed)
    design = np.column_stack([np.ones(15), rng.normal(size=(15, 3))])
    y = 4 + design[:, 1]
    leverage = np.diag(design @ np.linalg.pinv(design))
    low, high = blank_leverages(y, leverage)
    assert blank_leverages(factor * y, leverage) == pytest.approx((low, high))
    assert 1 / 15 < low <= high


@given(seeds, st.integers(0, 4), factors)
def test_net_signal_is_blind_to_the_others_and_finds_its_own(seed, n_others, factor):
    rng = np.random.default_rng(seed)
    pure, others = rng.normal(size=12), rng.normal(size=(n_others, 12))
    found = net_analyte_signal(pure, others)
    assert others @ found.direction == pytest.approx(np.zeros(n_others), abs=1e-9)
    assert found.direction @ pure == pytest.approx(found.sensitivity)
    assert 0 < found.selectivity <= 1 + 1e-12
    scaled = net_analyte_signal(factor * pure, others)
    assert (scaled.sensitivity, scaled.selectivity) == pytest.approx((factor * found.sensitivity, found.selectivity))
    vector = net_analyte_signal_of_vector(found.direction / found.sensitivity, pure)
    assert (vector.sensitivity, vector.selectivity) == pytest.approx((found.sensitivity, found.selectivity))


@given(seeds, st.integers(1, 40), st.floats(0.5, 0.99), st.floats(-5, 5), factors)
def test_jackknife_plus_is_equivariant_and_nested(seed, n, probability, shift, factor):
    rng = np.random.default_rng(seed)
    predictions, residuals = rng.normal(size=(n, 3)), rng.normal(size=n)
    low, high = jackknife_plus(predictions, residuals, probability)
    moved = jackknife_plus(shift + factor * predictions, factor * residuals, probability)
    assert moved.low == pytest.approx(shift + factor * low, rel=1e-9, abs=1e-9)
    assert moved.high == pytest.approx(shift + factor * high, rel=1e-9, abs=1e-9)
    wider = jackknife_plus(predictions, residuals, probability + 0.009)
    assert (wider.low <= low).all()
    assert (wider.high >= high).all()
    alike = jackknife_plus(
        predictions, residuals, probability, scales=np.full(n, factor), new_scales=np.full(3, factor)
    )
    assert alike.high == pytest.approx(high, rel=1e-9)
    assert np.isfinite(low).all() == (n >= least_samples(probability)) == np.isfinite(high).all()
    lower, upper = ranks(n, probability)
    assert lower + upper == n + 1  # the two ends are symmetric


@given(st.floats(-10, 10), st.floats(0.01, 5), st.floats(-10, 10), st.integers(1, 50), st.floats(0.001, 0.4), factors)
def test_a_decision_is_the_risk_seen_from_the_other_side(value, u, limit, dof, risk, factor):
    quantile = stats.t.isf(risk, dof)
    options = {"degrees_of_freedom": dof}
    found = decide(value, u, limit, quantile, **options)
    assume(min(abs(found.conformity - risk), abs(found.conformity - 1 + risk)) > 1e-9)
    expected = ACCEPT if found.conformity > 1 - risk else REJECT if found.conformity < risk else UNDECIDED
    assert found.outcome == expected
    assert decide(factor * value, factor * u, factor * limit, quantile, **options).outcome == expected
    lower = probability_of_conformity(value, u, limit, side="lower", degrees_of_freedom=dof)
    assert found.conformity + lower == pytest.approx(1, abs=1e-12)
    # A higher value is never judged better against an upper limit.
    order = [ACCEPT, UNDECIDED, REJECT]
    assert order.index(decide(value + u, u, limit, quantile, **options).outcome) >= order.index(expected)


@given(st.floats(0.1, 10), st.floats(0, 5), st.floats(0.01, 5), st.floats(0.5, 4))
def test_the_number_of_replicates_is_the_fewest(distance, fixed, repeatability, factor):
    number = replicates_to_decide(0.0, distance, factor, fixed, repeatability)
    # Exactly: the mean of m decides if factor²·(fixed² + repeatability²/m) is at most distance².
    room = Fraction(distance) ** 2 - (Fraction(factor) * Fraction(fixed)) ** 2
    needed = (Fraction(factor) * Fraction(repeatability)) ** 2 / room if room else Fraction(0)
    assume(abs(room) > 1e-6 * distance**2)  # nearer to the edge rounding decides
    if number is None:
        assert room < 0
    else:
        assert room > 0
        assert number >= needed * Fraction(1 - 1e-6)
        assert number == 1 or number - 1 <= needed * Fraction(1 + 1e-6)


@given(seeds, factors, factors, st.floats(-9, 9), st.floats(-9, 9))
def test_linearity_knows_neither_unit_nor_added_line(seed, x_factor, y_factor, intercept, slope):
    rng = np.random.default_rng(seed)
    x = np.repeat(np.arange(5.0), 2)
    y = 0.2 * x**2 + rng.normal(size=10)
    changed = x_factor * x - 3, y_factor * (y + intercept + slope * x)
    for test in (mandel_test, lack_of_fit_test):
        assert test(*changed).statistic == pytest.approx(test(x, y).statistic, rel=1e-5, abs=1e-9)


@given(seeds)
def test_shape_is_odd_and_even(seed):
    x = np.random.default_rng(seed).normal(size=15) ** 3
    one, other = normality(x), normality(-x)
    assert other.skewness == pytest.approx(-one.skewness)
    assert other.excess_kurtosis == pytest.approx(one.excess_kurtosis)


@given(seeds, st.integers(1, 4), factors)
def test_studentised_residuals_know_no_unit_and_keep_their_bounds(seed, n_terms, factor):
    rng = np.random.default_rng(seed)
    design = np.column_stack([np.ones(14), rng.normal(size=(14, n_terms - 1))])
    hat, y = design @ np.linalg.pinv(design), rng.normal(size=14)
    error, leverage = hat @ y - y, np.diag(hat)
    internal, external = studentised_residuals(error, leverage, n_terms)
    scaled = studentised_residuals(factor * error, leverage, n_terms)
    assert scaled[0] == pytest.approx(internal)
    assert (internal**2 <= 14 - n_terms + 1e-9).all()
    assert ((np.abs(external) > 1) == (np.abs(internal) > 1)).all()
    assert np.sum((1 - leverage) * internal**2) == pytest.approx(14 - n_terms)
    assert cooks_distance(factor * error, leverage, n_terms) == pytest.approx(cooks_distance(error, leverage, n_terms))


@given(seeds)
def test_components_of_replicates_know_nothing_of_the_samples(seed):
    rng = np.random.default_rng(seed)
    samples, packs = np.repeat(np.arange(4), 6), np.tile([0, 0, 1, 1, 1, 2], 4)
    spectra, b = rng.normal(size=(24, 5)), rng.normal(size=5)
    one = replicate_components(spectra @ b, samples, packs)
    other = replicate_components(spectra @ b + 100 * rng.normal(size=4)[samples], samples, packs)
    assert other.scan_variance == pytest.approx(one.scan_variance, rel=1e-6)
    assert other.pack_variance == pytest.approx(one.pack_variance, rel=1e-6, abs=1e-6)
    variance = propagated_variance(b, replicate_covariance(spectra, 10 * samples + packs))
    assert variance == pytest.approx(one.scan_variance, rel=1e-9)


@given(seeds)
def test_shares_of_an_error_budget_add_up_and_more_of_anything_helps(seed):
    rng = np.random.default_rng(seed)
    p, q, lab = rng.uniform(0, 1, 3)
    case = Situation(
        presentation=p,
        unexplained=q,
        laboratory=lab,
        n_standards=int(rng.integers(5, 90)),
        n_factors=int(rng.integers(1, 5)),
    )
    found = error_budget(case)
    assert sum(found.shares.values()) == pytest.approx(1)
    assert all(step.rmsep < found.rmsep and step.elasticity < 0 for step in found.steps)
    after = [step.rmsep for step in found.steps]
    assert after == sorted(after)


@given(seeds, st.integers(1, 6))
def test_purity_is_never_less_certain_than_fully_correlated_impurities(seed, n):
    rng = np.random.default_rng(seed)
    contents, u = rng.normal(size=n), rng.uniform(0, 1, n)
    errors = rng.normal(size=(n + 3, n))
    r = np.corrcoef(errors, rowvar=False).reshape(n, n)
    found = purity_by_difference(contents, u, r)
    assert 0 <= found.standard_uncertainty <= u.sum() * (1 + 1e-9)
    assert found.value == pytest.approx(100 - contents.sum())
    assert purity_by_difference(contents, u, np.ones((n, n))).standard_uncertainty == pytest.approx(u.sum())
