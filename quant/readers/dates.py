"""Dates as tables write them, into ISO form."""

import re
from collections.abc import Sequence
from datetime import datetime
from pathlib import Path

from quant.errors import FileFormatError

ORDERS = ("dmy", "mdy", "ymd")
"""Orders of day, month and year."""

_WORDS = {"dmy": "day first", "mdy": "month first", "ymd": "year first"}
_DATE = re.compile(
    r"(?P<first>\d{1,4})(?P<sign>[./-])(?P<second>\d{1,2})(?P=sign)(?P<third>\d{1,4})"
    r"(?:(?:T|\s+)(?P<time>\d{1,2}:\d{2}(?::\d{2})?))?",
    re.ASCII,
)


def iso_dates(path: Path, cells: Sequence[tuple[int, str]], heading: str, order: str | None = None) -> list[str]:
    """Return the dates of a column in ISO form, such as "2026-12-31"; an empty cell stays empty.

    2026-12-31 (or with slashes or points) is year first and 31.12.2026 is day first. 31/12/2026 and 12/31/2026 tell
    their order by themselves; where neither stands in the column, 03/04/2026 is refused. A time of day is kept.

    Parameters
    ----------
    path : path
        For messages.
    cells : sequence of (int, str)
        Line, counted from 1, and content.
    heading : str
        For messages.
    order : {"dmy", "mdy", "ymd"}, optional
        The order of all dates that do not begin with a year of four digits.

    Raises
    ------
    FileFormatError
        No date, a year of two digits, or dates that can be read in two ways, with both.
    """
    readings = [(line, cell, _readings(path, line, cell, heading, order)) for line, cell in cells]
    # Points are always day first, and say nothing of dates with slashes beside them.
    single = {next(iter(found)): cell for _, cell, found in readings if len(found) == 1 and "." not in cell}
    if {"dmy", "mdy"} <= set(single):
        raise FileFormatError(
            path,
            f"column {heading!r} holds {single['dmy']!r}, which is day first, and {single['mdy']!r}, which is month "
            "first; expected one order. Write dates as 2026-12-31.",
        )
    settled = next((each for each in single if each != "ymd"), None)
    return [_chosen(path, line, cell, heading, found, settled) for line, cell, found in readings]


def _chosen(path: Path, line: int, cell: str, heading: str, found: dict[str, str], settled: str | None) -> str:
    if not found:
        return ""
    if len(set(found.values())) == 1:
        return next(iter(found.values()))
    if settled is None:
        both = " or ".join(f"{iso} ({_WORDS[order]})" for order, iso in found.items())
        raise FileFormatError(
            path,
            f'{cell.strip()!r} in column {heading!r} may be {both}. Set date_order = "dmy" or "mdy" under [reference].',
            line=line,
        )
    return found[settled]


def _readings(path: Path, line: int, cell: str, heading: str, order: str | None) -> dict[str, str]:
    """Return the valid readings of a cell by their order; none for an empty cell."""
    text = cell.strip()
    if not text:
        return {}
    match = _DATE.fullmatch(text)
    if match is None:
        raise _refusal(path, line, text, heading, "expected a date such as 2026-12-31 or 31.12.2026")
    first, second, third = match["first"], match["second"], match["third"]
    if len(first) == 4 and len(third) <= 2:
        orders = ["ymd"]
    elif len(third) == 4 and len(first) <= 2:
        orders = [order] if order else ["dmy"] if match["sign"] == "." else ["dmy", "mdy"]
    else:
        raise _refusal(path, line, text, heading, "expected a year of four digits")
    parts = {"ymd": (first, second, third), "dmy": (third, second, first), "mdy": (third, first, second)}
    found = {each: iso for each in orders if (iso := _iso(parts[each], match["time"]))}
    if not found:
        words = " or ".join(_WORDS[each] for each in orders)
        raise _refusal(path, line, text, heading, f"read {words} it is no day of the calendar; expected a date")
    return found


def _refusal(path: Path, line: int, text: str, heading: str, expected: str) -> FileFormatError:
    return FileFormatError(path, f"found {text[:40]!r} in column {heading!r}; {expected}. Mend the cell.", line=line)


def _iso(parts: tuple[str, str, str], time: str | None) -> str | None:
    year, month, day = parts
    clock = [int(part) for part in time.split(":")] if time else []
    hour, minute, second = [*clock, 0, 0, 0][:3]
    try:
        moment = datetime(int(year), int(month), int(day), hour, minute, second)
    except ValueError:
        return None
    if time is None:
        return moment.date().isoformat()
    return moment.isoformat(timespec="seconds" if len(clock) == 3 else "minutes")
