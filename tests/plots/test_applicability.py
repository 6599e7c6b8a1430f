"""Leverage against residual."""

import numpy as np
import pytest

from quant.plots.applicability import MOST_NAMED, _name, applicability_groups, outside, plot_applicability
from quant.plots.style import short

VALIDATED = '[validation]\nsamples = ["S21..S28"]\n'


def test_three_kinds_and_both_pairs_of_limits(pls):
    ax = plot_applicability(pls)
    labels = [text.get_text() for text in ax.get_legend().get_texts()]
    assert labels == [
        "calibration, fitted",
        "cross-validation, left out",
        "validation",
        "warning limit",
        "stop limit",
    ]
    upright = [line.get_xdata()[0] for line in ax.get_lines() if np.array_equal(line.get_ydata(), [0, 1])]
    level = [line.get_ydata()[0] for line in ax.get_lines() if np.array_equal(line.get_xdata(), [0, 1])]
    assert upright == [pls.limits.leverage_warn, pls.limits.leverage_stop]
    assert level == [pls.limits.residual_warn, pls.limits.residual_stop]
    assert (ax.get_xlabel(), ax.get_ylabel()) == ("leverage (1/n included)", "sum of squares of the residual spectrum")


def test_a_strange_sample_is_named(make):
    ax = plot_applicability(make(VALIDATED, odd=True))
    assert ax.texts[0].get_text() == "S28"


def test_at_most_eight_are_named_the_farthest_first(make):
    result = make(VALIDATED, odd=True)
    groups = applicability_groups(result)
    far = [group._replace(residual=group.residual * 1e6 * np.arange(1, 1 + group.residual.size)) for group in groups]
    named = outside(far, result)
    assert len(named) == MOST_NAMED
    residuals = [residual for _, _, residual in named]
    assert residuals == sorted(residuals, reverse=True)
    assert named[0][0] == "S28"


def test_names_do_not_stand_on_each_other(make):
    ax = plot_applicability(make(VALIDATED, odd=True))
    before = len(ax.texts)
    point = (0.1, float(np.mean(ax.get_ylim())))
    _name(ax, [(sample, *point) for sample in ("A", "B", "C")])
    offsets = {text.xyann for text in ax.texts[before:]}
    assert len(offsets) == 3


@pytest.mark.parametrize(("sample", "shown"), [("A", "A"), ("A\nB", "A�B"), ("x" * 30, "x" * 23 + "…")])
def test_ids_are_shortened_to_one_line(sample, shown):
    assert short(sample) == shown


def test_heights_leave_no_residual_and_are_drawn_on_a_plain_scale(make):
    height = '[regression]\nmethod = "band_area"\nbands = [{ signal = "height_at", position = 1715 }]\n'
    ax = plot_applicability(make(height))
    assert (ax.get_xscale(), ax.get_yscale()) == ("log", "linear")
