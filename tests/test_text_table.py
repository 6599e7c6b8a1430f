"""Numbers and tables as they print."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.text_table import format_columns, format_number, format_rows


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (0.0312456, "0.03125"),
        (-0.0312456, "-0.03125"),
        (0.0001, "0.0001000"),
        (9.99996, "10.00"),  # rounding adds a digit before the point: four significant ones all the same
        (123456.7, "123457"),
        (1e6, "1000000"),
        (2.5e6, "2.500e+06"),
        (9.9e-5, "9.900e-05"),
        (0.0, "0"),
        (42, "42"),
        (12345678, "12345678"),
        (np.int64(7), "7"),
        (np.float64(0.5), "0.5000"),
        (None, "–"),
        (float("nan"), "not available"),
        (-np.inf, "-infinite"),
        (True, "yes"),
        (np.False_, "no"),
        ("not resolvable", "not resolvable"),
    ],
)
def test_a_value_as_text(value, text):
    assert format_number(value) == text


def test_digits_are_counted_from_the_first_that_counts():
    assert [format_number(0.0123456, digits) for digits in (1, 2, 3)] == ["0.01", "0.012", "0.0123"]


def test_rows_line_up_and_the_unit_follows_the_value():
    rows = [("bias", -0.0312456, "% m/m"), ("samples", 42, ""), ("SEP", None, "% m/m"), ("verdict", "not accepted", "")]
    assert format_rows(rows).splitlines() == [
        "bias     -0.03125 % m/m",
        "samples        42",
        "SEP             – % m/m",
        "verdict  not accepted",
    ]


def test_no_rows_print_as_nothing():
    assert format_rows([]) == ""


def test_columns_of_numbers_stand_right_and_of_text_left():
    table = format_columns(["sample", "value", "note"], [["A1", 0.5, "ok"], ["sample 12", None, "gap"], ["B", 12, ""]])
    assert table.splitlines() == [
        "sample      value  note",
        "A1         0.5000  ok",
        "sample 12       –  gap",
        "B              12",
    ]


def test_a_header_without_rows_prints_alone():
    assert format_columns(["sample", "value"], []) == "sample  value"


def test_a_row_of_another_length_is_refused():
    with pytest.raises(ParameterError, match="row 1 has 1 cells; the header has 2"):
        format_columns(["a", "b"], [[1, 2], [3]])
