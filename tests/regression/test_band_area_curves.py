"""Band area by weighted lines and quadratics."""

import json

import numpy as np
import pytest
from scipy.stats import t as student

from quant.errors import NotEnoughDataError, ParameterError
from quant.regression.band_area import BandArea
from quant.regression.line_weights import standard_weights
from quant.statistics.curve import fit_quadratic

AT_ONE = [{"signal": "height_at", "position": 1}]
MILLER_C = np.array([0.0, 2, 4, 6, 8, 10])
MILLER_A = np.array([0.009, 0.158, 0.301, 0.472, 0.577, 0.739])
MILLER_S = np.array([0.001, 0.004, 0.010, 0.013, 0.017, 0.022])


def spectra(signals):
    """Three points a spectrum; the middle one is the signal."""
    signals = np.asarray(signals, dtype=float)
    return np.column_stack([np.zeros_like(signals), signals, np.zeros_like(signals)])


def calibrated(concentrations, signals, **parameters):
    return BandArea(bands=AT_ONE, **parameters).fit(spectra(signals), concentrations)


@pytest.fixture
def miller():
    return calibrated(np.column_stack([MILLER_C, MILLER_S]), MILLER_A, line_weights="1/s^2", sd_column="s")


def test_miller_weighted_line(miller):
    # Miller & Miller, weighted regression: from memory, reproduced.
    weights = standard_weights("1/s^2", MILLER_C, MILLER_S)
    assert weights == pytest.approx([5.5353, 0.3460, 0.0554, 0.0328, 0.0192, 0.0114], abs=5.1e-5)
    line = miller.line_
    assert [round(line.intercept, 4), round(line.slope, 4)] == [0.0091, 0.0738]
    assert [line.intercept, line.slope] == pytest.approx([0.0090839, 0.0737600], abs=5.1e-8)
    assert np.round(miller.predict(spectra([0.100, 0.600])), 3).tolist() == [1.233, 8.011]
    plain = calibrated(MILLER_C, MILLER_A)
    assert [plain.line_.intercept, plain.line_.slope] == pytest.approx([0.013286, 0.072543], abs=5.1e-7)
    assert np.round(plain.predict(spectra([0.100, 0.600])), 3).tolist() == [1.195, 8.088]


def test_the_unknown_has_the_weight_of_its_own_level(miller):
    at = miller.weights_at([-1.0, 0.0, 3.0, 10.0, 12.0])
    weights = standard_weights("1/s^2", MILLER_C, MILLER_S)
    middle = weights[0] * (MILLER_S[0] / 0.007) ** 2  # s half way between 0.004 and 0.010
    assert at == pytest.approx([weights[0], weights[0], middle, weights[-1], weights[-1]], rel=1e-12)
    said = miller.remarks_each(spectra([0.2303]))[0]
    assert said.startswith("weight of its signal 0.11")
    assert "interpolated between the standards" in said
    modelled = calibrated(MILLER_C[1:], MILLER_A[1:], line_weights="1/x")
    assert "modelled as 1/x " in modelled.remarks_each(spectra([0.2]))[0]
    assert calibrated(MILLER_C, MILLER_A).remarks_each(spectra([0.2])) == ("",)


def test_the_weight_widens_the_interval_where_signals_scatter(miller):
    t = student.ppf(0.975, 4)
    found = miller.inverse_interval([0.100, 0.600], t)
    line, weight = miller.line_, miller.weights_at(found.value)
    # (s/b)·sqrt(1/w0 + 1/Σw + (x0 − x̄)²/Sxx) with weighted mean and Sxx, Miller & Miller (from memory).
    share = 1 / weight + 1 / 6 + (found.value - line.x_mean) ** 2 / line.sxx
    assert found.standard_error == pytest.approx(line.residual_sd / line.slope * np.sqrt(share), rel=1e-12)
    assert found.standard_error[1] > 3 * found.standard_error[0]


@pytest.mark.parametrize(("law", "power"), [("1/x", 1), ("1/x^2", 2)])
def test_modelled_weights_follow_their_law(law, power):
    x = np.array([1.0, 2, 4, 8])
    model = calibrated(x, 2 * x + 0.1 * np.sin(x), line_weights=law)
    weights = x**-power / np.mean(x**-power)
    assert model.weights_at(x) == pytest.approx(weights, rel=1e-12)
    assert model.weights_at([0.1, 3.0, 100.0]) == pytest.approx(
        [weights[0], weights[0] / 3**power, weights[-1]], rel=1e-12
    )
    slope, intercept = np.polyfit(x, 2 * x + 0.1 * np.sin(x), 1, w=np.sqrt(weights))
    assert [model.line_.slope, model.line_.intercept] == pytest.approx([slope, intercept], rel=1e-10)


def test_through_the_origin_1_x_is_the_ratio_of_the_means():
    x, y = np.array([1.0, 2, 4, 8]), np.array([2.1, 3.9, 8.4, 15.8])
    model = calibrated(x, y, line_weights="1/x", through_origin=True)
    assert model.line_.slope == pytest.approx(y.sum() / x.sum(), rel=1e-14)
    assert model.factor_counts_ == (0,)


def test_weighted_intervals_hold_the_truth_at_both_ends_where_plain_ones_fail():
    rng, t = np.random.default_rng(12), student.ppf(0.975, 10)
    x = np.repeat([1.0, 2, 5, 10, 20, 50], 2)
    held = {law: np.zeros(2) for law in ("equal", "1/x^2")}
    truth, sets = np.array([1.5, 45.0]), 1500
    for _ in range(sets):
        y, new = x * (1 + rng.normal(0, 0.03, x.size)), truth * (1 + rng.normal(0, 0.03, 2))
        for law, count in held.items():
            found = calibrated(x, y, line_weights=law).inverse_interval(new, t)
            count += (found.low <= truth) & (truth <= found.high)
    # 99.9 % binomial bounds of 1500 trials at 0.95: ± 0.0185.
    assert held["1/x^2"] / sets == pytest.approx([0.95, 0.95], abs=0.0185)
    assert held["equal"][0] / sets > 0.99  # far too wide at the low end ...
    assert held["equal"][1] / sets < 0.90  # ... and too narrow at the high end


@pytest.mark.parametrize(("parameters", "terms"), [({}, 2), ({"curve": "quadratic"}, 3), ({"through_origin": True}, 1)])
def test_leverages_of_weighted_standards_add_up_to_the_terms(parameters, terms):
    x = np.array([1.0, 2, 4, 8, 9])
    model = calibrated(x, 2 * x + 0.01 * x**2 + 1e-9 * np.sin(x), line_weights="1/x^2", **parameters)
    on_the_curve = spectra(model.signal_at(x))
    assert model.leverage_each(on_the_curve).sum() == pytest.approx(terms, rel=1e-9)
    found = model.inverse_interval(model.signals(on_the_curve), 2.0)
    fit = model.line_ if model.curve_ is None else model.curve_
    slope = (model.signal_at(x + 1e-6) - model.signal_at(x - 1e-6)) / 2e-6
    reading = fit.residual_sd / slope / np.sqrt(model.weights_at(x))
    assert found.standard_error == pytest.approx(reading * np.sqrt(1 + model.leverage_each(on_the_curve)[0]), rel=1e-6)


# Quadratics.

CURVED_X = np.array([0.5, 1, 2, 3, 4, 5, 6])
CURVED_Y = 0.02 + 0.3 * CURVED_X - 0.015 * CURVED_X**2 + 0.003 * np.sin(7 * CURVED_X)


def test_a_quadratic_is_read_on_the_branch_of_the_range():
    model = calibrated(CURVED_X, CURVED_Y, curve="quadratic")
    curve = fit_quadratic(CURVED_X, CURVED_Y)
    assert model.curve_ == curve
    assert model.factor_counts_ == (2,)
    assert model.residual_degrees_of_freedom(7, 2) == curve.degrees_of_freedom == 4
    roots = [np.roots([*curve.coefficients[:0:-1], curve.coefficients[0] - y]) for y in (0.4, 1.0)]
    inside = [min(pair.real) for pair in roots]  # the other root lies beyond the vertex
    assert model.predict(spectra([0.4, 1.0])) == pytest.approx(inside, rel=1e-10)
    assert model.signal_at(model.predict(spectra([0.4, 1.0]))) == pytest.approx([0.4, 1.0], rel=1e-12)
    assert model.leverage_each(spectra(CURVED_Y)).sum() == pytest.approx(3, rel=0.02)
    assert np.abs(calibrated(CURVED_X, CURVED_Y).predict(spectra(CURVED_Y)) - CURVED_X).max() > 0.1


def test_a_signal_no_content_gives_is_answered_outside_the_range():
    model = calibrated(CURVED_X, CURVED_Y, curve="quadratic")
    top = model.signal_at(model.curve_.vertex)
    found = model.predict(spectra([top + 0.2, top + 5]))
    assert 6 < found[0] < found[1]


def test_a_quadratic_that_turns_within_the_range_is_refused():
    x = np.linspace(0, 10, 9)
    with pytest.raises(NotEnoughDataError, match=r"turns at 7, inside the calibrated range 0 to 10"):
        calibrated(x, 14 * x - x**2, curve="quadratic")


def test_weights_of_a_quadratic():
    model = calibrated(CURVED_X, CURVED_Y, curve="quadratic", line_weights="1/x^2")
    weights = standard_weights("1/x^2", CURVED_X)
    assert model.curve_.coefficients == pytest.approx(fit_quadratic(CURVED_X, CURVED_Y, weights).coefficients)
    errors = model.inverse_interval([0.2, 1.2], 2.8).standard_error
    assert errors[1] > 3 * errors[0]
    assert "modelled as 1/x^2" in model.remarks_each(spectra([0.3]))[0]


def test_wrong_parameters_are_refused():
    with pytest.raises(ParameterError, match="through_origin"):
        calibrated(CURVED_X, CURVED_Y, curve="quadratic", through_origin=True)
    with pytest.raises(ParameterError, match="curve"):
        calibrated(CURVED_X, CURVED_Y, curve="cubic")
    with pytest.raises(ParameterError, match="line_weights"):
        calibrated(CURVED_X, CURVED_Y, line_weights="1/y")
    with pytest.raises(NotEnoughDataError, match="Weights 1/x need contents above zero; found 0"):
        calibrated(MILLER_C, MILLER_A, line_weights="1/x")
    with pytest.raises(NotEnoughDataError, match="need standard deviations above zero"):
        calibrated(np.column_stack([MILLER_C, 0 * MILLER_S]), MILLER_A, line_weights="1/s^2", sd_column="s")
    with pytest.raises(ParameterError, match="2 columns: the reference values, then s"):
        calibrated(MILLER_C, MILLER_A, line_weights="1/s^2", sd_column="s")


@pytest.mark.parametrize("parameters", [{"curve": "quadratic"}, {"line_weights": "1/x"}], ids=str)
def test_the_state_comes_back(parameters):
    model = calibrated(CURVED_X, CURVED_Y, **parameters)
    plain, arrays = model.state()
    back = BandArea.from_state(json.loads(json.dumps(plain)), arrays)
    X = spectra([0.3, 0.9, 4.0])
    for name in ("predict_each", "leverage_each", "residual_each", "remarks_each"):
        assert np.array_equal(getattr(back, name)(X), getattr(model, name)(X))
    assert back.inverse_interval([0.3], 2.0).high == model.inverse_interval([0.3], 2.0).high


def test_a_model_saved_before_there_were_weights_still_reads():
    model = calibrated(CURVED_X, CURVED_Y)
    plain, arrays = model.state()
    for young in ("curve", "line_weights", "sd_column", "curve_values_", "standards_"):
        del plain[young]
    back = BandArea.from_state(plain, arrays)
    assert np.array_equal(back.predict(spectra([0.3])), model.predict(spectra([0.3])))
    assert back.state()[0] == model.state()[0]
