"""The picture of windows."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.plots.screening import plot_windows
from quant.recipe.load import recipe_from_text
from quant.screening.screen import screen
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

RECIPE = """title = "t"
[spectra]
files = ["none.csv"]
[reference]
file = "none.csv"
[[analyte]]
name = "acid"
unit = "% m/m"
[regression]
max_factors = 3
[screen.nested]
repeats = 0
[screen.chance]
permutations = 0
"""


@pytest.fixture(scope="module")
def make_result():
    rng = np.random.default_rng(1)
    axis = np.linspace(1800.0, 1610.0, 20)
    values = np.linspace(1, 9, 15)
    spectra = values[:, None] * np.exp(-(((axis - 1705) / 20) ** 2)) + rng.normal(0, 0.3, (15, 20))
    ids = [f"S{i}" for i in range(15)]
    samples = pair_samples(
        SpectraSet(spectra, SpectralAxis(axis, "cm-1"), ids),
        ReferenceTable(ids, [Analyte("acid", "%")], values[:, None]),
    )
    return lambda ranges="": screen(
        recipe_from_text(RECIPE.replace("[screen.nested]", f"[screen]\n{ranges}\n[screen.nested]")), samples
    )


def test_each_window_is_drawn_where_it_lies(make_result):
    result = make_result('[screen.ranges]\nsearch = "windows"\nblock = 4\n')
    ax = plot_windows(result)
    drawn = ax.collections[0]
    shown = drawn.get_array()
    assert shown.count() == 15
    low = np.unravel_index(np.ma.argmin(shown), shown.shape)
    corners = drawn.get_coordinates()[low[0] : low[0] + 2, low[1] : low[1] + 2].reshape(-1, 2)
    middle, width = corners.mean(axis=0)
    mark = next(line for line in ax.get_lines() if str(line.get_label()).startswith("lowest"))
    assert mark.get_xdata()[0] == pytest.approx(middle, abs=3)  # the outer blocks end at the outer points
    assert mark.get_ydata()[0] == pytest.approx(width, abs=6)
    assert abs(mark.get_xdata()[0] - 1705) < mark.get_ydata()[0] / 2  # it holds the band
    assert ax.get_xlim() == (1800.0, 1610.0)
    assert "wavenumber [cm⁻¹]" in ax.get_xlabel()


def test_windows_that_were_not_drawn_stay_blank(make_result):
    result = make_result('budget = 9\n[screen.ranges]\nsearch = "windows"\nblock = 4\n')
    assert plot_windows(result).collections[0].get_array().count() == 9


def test_another_search_has_no_such_picture(make_result):
    with pytest.raises(ParameterError, match="No windows were searched"):
        plot_windows(make_result())
