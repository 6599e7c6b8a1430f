"""Predicted and reference values."""

import numpy as np

from quant.plots.agreement import plot_calibration_line, plot_errors, plot_predicted, signal_name


def marks(ax):
    return {line.get_label(): line for line in ax.get_lines() if not str(line.get_label()).startswith("_")}


def test_three_kinds_of_samples_each_with_its_own_mark(pls):
    ax = plot_predicted(pls)
    found = marks(ax)
    assert list(found) == ["calibration, fitted", "cross-validation, left out", "validation"]
    assert len({line.get_marker() for line in found.values()}) == 3
    assert len({line.get_markeredgecolor() for line in found.values()}) == 3
    assert [len(line.get_xdata()) for line in found.values()] == [20, 20, 8]
    assert np.array_equal(found["validation"].get_ydata(), pls.validation.predicted)
    assert (ax.get_xlabel(), ax.get_ylabel()) == ("reference acetone [% m/m]", "predicted acetone [% m/m]")


def test_intervals_are_bars_and_scales_are_equal(pls):
    ax = plot_predicted(pls)
    (bars,) = ax.collections
    ends = np.array([segment[:, 1] for segment in bars.get_segments()])
    assert np.array_equal(ends, np.column_stack([pls.validation.low, pls.validation.high]))
    assert ax.get_xlim() == ax.get_ylim()
    assert ax.get_aspect() == 1


def test_without_validation_only_two_kinds(unvalidated):
    ax = plot_predicted(unvalidated)
    assert list(marks(ax)) == ["calibration, fitted", "cross-validation, left out"]
    assert len(ax.collections) == 0


def test_errors_are_predicted_minus_reference_with_zero_and_bias(pls):
    ax = plot_errors(pls)
    found = marks(ax)
    checked = pls.validation
    assert np.array_equal(found["validation"].get_ydata(), checked.predicted - checked.reference)
    assert any(np.array_equal(line.get_ydata(), [0, 0]) for line in ax.get_lines())
    (bias,) = [line for label, line in found.items() if label.startswith("bias ")]
    assert bias.get_ydata()[0] == checked.figures.bias
    assert bias.get_label().endswith(" % m/m")
    assert ax.get_ylabel() == "predicted − reference [% m/m]"


def test_errors_of_left_out_samples_stand_in_for_validation(unvalidated):
    assert list(marks(plot_errors(unvalidated))) == ["cross-validation, left out"]


def test_the_calibration_line_goes_through_its_samples(band):
    ax = plot_calibration_line(band)
    found = marks(ax)
    samples = found["calibration samples"]
    assert np.array_equal(samples.get_xdata(), band.reference)
    assert np.array_equal(samples.get_ydata(), band.picture.signals)
    line = found["calibration line"]
    assert (line.get_slope(), line.get_xy1()[1]) == band.picture.line
    assert ax.get_ylabel() == signal_name(band) == "signal of the band over that of the reference band"


def test_the_signal_has_a_unit(make):
    area = '[regression]\nmethod = "band_area"\nbands = [{ signal = "area", range = [1745, 1685] }]\n'
    assert signal_name(make(area)) == "band area [absorbance · cm⁻¹]"
    assert signal_name(make(area.replace('"area"', '"height"'))) == "band height [absorbance]"
