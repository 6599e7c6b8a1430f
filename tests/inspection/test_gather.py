"""What reaches the regression, and gaps bridged."""

import numpy as np
import pytest

from quant.inspection.gather import bridged, used_points
from quant.recipe.load import recipe_from_text
from quant.recipe.pipeline import axis_behind, build_steps
from quant.spectra.axis import SpectralAxis

RECIPE = 'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "a"\n'
KEEP = '[[preprocessing]]\nstep = "keep_ranges"\nranges = [[20, 12], [6, 4]]\n'
BAND = """[regression]
method = "band_area"
bands = [{ signal = "area", range = [14, 16], baseline = [13, 17] }, { signal = "height_at", position = 5 }]
"""


@pytest.mark.parametrize(
    ("more", "expected"),
    [
        ("", [*range(21)]),
        (KEEP, [4, 5, 6, *range(12, 21)]),
        (BAND, [5, *range(13, 18)]),
        (KEEP + BAND, [5, *range(13, 18)]),
    ],
)
def test_points_that_are_used(more, expected):
    recipe = recipe_from_text(RECIPE + more)
    axis = SpectralAxis(np.arange(20.0, -1.0, -1.0), "cm-1")
    behind = axis_behind(build_steps(recipe, axis, "absorbance"), axis)
    assert sorted(axis.values[used_points(recipe, axis, behind)]) == expected


def test_gaps_are_bridged_by_straight_lines():
    rows = np.array([[1.0, np.nan, np.nan, 4.0], [np.nan, 2.0, 3.0, np.nan], [np.nan] * 4])
    assert bridged(rows).tolist() == [[1, 2, 3, 4], [2, 2, 3, 3], [0, 0, 0, 0]]
    whole = np.ones((2, 3))
    assert bridged(whole) is whole
