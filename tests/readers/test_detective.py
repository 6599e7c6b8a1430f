"""The detective's parts: signs, layouts, what numbers prove, which reading is chosen."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import FileFormatError, QuantityError
from quant.readers.delimited import groups_in, looks_like_a_number, number_from
from quant.readers.detective import investigate, kinds_of
from quant.readers.detective_layout import Signs, is_count, layouts_of, sample_row
from quant.readers.detective_values import axis_unit_of, quantity_of, says_itself
from quant.readers.naming import names_an_axis, note_name, note_of, words_above
from quant.readers.options import HEAD, ReadingOptions

FILE = Path("a.csv")


@pytest.mark.parametrize(
    ("cell", "decimal", "thousands", "number"),
    [
        ("1,234.5", ".", ",", 1234.5),
        ("1.234,5", ",", ".", 1234.5),
        ("1'234'567", ".", "'", 1234567.0),
        ("1’234.5", ".", "'", 1234.5),
        ("-1 234,5e2", ",", "space", -123450.0),
        ("1\u202f234", ".", "space", 1234.0),
        ("0.5", ".", ",", 0.5),
        ("4000", ".", ",", 4000.0),
        ("0,123", ".", ",", None),  # nobody groups a leading zero
        ("1,23", ".", ",", None),
        ("1,2345", ".", ",", None),
        ("12345,678", ".", ",", None),
        ("1,234", ".", None, None),
    ],
)
def test_numbers_in_groups_of_three(cell: str, decimal: str, thousands: str | None, number: float | None) -> None:
    assert number_from(cell, decimal, thousands) == number


def test_signs_that_may_part_thousands() -> None:
    assert groups_in("4,000;0.5") == [","]
    assert groups_in("a,1 234,0.5 \u00a0 1'234") == ["'", "space"]
    assert groups_in("0.123 12.34 1234.567 0,5") == []


def test_damaged_numbers_are_told_from_names() -> None:
    assert all(map(looks_like_a_number, ("9O2", "900", "O.25", "1e5")))
    assert not any(map(looks_like_a_number, ("", "A", "K7", "cm-1", "H2O", "Rep 1")))


@pytest.mark.parametrize(
    ("text", "separator", "decimal", "thousands", "kind"),
    [
        ("sample;900;902\nS1;0,5;1\n", ";", ",", None, "spectra_in_rows"),
        ("sample,900,902\nS1,0.5,1\n", ",", ".", None, "spectra_in_rows"),
        ("nm\tA\tB\n1,000.5\t1\t2\n1,001.5\t1\t2\n", "\t", ".", ",", "spectra_in_columns"),
        ("900 0,5\n902 0,6\n", " ", ",", None, "two_columns"),
        ("900,5 1\n902,5 2\n", " ", ",", None, "two_columns"),
    ],
)
def test_one_reading_is_left(text: str, separator: str, decimal: str, thousands: str | None, kind: str) -> None:
    reading = investigate(FILE, text, ReadingOptions())
    assert reading.signs == Signs(separator, decimal, thousands)
    assert reading.layout.kind == kind
    assert reading.evidence


def test_options_rule_readings_out() -> None:
    text = "wavelength,1,2,3\n1,0.1,0.2,0.3\n2,0.1,0.2,0.3\n"
    with pytest.raises(FileFormatError, match="orientation"):
        investigate(FILE, text, ReadingOptions())
    for kind in ("spectra_in_rows", "spectra_in_columns"):
        assert investigate(FILE, text, ReadingOptions(orientation=kind)).layout.kind == kind
    with pytest.raises(FileFormatError, match=r"cannot be read with decimal = ','\. Set decimal = \"\.\""):
        investigate(FILE, "900 0.5\n902 0.6\n", ReadingOptions(decimal=",", format="two_columns"))


@pytest.mark.parametrize(
    ("head", "kinds"),
    [
        (b"sample,900,902\n", {"spectra_in_rows"}),
        (b"nm,A,B\n900,1,2\n902,1,2\n", {"spectra_in_columns"}),
        (b"900,1\n902,2\n", {"two_columns"}),
        (b"id,ethanol\n1,2\n2,3\n", set()),
        (b"id,ethanol,water\n1,2,3\n2,3,4\n", set()),
        (b"", set()),
        (b"\x00", set()),
        (b'"', set()),
        (b"900,1\n" * 2 + b"902," + b"1" * HEAD, {"two_columns"}),  # the last line is cut
    ],
)
def test_spectra_are_told_from_other_tables(head: bytes, kinds: set[str]) -> None:
    assert kinds_of(head) == kinds


def test_layouts_count_damage() -> None:
    rows = [(1, ["sample", "900", "902"]), (2, ["S1", "1", "2"]), (3, ["S2", "1", "x"])]
    (layout,) = layouts_of(rows, Signs(",", "."))
    assert (layout.damaged, layout.n_rows, layout.heads, layout.start) == (1, 2, (0,), 1)


def test_counting_and_the_row_of_sample_ids() -> None:
    assert is_count([1, 2, 3])
    assert is_count([0.0, 1.0])
    assert not is_count([900, 902])
    assert not is_count([])
    heads = [["batch", "A"], ["nm", "S1"], ["day", "1"]]
    assert sample_row(heads, None) == 1
    assert sample_row([*heads, ["Sample", "S1"]], None) == 3
    assert sample_row(heads, "Batch") == 0
    assert sample_row([["a", "S"], ["b", "T"]], None) == 1


def test_units_come_from_words_then_options_then_numbers() -> None:
    falling, rising = np.linspace(4000.0, 400.0, 10), np.linspace(900.0, 1700.0, 10)
    assert axis_unit_of(FILE, falling, None, ReadingOptions())[0] == "cm-1"
    assert axis_unit_of(FILE, falling, None, ReadingOptions(axis_unit="nm")) == ("nm", "")
    assert axis_unit_of(FILE, rising, "nm", ReadingOptions())[0] == "nm"
    unit, evidence = axis_unit_of(FILE, rising, None, ReadingOptions())
    assert unit == "point"
    assert "axis_unit" in evidence


def test_ordinates_come_from_words_then_numbers() -> None:
    dip = 1 - np.exp(-((np.arange(21.0) - 10) ** 2)) * 0.8
    assert quantity_of(FILE, dip[np.newaxis] * 100, None, ReadingOptions())[0] == "percent_transmittance"
    assert quantity_of(FILE, 1 - dip[np.newaxis], None, ReadingOptions())[0] is None
    with pytest.raises(QuantityError, match="transmittance, or absorbance"):
        quantity_of(FILE, dip[np.newaxis], None, ReadingOptions())
    assert quantity_of(FILE, dip[np.newaxis], None, ReadingOptions(quantity="absorbance")) == ("absorbance", "")
    both = np.stack([dip * 100, 100 - dip * 100])  # one spectrum with bands up is enough to doubt
    assert quantity_of(FILE, both, None, ReadingOptions())[0] is None
    assert says_itself(1 - dip[np.newaxis], "absorbance")
    assert not says_itself(dip[np.newaxis], "absorbance")
    assert not says_itself(1 - dip[np.newaxis], "reflectance")


def test_words_in_headings_and_above() -> None:
    assert all(map(names_an_axis, ("nm", "Wavelength", "x", "Wavenumbers (cm-1)", "Wellenzahl")))
    assert not any(map(names_an_axis, ("sample", "Resolution (cm-1)", "max", "")))
    assert words_above([["title"], ["X units", "nm"], ["# Y axis: %T"]]) == ("nm", "percent_transmittance")
    assert note_name(" Sample Holder ") == ("sample_holder", "")
    assert note_of("Temperature (°C)", "25") == {"temperature": "25 °C"}
    assert note_of("Operator", " ") == {}
