"""What columns and labels say of unit and ordinate."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import AxisMismatchError, FileFormatError, QuantityError
from quant.readers.naming import agreed_axis_unit, agreed_quantity, as_quantity, axis_unit_in, quantity_in
from quant.readers.options import ReadingOptions

FILE = Path("a.csv")


@pytest.mark.parametrize(
    ("heading", "unit"),
    [
        ("Wavenumber (cm-1)", "cm-1"),
        ("wavelength [nm]", "nm"),
        ("nm", "nm"),
        ("wavelength nm", "nm"),
        ("Wavenumber/cm-1", "cm-1"),
        ("x", None),
    ],
)
def test_axis_units_in_headings(heading: str, unit: str | None) -> None:
    assert axis_unit_in(heading) == unit


@pytest.mark.parametrize(
    ("heading", "quantity"),
    [
        ("Absorbance", "absorbance"),
        ("%T", "percent_transmittance"),
        ("Transmittance [%]", "percent_transmittance"),
        ("% Reflectance", "percent_reflectance"),
        ("percent transmittance", "percent_transmittance"),
        ("transmission", "transmittance"),
        ("log(1/R)", "log_reflectance"),
        ("% absorbance", None),
        ("Transmittance [%T]", "percent_transmittance"),
        ("sample A", None),
        ("y", None),
    ],
)
def test_ordinates_in_headings(heading: str, quantity: str | None) -> None:
    assert quantity_in(heading) == quantity


def test_units_have_to_agree() -> None:
    assert agreed_axis_unit(FILE, None, ReadingOptions()) == "point"
    assert agreed_axis_unit(FILE, None, ReadingOptions(axis_unit="nm")) == "nm"
    assert agreed_axis_unit(FILE, "nm", ReadingOptions(axis_unit="nm")) == "nm"
    with pytest.raises(AxisMismatchError, match="'cm-1', but axis_unit = 'nm'"):
        agreed_axis_unit(FILE, "cm-1", ReadingOptions(axis_unit="nm"))


def test_quantities_have_to_agree_up_to_percent() -> None:
    assert agreed_quantity(FILE, "reflectance", ReadingOptions()) == "reflectance"
    assert agreed_quantity(FILE, "arbitrary", ReadingOptions(quantity="absorbance")) == "absorbance"
    percent = ReadingOptions(quantity="percent_transmittance")
    assert agreed_quantity(FILE, "transmittance", percent) == "percent_transmittance"
    with pytest.raises(QuantityError, match="'absorbance', but quantity = 'percent_transmittance'"):
        agreed_quantity(FILE, "absorbance", percent)


def test_percent_is_divided_and_silence_means_absorbance() -> None:
    values, quantity = as_quantity(FILE, np.array([[50.0, 100.0]]), "percent_reflectance")
    assert (values.tolist(), quantity) == ([[0.5, 1.0]], "reflectance")
    assert as_quantity(FILE, np.array([[0.5, np.nan]]), None)[1] == "absorbance"
    with pytest.raises(FileFormatError, match="percent transmittance"):
        as_quantity(FILE, np.array([[50.0, 100.0]]), None)
