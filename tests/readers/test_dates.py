"""Dates: read where there is one way, refused where there are two."""

from pathlib import Path

import pytest

from quant.errors import FileFormatError
from quant.readers.dates import iso_dates


def dates(*cells, order=None):
    return iso_dates(Path("r.csv"), list(enumerate(cells, 2)), "sampled", order)


@pytest.mark.parametrize(
    ("cell", "expected"),
    [
        ("2026-12-31", "2026-12-31"),
        ("2026/3/4", "2026-03-04"),
        ("2026.12.31", "2026-12-31"),
        ("31.12.2026", "2026-12-31"),
        ("3.4.2026", "2026-04-03"),  # points: day first
        ("31/12/2026", "2026-12-31"),
        ("12/31/2026", "2026-12-31"),
        ("05-05-2026", "2026-05-05"),  # both readings agree
        ("2026-12-31 14:05", "2026-12-31T14:05"),
        ("31.12.2026 9:05:07", "2026-12-31T09:05:07"),
        ("2026-12-31T14:05:00", "2026-12-31T14:05:00"),
        ("29.2.2024", "2024-02-29"),
        (" ", ""),
    ],
)
def test_one_reading(cell, expected):
    assert dates(cell) == [expected]


def test_two_readings_are_refused_with_both():
    message = (
        r"r\.csv, line 3: '03/04/2026' in column 'sampled' may be 2026-04-03 \(day first\) or 2026-03-04 "
        r'\(month first\)\. Set date_order = "dmy" or "mdy" under \[reference\]'
    )
    with pytest.raises(FileFormatError, match=message):
        dates("2026-01-01", "03/04/2026")
    assert dates("03/04/2026", order="dmy") == ["2026-04-03"]
    assert dates("03/04/2026", order="mdy") == ["2026-03-04"]


def test_another_date_of_the_column_may_settle_it():
    assert dates("03/04/2026", "13/04/2026") == ["2026-04-03", "2026-04-13"]
    assert dates("03/04/2026", "04/13/2026") == ["2026-03-04", "2026-04-13"]
    with pytest.raises(FileFormatError, match="may be"):
        dates("03/04/2026", "13.04.2026")  # points prove nothing of slashes
    with pytest.raises(
        FileFormatError, match="'13/04/2026', which is day first, and '04/13/2026', which is month first"
    ):
        dates("13/04/2026", "04/13/2026")


@pytest.mark.parametrize(
    ("cell", "order", "message"),
    [
        ("week 12", None, "found 'week 12' in column 'sampled'; expected a date such as 2026-12-31 or 31.12.2026"),
        ("31.12.26", None, "expected a year of four digits"),
        ("31.2.2026", None, "read day first it is no day of the calendar"),
        ("31/31/2026", None, "read day first or month first it is no day"),
        ("31/12/2026", "mdy", "read month first it is no day"),
        ("31/12/2026", "ymd", "read year first it is no day"),
        ("2026-12-31 25:00", None, "no day of the calendar"),
        ("2026-12/31", None, "expected a date"),
        ("0000-01-01", None, "no day of the calendar"),
        ("٣١.١٢.٢٠٢٦", None, "expected a date"),
    ],
)
def test_no_date(cell, order, message):
    with pytest.raises(FileFormatError, match=f"line 2: .*{message}"):
        dates(cell, order=order)
