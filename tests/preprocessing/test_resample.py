"""The resampling step; the interpolation itself is tested in tests/spectra."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.preprocessing.resample import Resample, equal_grid


def test_cubic_onto_another_grid():
    axis = np.linspace(1000.0, 900.0, 37)
    step = Resample(995, 905, 2.5, axis)
    grid = step.axis_after(axis)
    np.testing.assert_array_equal(grid, np.arange(995.0, 904.0, -2.5))
    new = step.fit_transform(((axis - 950) ** 3)[np.newaxis])
    np.testing.assert_allclose(new[0], (grid - 950) ** 3, rtol=1e-10, atol=1e-7)


def test_the_output_runs_from_start_to_stop_whichever_way_the_input_runs():
    axis = np.linspace(900.0, 1000.0, 37)
    spectrum = np.sin(axis / 20)[np.newaxis]
    rising = Resample(995, 905, 2.5, axis).fit_transform(spectrum)
    falling = Resample(995, 905, 2.5, axis[::-1]).fit_transform(spectrum[:, ::-1])
    np.testing.assert_allclose(rising, falling, rtol=1e-13, atol=1e-14)


def test_without_parameters_an_equally_spaced_axis_stays():
    spectra = np.random.default_rng(1).normal(size=(3, 11))
    np.testing.assert_array_equal(Resample().fit_transform(spectra), spectra)
    np.testing.assert_allclose(Resample().axis_after(np.linspace(4000, 650, 11)), np.linspace(4000, 650, 11))


def test_the_last_step_may_fall_short_of_stop():
    np.testing.assert_array_equal(equal_grid(np.arange(11.0), 0, 10, 4), [0, 4, 8])


def test_a_stop_that_rounding_would_miss_is_included():
    assert equal_grid(np.arange(11.0), 0, 0.3, 0.1).size == 4  # 0.3 / 0.1 = 2.9999999999999996


@pytest.mark.parametrize(
    ("parameters", "message"),
    [
        ({"start": -1, "stop": 9, "spacing": 1}, r"1 position\(s\) lie outside the axis: -1; the axis holds 0 to 10"),
        ({"start": 0, "stop": 12, "spacing": 1}, r"2 position\(s\) lie outside the axis: 11, 12"),
        ({"spacing": 0}, r"spacing = 0; expected finite numbers and a spacing above zero"),
        ({"spacing": -1}, r"a distance"),
        ({"start": np.nan}, r"expected finite"),
        ({"spacing": 1e-9}, r"more than 1000000 points"),
    ],
)
def test_refuses_grids_off_the_axis(parameters, message):
    with pytest.raises(ParameterError, match=message):
        Resample(**parameters).fit(np.zeros((2, 11)))
