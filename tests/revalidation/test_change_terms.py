"""Terms are the derivatives of what changes really do; larger changes are done exactly."""

import numpy as np
import pytest

from quant.revalidation.change_terms import (
    GAIN,
    OFFSET,
    RESOLUTION,
    SHIFT,
    SPECTRAL_KINDS,
    STRETCH,
    VAPOUR,
    Ground,
    blurred,
    changed,
    ground_for,
    moved,
    terms,
)
from quant.spectra.simulate import Band, band_profile

AXIS = np.arange(1900.0, 899.0, -2.0)
BANDS = (Band(1700.0, 24.0, 0.6, "gaussian"), Band(1400.0, 30.0, 0.4, "gaussian"), Band(1100.0, 20.0, 0.5, "gaussian"))
SMALL = {SHIFT: 1e-3, STRETCH: 1e-6, GAIN: 1e-4, RESOLUTION: 1e-2}


def bands_at(shift: float = 0.0, stretch: float = 0.0, axis: np.ndarray = AXIS) -> np.ndarray:
    """True absorbances with every point of the axis where it was before it moved."""
    return sum(band_profile((axis - shift) / (1.0 + stretch), band) for band in BANDS)[None]


def ground(axis: np.ndarray = AXIS, *, light: bool = True, unit: str = "cm-1") -> Ground:
    return ground_for(axis, unit, np.ones(axis.size, dtype=bool), light=light, resolution=4.0)


@pytest.mark.parametrize("kind", SPECTRAL_KINDS)
@pytest.mark.parametrize("light", [True, False])
def test_a_term_is_what_a_small_change_does(kind: str, light: bool) -> None:
    here, rows, size = ground(light=light), bands_at(), SMALL.get(kind, 1e-4)
    done = (changed(here, rows, {kind: np.array([size])}) - rows)[0] / size
    stated = terms(here, rows, [kind])[0, 0]
    used = here.used
    # Derivatives by differences are a few percent off where bands are narrow: enough to step by, and the sizes found
    # are those of `changed`.
    assert done[used] == pytest.approx(stated[used], abs=0.08 * np.abs(stated[used]).max())


@pytest.mark.parametrize(("shift", "stretch"), [(0.7, 0.0), (0.0, 3e-4), (-1.3, 2e-4)])
@pytest.mark.parametrize("axis", [AXIS, AXIS[::-1]])
def test_a_moved_spectrum_is_the_one_recorded_there(shift: float, stretch: float, axis: np.ndarray) -> None:
    here = ground(axis)
    found = moved(here, bands_at(axis=axis), np.array([shift]), np.array([stretch]))
    assert found[0, here.used] == pytest.approx(bands_at(shift, stretch, axis)[0, here.used], abs=2e-4)


@pytest.mark.parametrize("width", [1.0, 3.0, 8.0])
def test_a_blurred_gaussian_is_wider_and_lower(width: float) -> None:
    # published-values.md 5.1: a Gaussian of width w seen through one of width r has √(w² + r²) and w/√(w² + r²)
    seen = float(np.hypot(24.0, width))
    found = blurred(ground(light=False), band_profile(AXIS, BANDS[0])[None], np.array([width**2]))
    expected = band_profile(AXIS, Band(1700.0, seen, 0.6 * 24.0 / seen, "gaussian"))
    assert found[0] == pytest.approx(expected, abs=1e-6)


def test_each_spectrum_changes_by_its_own_size() -> None:
    here, rows = ground(), np.repeat(bands_at(), 3, axis=0)
    sizes = {
        SHIFT: np.array([0.0, 0.5, -0.5]),
        RESOLUTION: np.array([0.0, 4.0, -4.0]),
        OFFSET: np.array([0.0, 0.1, 0.2]),
    }
    each = changed(here, rows, sizes)
    alone = [changed(here, rows[:1], {kind: size[i : i + 1] for kind, size in sizes.items()})[0] for i in range(3)]
    assert each == pytest.approx(np.array(alone))
    assert each[0] == pytest.approx(rows[0])


def test_what_is_looked_for_depends_on_the_axis() -> None:
    assert ground().kinds == SPECTRAL_KINDS
    dry = np.arange(1300.0, 899.0, -2.0)
    assert VAPOUR not in ground(dry).kinds
    assert VAPOUR not in ground(np.linspace(1100.0, 1700.0, 301), unit="nm").kinds


def test_carbon_dioxide_and_the_ends_of_runs_are_left_out() -> None:
    axis = np.concatenate([np.arange(2600.0, 2199.0, -2.0), np.arange(1800.0, 1599.0, -2.0)])
    here = ground(axis)
    assert not here.used[(axis > 2280.0) & (axis < 2390.0)].any()
    assert not here.used[axis > 2592.0].any()
    assert not here.used[(axis < 2208.0) & (axis > 1792.0)].any()
    assert len(here.runs) == 2
    assert here.used.sum() > 200
