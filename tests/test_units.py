"""Units and conversions."""

import numpy as np
import pytest

from quant.errors import ParameterError, QuantityError
from quant.units import (
    absorbance_from_transmittance,
    axis_unit_named,
    convert_axis,
    plain_word,
    transmittance_from_absorbance,
)


@pytest.mark.parametrize(
    ("text", "unit"),
    [
        ("1/CM", "cm-1"),
        (" cm^-1 ", "cm-1"),
        ("(cm-1)", "cm-1"),
        ("Wavenumber", "cm-1"),
        ("NANOMETERS", "nm"),
        ("µm", "um"),
        ("MICROMETERS", "um"),
        ("point number", "point"),
        ("SECONDS", None),
        ("", None),
    ],
)
def test_names_of_axis_units(text: str, unit: str | None) -> None:
    assert axis_unit_named(text) == unit


def test_words_are_compared_without_case_blanks_and_brackets() -> None:
    assert plain_word(" Log_10 (1/R) [ ]") == "log101/r"


@pytest.mark.parametrize(
    ("value", "unit", "to", "expected"),
    [
        (4000.0, "cm-1", "nm", 2500.0),  # 1e7 / 4000
        (2.5, "um", "cm-1", 4000.0),
        (2500.0, "nm", "um", 2.5),
        (7.0, "point", "point", 7.0),
    ],
)
def test_axis_conversions(value: float, unit: str, to: str, expected: float) -> None:
    assert convert_axis([value], unit, to) == pytest.approx([expected])
    assert convert_axis(convert_axis([value], unit, to), to, unit) == pytest.approx([value])


def test_what_has_no_counterpart() -> None:
    with pytest.raises(ParameterError, match="No conversion from 'point' to 'nm'"):
        convert_axis([1.0], "point", "nm")
    with pytest.raises(ParameterError, match="0 cm-1 has no counterpart in nm"):
        convert_axis([1.0, 0.0], "cm-1", "nm")


def test_absorbance_of_percent_transmittance() -> None:
    # A = -log10 T, computed; rounded as textbooks tabulate it.
    percent = np.array([100, 90, 79.43, 50, 36.79, 25, 10, 5, 1, 0.1])
    expected = [0, 0.0458, 0.1000, 0.3010, 0.4343, 0.6021, 1.0000, 1.3010, 2.0000, 3.0000]
    assert absorbance_from_transmittance(percent / 100) == pytest.approx(expected, abs=5e-5)
    back = transmittance_from_absorbance(absorbance_from_transmittance(percent / 100))
    assert back == pytest.approx(percent / 100, rel=1e-12)


@pytest.mark.parametrize("transmittance", [0.0, -0.1])
def test_no_light_has_no_absorbance(transmittance: float) -> None:
    with pytest.raises(QuantityError, match="has no absorbance; expected T above 0"):
        absorbance_from_transmittance([0.5, transmittance])
