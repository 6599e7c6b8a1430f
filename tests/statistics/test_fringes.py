"""Path length from fringes, against hand-computed cells and simulated spectra."""

import math

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.fringes import thickness_from_count, thickness_from_spectrum


def test_counted_fringes():
    # b = N/[2·n·(ν1 − ν2)]: computed.
    assert thickness_from_count(20, 2000, 1000) == pytest.approx(100.0)
    assert thickness_from_count(12, 2200, 1000) == pytest.approx(50.0)
    assert thickness_from_count(20, 1000, 2000, refractive_index=1.60) == pytest.approx(62.5)
    assert thickness_from_count(12, 2200, 1000, refractive_index=1.60) == pytest.approx(31.25)


def test_slanting_light_passes_a_film_by_another_way():
    tilted = thickness_from_count(12, 2200, 1000, refractive_index=1.6, incidence=30)
    assert tilted == pytest.approx(31.25 * 1.6 / math.sqrt(1.6**2 - 0.25))


@pytest.mark.parametrize("order", [1, -1])
@pytest.mark.parametrize("index", [1.0, 1.5])
def test_fringes_of_a_spectrum(order, index):
    axis = np.arange(2000.0, 2800.0, 2.0)[::order]
    values = 0.1 + 0.01 * np.cos(4 * np.pi * index * 25e-4 * axis + 0.3)  # 25 µm
    found = thickness_from_spectrum(axis, values, refractive_index=index)
    assert found.thickness == pytest.approx(25.0, rel=1e-3)
    assert found.period == pytest.approx(200.0 / index, rel=1e-3)  # 1/(2·n·b): 200 cm⁻¹ for an empty cell, computed
    assert found.standard_error < 0.05
    assert "thickness" in str(found)


def test_the_standard_error_is_that_of_the_scatter():
    axis, rng = np.arange(2000.0, 2800.0, 4.0), np.random.default_rng(6)
    clean = np.cos(4 * np.pi * 100e-4 * axis)
    found = [thickness_from_spectrum(axis, clean + 0.02 * rng.standard_normal(axis.size)) for _ in range(300)]
    spread = np.std([one.thickness for one in found])
    assert np.mean([one.standard_error for one in found]) == pytest.approx(spread, rel=0.3)
    assert np.mean([one.thickness for one in found]) == pytest.approx(100.0, abs=4 * spread / np.sqrt(300) + 0.02)


def test_what_are_no_fringes_is_refused():
    axis = np.arange(2000.0, 2800.0, 2.0)
    with pytest.raises(NotEnoughDataError, match="0 maxima and minima"):
        thickness_from_spectrum(axis, axis)
    with pytest.raises(NotEnoughDataError, match="noise or bands"):
        thickness_from_spectrum(axis, np.random.default_rng(1).standard_normal(axis.size))
    with pytest.raises(ParameterError, match="rise or fall"):
        thickness_from_spectrum(np.ones(10), np.arange(10.0))
    for wrong in ({"refractive_index": 0.9}, {"incidence": 90}):
        with pytest.raises(ParameterError):
            thickness_from_count(20, 2000, 1000, **wrong)
    with pytest.raises(ParameterError, match="different wavenumbers"):
        thickness_from_count(20, 2000, 2000)
    with pytest.raises(ParameterError, match="above zero"):
        thickness_from_count(0, 2000, 1000)
