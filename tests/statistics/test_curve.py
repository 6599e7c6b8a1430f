"""The quadratic and its use backwards: certified, published, and by simulation."""

import numpy as np
import pytest
from scipy.stats import t as student

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.curve import (
    check_branch,
    curve_leverage,
    curve_value,
    fit_quadratic,
    inverse_quadratic,
    inverse_quadratic_interval,
)
from quant.statistics.linearity import mandel_test

PONTIUS = (
    "0.11019 0.21956 0.32949 0.43899 0.54803 0.65694 0.76562 0.87487 0.98292 1.09146 1.20001 1.30822 1.41599 1.52399 "
    "1.63194 1.73947 1.84646 1.95392 2.06128 2.16844 0.11052 0.22018 0.32939 0.43886 0.54798 0.65739 0.76596 0.87474 "
    "0.98300 1.09150 1.20004 1.30818 1.41613 1.52408 1.63159 1.73965 1.84696 1.95445 2.06177 2.16829"
)
QUAM_X = np.repeat([0.1, 0.3, 0.5, 0.7, 0.9], 3)
QUAM_Y = np.array(
    [0.028, 0.029, 0.029, 0.084, 0.083, 0.081, 0.135, 0.131, 0.133, 0.180, 0.181, 0.183, 0.215, 0.230, 0.216]
)


@pytest.fixture
def pontius():
    return np.tile(150_000.0 * np.arange(1, 21), 2), np.array(PONTIUS.split(), dtype=float)


def test_pontius_certified(pontius):
    # NIST StRD, Pontius (load cell): from memory, reproduced.
    curve = fit_quadratic(*pontius)
    assert curve.coefficients == pytest.approx(
        [6.73565789473684e-4, 7.32059160401003e-7, -3.16081871345029e-15], rel=1e-11
    )
    assert curve.coefficient_sds == pytest.approx(
        [1.07938612033077e-4, 1.57817399981659e-10, 4.86652849992036e-17], rel=1e-11
    )
    assert curve.residual_sd == pytest.approx(2.05177424076185e-4, rel=1e-11)
    assert curve.degrees_of_freedom == 37


def test_pontius_read_backwards(pontius):
    curve = fit_quadratic(*pontius)
    loads = np.array([150_000.0, 1_234_567.0, 3_000_000.0])
    assert inverse_quadratic(curve, curve_value(curve, loads)) == pytest.approx(loads, rel=1e-12)


def test_quam_cadmium():
    # EURACHEM/CITAC QUAM:2012 A5, data found; quadratic computed.
    curve = fit_quadratic(QUAM_X, QUAM_Y)
    assert curve.coefficients == pytest.approx([-0.00101429, 0.298143, -0.0571429], abs=5e-7)
    test = mandel_test(QUAM_X, QUAM_Y)
    assert curve.coefficients == pytest.approx([test.constant, test.linear, test.quadratic], rel=1e-10)
    assert curve.residual_sd == pytest.approx(test.quadratic_sd, rel=1e-12)
    found = inverse_quadratic(curve, [0.0714])[0]
    c0, c1, c2 = curve.coefficients
    assert found == pytest.approx((-c1 + np.sqrt(c1**2 - 4 * c2 * (c0 - 0.0714))) / (2 * c2), rel=1e-10)
    assert 0.24 < found < 0.27  # the straight line says 0.260


def test_nitrite_ten_standards():
    # ISO 8466-1 type example: data from memory, quadratic recomputed.
    y = [0.140, 0.281, 0.405, 0.535, 0.662, 0.789, 0.916, 1.058, 1.173, 1.303]
    curve = fit_quadratic(0.05 * np.arange(1, 11), y)
    assert curve.coefficients == pytest.approx([0.013500, 2.620273, -0.081818], abs=5.1e-7)
    assert curve.residual_sd == pytest.approx(0.0052290, abs=5.1e-8)


def test_anscombe_two_turns_within_its_range():
    # Anscombe 1973, set II: from memory, reproduced.
    x = [10, 8, 13, 9, 11, 14, 6, 4, 12, 7, 5]
    y = [9.14, 8.14, 8.74, 8.77, 9.26, 8.10, 6.13, 3.10, 9.13, 7.26, 4.74]
    curve = fit_quadratic(x, y)
    assert curve.vertex == pytest.approx(10.97, abs=0.02)
    with pytest.raises(NotEnoughDataError, match=r"turns at 10.9\d, inside the calibrated range 4 to 14"):
        inverse_quadratic(curve, [8.0])
    with pytest.raises(NotEnoughDataError, match="one signal would stand for two contents"):
        check_branch(curve)


@pytest.mark.parametrize("terms", [(0.1, 1.0, -0.08), (0.1, 1.0, 0.3), (5.0, -1.0, 0.08), (5.0, -1.0, -0.2), (0, 1, 0)])
def test_every_signal_has_one_answer_and_order_is_kept(terms):
    x = np.linspace(0, 5, 8)
    y = terms[0] + terms[1] * x + terms[2] * x**2
    curve = fit_quadratic(x, y)
    signals = np.linspace(y.min() - 50, y.max() + 50, 1001)
    found = inverse_quadratic(curve, signals)
    assert np.isfinite(found).all()
    assert (np.diff(found) * np.sign(terms[1]) > 0).all()
    assert curve_value(curve, found) == pytest.approx(signals, rel=1e-9, abs=1e-9)
    outside = (signals < y.min() - 1e-9) | (signals > y.max() + 1e-9)
    assert ((found[outside] < 0) | (found[outside] > 5)).all()


def test_leverage_adds_up_and_agrees_with_the_hat_matrix():
    x, w = np.array([0.5, 1, 2, 4, 8]), np.array([4.0, 2, 1, 0.5, 0.25])
    curve = fit_quadratic(x, [1, 2, 3.5, 6, 9], w)
    design = np.vander(x, 3)
    inverse = np.linalg.inv(design.T @ (design * w[:, None]))
    assert curve_leverage(curve, x) == pytest.approx(np.einsum("ni,ij,nj->n", design, inverse, design), rel=1e-8)
    assert w @ curve_leverage(curve, x) == pytest.approx(3, rel=1e-12)


def test_weights_count_as_repetition_and_zero_as_absence():
    x, y = np.array([0.0, 1, 2, 3, 4, 9]), np.array([0.0, 1.1, 1.9, 2.7, 3.2, 50])
    weights = np.array([1, 2, 3, 1, 2, 0])
    rows = np.repeat(np.arange(6), weights)
    one, two = fit_quadratic(x, y, weights), fit_quadratic(x[rows], y[rows])
    assert one.coefficients == pytest.approx(two.coefficients, rel=1e-10)
    assert one.highest == 4
    assert one.n == 5


def test_the_interval_holds_the_truth_as_often_as_it_says():
    rng = np.random.default_rng(20)
    x, sd, sets = np.repeat([0.5, 1, 2, 3, 4, 5], 2), 0.02, 3000
    t = student.ppf(0.975, 9)
    truth = rng.uniform(0.5, 5, sets)
    held = 0
    for value in truth:
        curve = fit_quadratic(x, 0.1 + x - 0.05 * x**2 + rng.normal(0, sd, x.size))
        found = inverse_quadratic_interval(curve, [0.1 + value - 0.05 * value**2 + rng.normal(0, sd)], t)
        held += bool(found.low[0] <= value <= found.high[0])
    # 99.9 % binomial bounds of 3000 trials at 0.95: ± 0.013.
    assert held / sets == pytest.approx(0.95, abs=0.0131)


def test_readings_and_weight_narrow_the_interval_alike():
    x = np.array([0.5, 1, 2, 3, 4, 5])
    curve = fit_quadratic(x, 0.1 + x - 0.05 * x**2 + 0.01 * np.sin(9 * x))
    one = inverse_quadratic_interval(curve, [2.0], 3.2)
    four = inverse_quadratic_interval(curve, [2.0], 3.2, readings=4)
    heavy = inverse_quadratic_interval(curve, [2.0], 3.2, weight=4.0)
    assert four.standard_error == pytest.approx(heavy.standard_error)
    assert four.standard_error[0] < one.standard_error[0]
    assert one.form == "delta method"
    slope = (curve_value(curve, one.value + 1e-6) - curve_value(curve, one.value - 1e-6)) / 2e-6
    by_hand = curve.residual_sd / slope * np.sqrt(1 + curve_leverage(curve, one.value))
    assert one.standard_error == pytest.approx(by_hand, rel=1e-7)


def test_what_cannot_be_fitted_or_read_is_refused():
    with pytest.raises(NotEnoughDataError, match="2 different x"):
        fit_quadratic([1, 1, 2, 2], [1, 1, 2, 2])
    with pytest.raises(SampleMismatchError, match="2 weights for 3 pairs"):
        fit_quadratic([1, 2, 3], [1, 2, 3], [1, 1])
    curve = fit_quadratic([1, 2, 3], [1, 2, 3.5])
    assert np.isnan(curve.residual_sd)
    with pytest.raises(NotEnoughDataError, match="no degree of freedom"):
        inverse_quadratic_interval(curve, [2], 2.0)
    with pytest.raises(ParameterError, match="expected t > 0"):
        inverse_quadratic_interval(curve, [2], 0.0)
    with pytest.raises(NotEnoughDataError, match="inside the calibrated range"):
        check_branch(fit_quadratic([1, 2, 3], [1, 1, 1]))
