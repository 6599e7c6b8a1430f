"""Errors against the number of factors."""

import numpy as np
from matplotlib.container import ErrorbarContainer

from quant.plots.factors import plot_factors


def test_both_errors_the_chosen_number_and_every_rule(pls):
    ax = plot_factors(pls)
    crossed = pls.cross_validation
    (bars,) = [c for c in ax.containers if isinstance(c, ErrorbarContainer)]
    assert np.array_equal(bars.lines[0].get_ydata(), crossed.rmsecv[1:])
    labels = [text.get_text() for text in ax.get_legend().get_texts()]
    assert sorted(labels) == [
        "RMSEC (fitted)",
        "RMSECV ± standard error (left out)",
        f"chosen: {pls.factors} (one standard error)",
    ]
    rules = [text.get_text() for text in ax.texts]
    assert rules == [f"{rule.replace('_', ' ')}: {count}" for rule, count in crossed.choices.items()]
    assert (ax.get_xlabel(), ax.get_ylabel()) == ("number of factors", "error [% m/m]")


def test_rmsec_stands_at_its_own_number_of_factors(pls):
    fitted = next(line for line in plot_factors(pls).get_lines() if line.get_label() == "RMSEC (fitted)")
    assert fitted.get_xdata()[0] == 1
    assert np.array_equal(fitted.get_ydata(), pls.picture.rmsec[1 : 1 + len(fitted.get_xdata())])


def test_a_straight_line_is_one_point(band):
    ax = plot_factors(band)
    assert [len(line.get_xdata()) for line in ax.get_lines() if line.get_label() == "RMSEC (fitted)"] == [1]
    assert [text.get_text() for text in ax.texts] == []
