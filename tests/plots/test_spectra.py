"""Pictures along the spectral axis."""

import numpy as np
import pytest
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from matplotlib.figure import Figure

from quant.plots.spectra import kept_ranges, plot_bands, plot_regression_vector, plot_spectra, processed_ordinate


def lines(ax: Axes) -> list[np.ndarray]:
    (collection,) = [c for c in ax.collections if isinstance(c, LineCollection)]
    return [path.vertices for path in collection.get_paths()]


def test_spectra_as_read_one_line_a_sample_coloured_by_value(pls):
    ax = plot_spectra(pls)
    (collection,) = [c for c in ax.collections if isinstance(c, LineCollection)]
    assert len(lines(ax)) == len(pls.picture.shown) == 20
    assert np.array_equal(collection.get_array(), pls.picture.shown_values)
    assert (ax.get_xlabel(), ax.get_ylabel()) == ("wavenumber [cm⁻¹]", "absorbance")
    bar = ax.figure.axes[1]
    assert bar.get_ylabel() == "acetone [% m/m]"


def test_wavenumbers_fall_and_wavelengths_rise(pls, make):
    left, right = plot_spectra(pls).get_xlim()
    assert (left, right) == (1800, 1100)
    axis = np.arange(1000.0, 1176.0)
    ax = plot_spectra(make("", axis=axis, unit="nm"))
    assert ax.get_xlim() == (1000, 1175)
    assert ax.get_xlabel() == "wavelength [nm]"


def test_point_numbers_have_no_unit(make):
    assert plot_spectra(make("", axis=np.arange(176.0), unit="point")).get_xlabel() == "point number"


def test_a_cut_breaks_the_line(pls):
    drawn = lines(plot_spectra(pls, processed=True))
    assert len(drawn) == 2 * len(pls.picture.shown)
    assert all(np.abs(np.diff(line[:, 0])).max() == pytest.approx(4.0) for line in drawn)
    assert sum(len(line) for line in drawn) == pls.picture.processed.size


def test_a_cut_breaks_the_regression_vector_too(pls):
    ax = plot_regression_vector(pls)
    zero, *runs = ax.get_lines()
    assert np.array_equal(zero.get_ydata(), [0, 0])
    assert [len(line.get_xdata()) for line in runs] == [51, 51]
    assert np.concatenate([line.get_ydata() for line in runs]) == pytest.approx(pls.picture.regression_vector)
    assert ax.get_ylabel() == "regression vector\n[% m/m per unit of the ordinate]"


def test_kept_ranges_are_shaded_as_read(pls, unvalidated):
    assert kept_ranges(pls) == [(1600, 1800), (1100, 1300)]
    assert len(plot_spectra(pls).patches) == 2
    assert kept_ranges(unvalidated) == []
    assert len(plot_spectra(unvalidated).patches) == 0


def test_the_cut_is_shaded_after_preprocessing(pls):
    (gap,) = plot_spectra(pls, processed=True).patches
    assert sorted(gap.get_x() + np.array([0, gap.get_width()])) == [1300, 1600]


def test_the_ordinate_says_what_was_done_to_it(make):
    derivative = '[[preprocessing]]\nstep = "savitzky_golay"\nwindow = 7\nderivative = 2\n'
    assert processed_ordinate(make(derivative)) == "2nd derivative of absorbance [per (cm⁻¹)²]"
    both = make(derivative.replace("2", "1") + '[[preprocessing]]\nstep = "snv"\n')
    assert processed_ordinate(both) == "1st derivative of absorbance [per cm⁻¹], SNV"


def test_bands_are_shaded_and_the_reference_band_hatched(band):
    ax = plot_bands(band)
    plain, hatched = ax.patches
    assert [text.get_text() for text in ax.texts] == ["band", "reference band"]
    assert (plain.get_hatch(), hatched.get_hatch()) == (None, "////")
    assert [plain.get_x(), plain.get_x() + plain.get_width()] == [1685, 1745]


def test_one_band_from_near_by_with_its_baseline(band):
    ax = plot_bands(band, number=0)
    assert [text.get_text() for text in ax.texts] == ["band"]
    assert sorted(line.get_xdata()[0] for line in ax.get_lines()) == [1650, 1780]
    left, right = ax.get_xlim()
    assert 1780 < left <= 1830
    assert 1600 <= right < 1650


def test_a_height_at_one_position_is_a_line_and_the_whole_axis_needs_no_band(make):
    height = '[regression]\nmethod = "band_area"\nbands = [{ signal = "height_at", position = 1715 }]\n'
    ax = plot_bands(make(height))
    assert len(ax.patches) == 0
    assert [line.get_xdata()[0] for line in ax.get_lines()] == [1715]


def test_axes_given_are_used(pls):
    ax = Figure().add_subplot()
    assert plot_spectra(pls, ax) is ax
    assert plot_regression_vector(pls, ax) is ax
