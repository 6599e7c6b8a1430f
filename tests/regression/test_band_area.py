"""The calibration line of a band, as a user would run it: spectra in, concentrations and intervals out."""

import json
from pathlib import Path

import numpy as np
import pytest
from scipy.stats import t as student
from sklearn.base import clone
from sklearn.exceptions import NotFittedError
from sklearn.model_selection import GridSearchCV
from sklearn.pipeline import make_pipeline
from sklearn.preprocessing import FunctionTransformer
from sklearn.utils.estimator_checks import check_estimator

from quant.errors import AxisMismatchError, NotEnoughDataError, ParameterError, QuantityError
from quant.regression.band_area import BandArea
from quant.statistics.straight_line import fit_line

REFERENCE = Path(__file__).parents[1] / "reference_values"
AT_ONE = [{"signal": "height_at", "position": 1}]


def spectra(signals):
    """Three points a spectrum; the middle one is the signal."""
    signals = np.asarray(signals, dtype=float)
    return np.column_stack([np.zeros_like(signals), signals, np.zeros_like(signals)])


def calibrated(concentrations, signals, **parameters):
    return BandArea(bands=AT_ONE, **parameters).fit(spectra(signals), concentrations)


def intervals(model, signals, readings=1):
    t = student.ppf(0.975, model.line_.degrees_of_freedom)
    result = model.inverse_interval(signals, t, readings)
    return result, (result.high - result.low) / 2


# Certified and published lines.


def test_norris_certified():
    certified = json.loads((REFERENCE / "norris.json").read_text(encoding="utf-8"))  # NIST StRD, source in the file
    x, y = np.loadtxt(REFERENCE / "norris.csv", delimiter=",", skiprows=1, unpack=True)
    line = calibrated(x, y).line_
    found = [line.intercept, line.slope, line.intercept_sd, line.slope_sd, line.residual_sd]
    names = ("B0", "B1", "sd_B0", "sd_B1", "residual_sd")
    assert found == pytest.approx([certified[name] for name in names], rel=1e-12)


def test_noint1_and_noint2_certified_through_the_origin():
    # NIST StRD, NoInt1 and NoInt2: from memory, reproduced.
    line = calibrated(np.arange(60.0, 71), np.arange(130.0, 141), through_origin=True).line_
    assert [line.slope, line.slope_sd, line.residual_sd] == pytest.approx(
        [2.07438016528926, 0.0165289256198347, 3.56753034006338], rel=1e-13
    )
    assert line.degrees_of_freedom == 10
    line = calibrated([4.0, 5, 6], [3.0, 4, 4], through_origin=True).line_
    assert [line.slope, line.slope_sd, line.residual_sd] == pytest.approx(
        [0.727272727272727, 0.0420827318078432, 0.369274472937998], rel=1e-12
    )
    assert line.degrees_of_freedom == 2


def test_miller_fluorescein():
    # Miller & Miller, fluorescein in water: from memory, reproduced.
    model = calibrated([0.0, 2, 4, 6, 8, 10, 12], [2.1, 5.0, 9.0, 12.6, 17.3, 21.0, 24.7])
    line = model.line_
    assert [round(line.slope, 2), round(line.intercept, 2)] == [1.93, 1.52]
    assert [round(line.correlation, 4), round(line.slope_sd, 4)] == [0.9989, 0.0409]
    # published 0.4329 and 0.2950, carried on from a rounded residual sum; exactly 0.432848 and 0.294936
    assert [line.residual_sd, line.intercept_sd] == pytest.approx([0.4329, 0.2950], abs=1e-4)
    assert [line.residual_sd, line.intercept_sd] == pytest.approx([0.432848, 0.294936], abs=5e-7)
    result, half = intervals(model, [2.9, 13.5, 23.0])
    assert result.form == "symmetric"
    assert np.round(result.value, 2).tolist() == [0.72, 6.21, 11.13]
    assert np.round(result.standard_error, 2).tolist() == [0.26, 0.24, 0.26]
    assert np.round(half, 2).tolist() == [0.68, 0.62, 0.68]
    # the same with more digits, recomputed
    assert result.value == pytest.approx([0.71600, 6.20722, 11.12858], abs=5.1e-6)
    assert result.standard_error == pytest.approx([0.26457, 0.23975, 0.26319], abs=5.1e-6)
    assert half == pytest.approx([0.68010, 0.61631, 0.67656], abs=5.1e-6)
    mean_of_4, half = intervals(model, [13.5], readings=4)
    assert round(mean_of_4.standard_error[0], 2) == 0.14
    assert round(half[0], 2) == 0.36
    assert model.predict(spectra([2.9, 13.5, 23.0])) == pytest.approx(result.value, rel=1e-13)


def test_quam_cadmium():
    # EURACHEM/CITAC QUAM:2012, A5: found on public pages that quote the example.
    c = np.repeat([0.1, 0.3, 0.5, 0.7, 0.9], 3)
    absorbance = [
        *(0.028, 0.029, 0.029, 0.084, 0.083, 0.081, 0.135, 0.131, 0.133),
        *(0.180, 0.181, 0.183, 0.215, 0.230, 0.216),
    ]
    model = calibrated(c, absorbance)
    line = model.line_
    assert [round(line.slope, 4), round(line.slope_sd, 4)] == [0.2410, 0.0050]
    assert [round(line.intercept, 4), round(line.intercept_sd, 4)] == [0.0087, 0.0029]
    # published -0.87038; exactly -0.5/sqrt(0.33) = -0.870388, so the last digit was cut, not rounded
    assert line.covariance / (line.slope_sd * line.intercept_sd) == pytest.approx(-0.87038, abs=1e-5)
    assert line.covariance / (line.slope_sd * line.intercept_sd) == pytest.approx(-0.5 / np.sqrt(0.33), rel=1e-12)
    assert round(line.residual_sd, 6) == 0.005486
    assert round(line.correlation, 3) == 0.997
    assert line.sxx == pytest.approx(1.2)
    result, _ = intervals(model, [0.0714], readings=2)
    assert round(result.value[0], 3) == 0.260
    assert round(result.standard_error[0], 3) == 0.018
    assert result.standard_error[0] == pytest.approx(0.017845, abs=5e-7)  # recomputed


def test_nitrite_iso_8466():
    # ISO 8466-1 type example: data, slope and intercept from memory, the rest recomputed.
    x = np.arange(1, 11) * 0.05
    model = calibrated(x, [0.140, 0.281, 0.405, 0.535, 0.662, 0.789, 0.916, 1.058, 1.173, 1.303])
    line = model.line_
    assert [line.slope, line.intercept] == pytest.approx([2.575273, 0.018000], abs=5e-7)
    assert [line.residual_sd, line.correlation] == pytest.approx([0.0051659, 0.999922], abs=5e-7)
    assert line.residual_sd / line.slope == pytest.approx(0.0020060, abs=5e-8)
    result, half = intervals(model, [0.641, 0.631], readings=[1, 4])
    assert result.value == pytest.approx([0.241916, 0.238033], abs=5e-7)
    assert result.standard_error == pytest.approx([0.0021089, 0.0011979], abs=5e-8)
    assert half == pytest.approx([0.0048632, 0.0027624], abs=5e-8)


def test_gum_thermometer():
    # JCGM 100 (GUM), H.3: from memory, reproduced.
    t = [21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511]
    b = [-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.160]
    line = calibrated(np.subtract(t, 20), b).line_
    assert [round(line.intercept, 4), round(line.intercept_sd, 4)] == [-0.1712, 0.0029]
    assert [round(line.slope, 5), round(line.slope_sd, 5)] == [0.00218, 0.00067]


def test_gasoline_band_areas():
    # gasoline.json: areas above the straight line between a band's ends; there octane is regressed on the area.
    table = np.loadtxt(REFERENCE / "gasoline.csv", delimiter=",", skiprows=1)
    octane, X = table[:, 1], table[:, 2:]
    expected = json.loads((REFERENCE / "gasoline.json").read_text(encoding="utf-8"))["band_area_one_variable"]
    bands = [name for name in expected if name.endswith(" nm")]
    assert len(bands) == 5
    for name in bands:
        ends = [float(end) for end in name.removesuffix(" nm").split("-")]
        model = BandArea([{"signal": "area", "range": ends, "baseline": ends}], axis=np.arange(900, 1701, 2))
        areas = model.fit(X[:50], octane[:50]).signals(X)
        assert areas[:3] == pytest.approx(expected[name]["areas_first_3"], rel=1e-12)
        assert areas[50:] == pytest.approx(expected[name]["test_areas"], rel=1e-12)
        line = fit_line(areas[:50], octane[:50])
        figures = [line.slope, line.intercept, line.slope_sd, line.intercept_sd, line.residual_sd]
        names = ("slope", "intercept", "se_slope", "se_intercept", "residual_sd")
        assert figures == pytest.approx([expected[name][figure] for figure in names], rel=1e-11)
        assert line.intercept + line.slope * areas[50:] == pytest.approx(expected[name]["test_predictions"], rel=1e-12)
        # our own direction: signal on octane, read backwards, has the slope r²/b as seen from there
        assert model.line_.slope * line.slope == pytest.approx(line.correlation**2, rel=1e-11)


# The rest of the contract.


def test_leverage_and_degrees_of_freedom():
    c = np.array([0.0, 1, 2, 3, 4])
    model = calibrated(c, 2 * c + 1)
    assert model.leverage_each(spectra(2 * c + 1)) == pytest.approx(np.array([[0.6, 0.3, 0.2, 0.3, 0.6]]))
    assert model.factor_counts_ == (1,)
    origin = calibrated(c[1:], 2 * c[1:], through_origin=True)
    assert origin.leverage_each(spectra(2 * c)) == pytest.approx(np.array([[0, 1, 4, 9, 16]]) / 30)
    assert origin.factor_counts_ == (0,)
    assert origin.with_factors(0) is origin


def test_residual_is_what_matrix_and_analyte_do_not_explain():
    rng = np.random.default_rng(21)
    matrix, analyte = rng.uniform(0.5, 1, 12), rng.uniform(0, 1, 12)
    c = np.linspace(1, 5, 8)
    X = matrix + c[:, None] * analyte
    model = BandArea(axis=np.arange(12.0)).fit(X, c)
    assert model.residual_basis_.shape == (2, 12)
    assert model.residual_each(X) == pytest.approx(0, abs=1e-25)
    strange = rng.standard_normal(12)
    span = np.column_stack([matrix, analyte])
    outside = strange - span @ np.linalg.lstsq(span, strange, rcond=None)[0]
    assert model.residual_each(X[:1] + strange) == pytest.approx(outside @ outside, rel=1e-10)


def test_residual_sees_the_reference_band_too():
    c = np.linspace(1, 5, 6)
    X = np.column_stack([c, 2 * c, np.full(6, 3.0), np.full(6, 4.0)])
    bands = {"signal": "area", "range": [0, 1]}, {"signal": "area", "range": [2, 3]}
    model = BandArea([bands[0]], reference_band=bands[1]).fit(X, c)
    changed = np.add(X[:1], [[0, 0, 1, 0]])
    assert model.residual_each(changed)[0, 0] == pytest.approx((4 / 5) ** 2)  # the part across (3, 4)
    assert BandArea([bands[0]]).fit(X, c).residual_each(changed) == pytest.approx(0, abs=1e-25)


def test_of_a_single_height_nothing_is_left():
    model = calibrated([1.0, 2, 3], [0.2, 0.4, 0.6])
    assert model.residual_each(spectra([5.0])) == pytest.approx(0, abs=1e-25)


def test_internal_standard_takes_the_path_length_out():
    c, path = np.array([1.0, 2, 3, 4]), np.array([0.9, 1.1, 1.0, 1.3])
    X = path[:, None] * np.column_stack([0.2 * c, np.full(4, 0.5)])
    at = [{"signal": "height_at", "position": p} for p in (0, 1)]
    model = BandArea([at[0]], reference_band=at[1]).fit(X, c)
    assert model.line_.correlation == pytest.approx(1)
    assert model.predict(2 * X) == pytest.approx(c)
    assert BandArea([at[0]]).fit(X, c).line_.correlation < 0.99


def test_a_reference_band_without_signal_is_refused_by_row():
    X = np.column_stack([np.arange(1.0, 6), [1, 0, 1, -1, 1e-12]])
    at = [{"signal": "height_at", "position": p} for p in (0, 1)]
    with pytest.raises(QuantityError, match=r"reference band \(height at 1\).*row\(s\) 1, 3, 4"):
        BandArea([at[0]], reference_band=at[1]).fit(X, np.arange(5.0))


def test_refuses_what_cannot_be_read_backwards():
    with pytest.raises(NotEnoughDataError, match="are equal"):
        calibrated([2.0, 2, 2], [0.1, 0.2, 0.3])
    with pytest.raises(NotEnoughDataError, match="does not change with concentration"):
        calibrated([1.0, 2, 3], [0.1, 0.1, 0.1])
    with pytest.raises(NotEnoughDataError, match="are zero"):
        calibrated([0.0, 0], [0.1, 0.2], through_origin=True)
    with pytest.raises(NotEnoughDataError, match="n_samples=1"):
        calibrated([1.0], [0.1])
    with pytest.raises(AxisMismatchError, match="axis has 5 values, the spectra have 3"):
        calibrated([1.0, 2, 3], [0.1, 0.2, 0.4], axis=np.arange(5))
    with pytest.raises(NotFittedError):
        BandArea().inverse_interval([0.1], 2.0)
    with pytest.raises(ParameterError, match="asked for 2 factor"):
        calibrated([1.0, 2, 3], [0.1, 0.2, 0.4]).with_factors(2)


def test_the_state_is_plain_and_comes_back():
    axis = np.array([1800.0, 1750, 1700, 1650])
    bands = [{"signal": "area", "range": [1650, 1750], "baseline": [1650, 1800]}]
    X = np.random.default_rng(22).uniform(0.1, 1, (6, 4))
    model = BandArea(bands, axis=axis).fit(X, X[:, 2])
    parameters, arrays = model.state()
    back = BandArea.from_state(json.loads(json.dumps(parameters)), arrays)
    assert sorted(arrays) == ["axis", "residual_basis_"]
    assert back.line_ == model.line_
    assert np.array_equal(back.predict(X), model.predict(X))


def test_a_band_across_a_cut_is_refused():
    axis = np.array([1.0, 2, 3, 4, 10, 11, 12])
    X = np.random.default_rng(1).uniform(0.1, 1, (6, 7))
    BandArea([{"signal": "area", "range": [1, 4]}], axis=axis).fit(X, X[:, 2])
    with pytest.raises(ParameterError, match=r"band_area: the band .* meets a gap of the axis"):
        BandArea([{"signal": "area", "range": [3, 11]}], axis=axis).fit(X, X[:, 2])


# scikit-learn's contract.


@pytest.mark.parametrize("estimator", [BandArea(), BandArea(through_origin=True)], ids=repr)
def test_estimator_checks(estimator):
    # With neutral parameters the signal is the sum over unrelated random columns.
    expected = {"check_regressors_train": "one band cannot follow random columns; the check wants a score above 0.5"}
    results = check_estimator(estimator, expected_failed_checks=expected, on_fail=None, on_skip=None)
    assert [r["check_name"] for r in results if r["status"] == "failed"] == []
    assert {r["check_name"] for r in results if r["status"] == "xfail"} == set(expected)
    assert len([r for r in results if r["status"] == "passed"]) > 40


def test_inside_a_pipeline_and_a_grid_search():
    c = np.linspace(1, 6, 12)
    X = spectra(0.3 * c)
    pipeline = make_pipeline(FunctionTransformer(), BandArea(bands=AT_ONE))
    search = GridSearchCV(pipeline, {"bandarea__through_origin": [False, True]}, cv=3).fit(X, c)
    assert search.best_score_ == pytest.approx(1)
    assert search.predict(X) == pytest.approx(c)
    assert clone(pipeline[-1]).bands == AT_ONE
