"""The spectral axis."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.spectra.axis import SpectralAxis


@pytest.mark.parametrize(
    ("values", "unit", "words"),
    [
        ([], "nm", "no values"),
        ([1, 2, 2], "nm", r"repeats at point 3 \(2, then 2 nm\)"),
        ([1, 1, 2], "nm", "point 2"),
        ([1, 2, 1], "nm", "point 3"),
        ([3, 2, 2.5], "nm", "point 3"),
        ([1, np.nan], "nm", "not finite"),
        ([[1, 2]], "nm", "shape"),
        ([1, 2], "inch", "axis unit = 'inch'"),
    ],
)
def test_what_is_no_axis(values: list[float], unit: str, words: str) -> None:
    with pytest.raises(ParameterError, match=words):
        SpectralAxis(values, unit)


def test_direction_spacing_and_text() -> None:
    axis = SpectralAxis([4000, 3998, 3996, 3990], "cm-1")
    assert (axis.direction, axis.spacing, len(axis)) == ("falling", 2.0, 4)
    assert str(axis) == "4000 → 3990 cm⁻¹, 4 points, every 2 cm⁻¹"
    single = SpectralAxis([5])
    assert (single.direction, single.spacing, str(single)) == ("rising", 0.0, "5 → 5 point number, 1 point")


def test_it_is_read_only_and_independent_of_its_source() -> None:
    source = np.array([1.0, 2.0])
    axis = SpectralAxis(source)
    source[0] = 9
    assert axis.values[0] == 1
    with pytest.raises(ValueError, match="read-only"):
        axis.values[0] = 9


def test_equality_is_exact_and_positions_are_up_to_rounding() -> None:
    axis = SpectralAxis([1, 2, 3], "nm")
    assert axis == SpectralAxis([1, 2, 3], "nm")
    assert hash(axis) == hash(SpectralAxis([1, 2, 3], "nm"))
    assert axis != SpectralAxis([1, 2, 3], "um")
    near, far = SpectralAxis([1, 2, 3.0009], "nm"), SpectralAxis([1, 2, 3.0011], "nm")
    assert axis != near
    assert axis.same_positions(near)
    assert not axis.same_positions(far)
    assert not axis.same_positions(axis.reversed())
    assert not axis.same_positions(SpectralAxis([1, 2], "nm"))
    assert axis.reversed().reversed() == axis


def test_another_unit_may_turn_the_direction() -> None:
    axis = SpectralAxis([4000, 2000], "cm-1").to_unit("um")
    assert axis.unit == "um"
    assert axis.values == pytest.approx([2.5, 5.0])
    assert axis.direction == "rising"
