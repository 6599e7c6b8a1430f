"""Pictures of an inspection."""

import numpy as np
import pytest
from matplotlib.collections import LineCollection

from quant.inspection.picture import InspectionPicture
from quant.plots.inspection import correlation, plot_overlaid, plot_range, plot_together


@pytest.fixture
def picture():
    values = np.column_stack([np.r_[np.linspace(0, 4, 15), 9, 10, 5, 6], np.linspace(3, 1, 19)])
    values[2, 0] = np.nan
    used = np.zeros(30, dtype=bool)
    used[5:10] = used[20:25] = True
    return InspectionPicture(
        axis=np.linspace(1000, 1290, 30),
        axis_unit="nm",
        quantity="absorbance",
        used=used,
        spectra=np.random.default_rng(1).random((19, 30)),
        processed_axis=np.arange(1050.0, 1060.0),
        processed=np.ones((19, 10)),
        shown=tuple(range(19)),
        analytes=(("$x", "%"), ("y", "")),
        values=values,
        n_calibration=17,
    )


def test_spectra_over_each_other_without_those_that_have_no_value(picture):
    ax = plot_overlaid(picture)
    (lines,) = [c for c in ax.collections if isinstance(c, LineCollection)]
    assert len(lines.get_paths()) == 18
    assert [patch.get_x() for patch in ax.patches] == pytest.approx([1050, 1200])
    assert ax.get_ylabel() == "absorbance"
    assert ax.figure.axes[1].get_ylabel() == "$x [%]"


def test_spectra_after_preprocessing(picture):
    ax = plot_overlaid(picture, analyte=1, processed=True)
    assert ax.get_xlim() == (1050, 1059)
    assert (ax.get_ylabel(), len(ax.patches)) == ("after preprocessing", 0)


def test_the_range_with_every_sample_and_the_gap(picture):
    ax = plot_range(picture)
    calibration, validation = ax.collections
    assert (len(calibration.get_paths()), len(validation.get_paths())) == (16, 2)
    assert ax.get_yticks().min() == 0
    assert [text.get_text() for text in ax.get_legend().get_texts()] == [
        "calibration samples",
        "validation samples",
        "gap",
    ]


def test_two_analytes_against_each_other(picture):
    ax = plot_together(picture)
    assert (ax.get_xlabel(), ax.get_ylabel()) == ("$x [%]", "y")
    known = np.isfinite(picture.values[:17, 0])
    expected = np.corrcoef(picture.values[:17][known].T)[0, 1]
    assert correlation(picture, (0, 1)) == pytest.approx(expected)
    assert ax.texts[0].get_text() == f"r = {expected:+.2f}"
