"""Choose between readings of a table: the only one, the better proven, or the question that settles it."""

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path

from quant.errors import FileFormatError
from quant.readers.delimited import SAMPLE_COLUMNS, SIGN_WORDS, Row
from quant.readers.detective_layout import Layout, Signs, body_of, clipped, is_count
from quant.readers.naming import names_an_axis
from quant.readers.options import ReadingOptions

LARGEST_ORDINATE = 1000.0
LARGEST_POSITION = 1e5  # nm or cm⁻¹; beyond it a sign has been misunderstood
_UNGROUPED = re.compile(r"\s*[+-]?[1-9]\d{3,}(?:\D|$)", re.ASCII)
_PLAIN_WORDS = {
    "two_columns": "one spectrum in two columns",
    "spectra_in_rows": "spectra in rows",
    "spectra_in_columns": "spectra in columns",
}


@dataclass(frozen=True)
class Reading:
    """One way to read a table: the meaning of its signs, where things stand, its rows, and why it is read so."""

    signs: Signs
    layout: Layout
    rows: Sequence[Row]
    evidence: tuple[str, ...] = ()

    @property
    def positions(self) -> list[float]:
        """Axis positions, from the header or the first column."""
        if self.layout.kind == "spectra_in_rows":
            found = [self.signs.position(cell) for cell in clipped(self.rows[self.layout.heads[0]][1])]
            return [position[0] for position in found if position is not None]
        numbers = [self.signs.number(cells[0]) for _, cells in body_of(self.rows, self.layout)]
        return [number for number in numbers if number is not None]

    @property
    def point_columns(self) -> list[int]:
        """Places of the cells of a row that hold numbers."""
        if self.layout.kind != "spectra_in_rows":
            return list(range(self.layout.width))
        head = clipped(self.rows[self.layout.heads[0]][1])
        return [i for i, cell in enumerate(head) if self.signs.position(cell) is not None]

    @property
    def runs_one_way(self) -> bool:
        """Whether the axis positions rise or fall throughout."""
        pairs = list(zip(self.positions, self.positions[1:], strict=False))
        return all(a < b for a, b in pairs) or all(a > b for a, b in pairs)

    def numbers(self) -> tuple[tuple[float, ...], ...]:
        """Axis and all ordinates as they are understood, missing ones as minus infinity so that they compare equal."""
        columns = self.point_columns
        rows = [
            tuple(_comparable(self.signs.number(cells[i])) for i in columns)
            for _, cells in body_of(self.rows, self.layout)
        ]
        return tuple(self.positions), *rows

    def remedy(self, key: str) -> str:
        """Say which value of `key` gives this reading."""
        values = {
            "separator": SIGN_WORDS.get(self.signs.separator, self.signs.separator),
            "decimal": self.signs.decimal,
            "thousands": self.signs.thousands,
            "orientation": self.layout.kind,
        }
        value = values[key]
        return f"Leave {key} out." if value is None or value == "two_columns" else f'Set {key} = "{value}".'


def whole(readings: Sequence[Reading]) -> list[Reading]:
    """Return the readings that fit every row, and at least one."""
    return [each for each in readings if each.layout.n_rows and not each.layout.damaged]


def decided(path: Path, readings: Sequence[Reading], options: ReadingOptions) -> Reading:
    """Return the only reading, or the one that fits most rows when all are damaged.

    Raises
    ------
    FileFormatError
        Two readings with different numbers; or a table that may as well hold no spectra.
    """
    left = whole(readings)
    if len(left) > 1:
        left = _oriented(_distinct(_plausible(left, options)), options)
    if len(left) > 1:
        raise FileFormatError(path, _question(left[0], left[1]))
    chosen = left[0] if left else max(readings, key=_share_that_fits)
    layout = chosen.layout
    if layout.kind == "spectra_in_columns" and not layout.evidence:
        raise FileFormatError(
            path,
            "the rows of numbers may be spectra in columns, with the axis in the first one, or numbered samples with "
            "other values. If they are spectra, name the first column (wavelength, nm, cm-1 ...) or set "
            'orientation = "spectra_in_columns".',
        )
    said = _PLAIN_WORDS[layout.kind]
    if layout.evidence and layout.evidence != "as stated":
        said = f"{said}: {layout.evidence}"
    return replace(chosen, evidence=(said,))


def _share_that_fits(reading: Reading) -> float:
    layout = reading.layout
    return (layout.n_rows - layout.damaged) / max(layout.n_rows, 1)


def _plausible(readings: list[Reading], options: ReadingOptions) -> list[Reading]:
    """Drop readings that the file itself contradicts, as long as another remains.

    Who writes 4.000 for four thousand does not write 4000 elsewhere in the same file. No axis passes 100 000, and no
    ordinate that the program knows reaches a thousand. A table without sample IDs or axis gives way to one with them.
    """
    if options.thousands is None and any(each.signs.thousands is None for each in readings):
        readings = [each for each in readings if each.signs.thousands is None or not _has_ungrouped(each)]
    for is_likely in (_has_evidence, _has_likely_numbers):
        readings = [each for each in readings if is_likely(each)] or readings
    return readings


def _has_evidence(reading: Reading) -> bool:
    return reading.layout.kind == "two_columns" or bool(reading.layout.evidence)


def _has_likely_numbers(reading: Reading) -> bool:
    grouped = reading.signs.thousands is not None
    axis, *rows = reading.numbers()
    first = 0 if reading.layout.kind == "spectra_in_rows" else 1  # the first column is the axis
    return all(abs(x) <= LARGEST_POSITION for x in axis) and not (
        grouped and any(LARGEST_ORDINATE <= y < math.inf for row in rows for y in row[first:])
    )


def _has_ungrouped(reading: Reading) -> bool:
    columns = reading.point_columns
    rows = [clipped(reading.rows[i][1]) for i in reading.layout.heads if reading.layout.kind == "spectra_in_rows"]
    rows += [cells for _, cells in body_of(reading.rows, reading.layout)]
    return any(_UNGROUPED.match(cells[i]) for cells in rows for i in columns)


def _distinct(readings: list[Reading]) -> list[Reading]:
    """Keep the first of readings that give the same numbers in the same layout."""
    if len(readings) < 2:
        return readings
    kept: dict[tuple[object, ...], Reading] = {}
    for each in readings:
        kept.setdefault((each.layout.kind, *each.numbers()), each)
    return list(kept.values())


def _oriented(readings: list[Reading], options: ReadingOptions) -> list[Reading]:
    """Decide between rows and columns of one table where its words or its counting do."""
    by_kind = {each.layout.kind: each for each in readings}
    rows, columns = by_kind.get("spectra_in_rows"), by_kind.get("spectra_in_columns")
    if len(readings) != 2 or rows is None or columns is None:
        return readings
    headings = clipped(rows.rows[rows.layout.heads[0]][1])
    names = {heading.lower() for heading in headings}
    counted, first_counted = is_count(rows.positions), is_count(columns.positions)
    corner = headings[0] if headings else ""
    if (
        not columns.layout.evidence
        or not columns.runs_one_way
        or names & {*SAMPLE_COLUMNS, options.sample_column or "?"}
    ):
        return [rows]
    if not rows.runs_one_way or (names_an_axis(corner) and counted and not first_counted):
        return [columns]
    return readings


def _question(one: Reading, other: Reading) -> str:
    """Name two readings by the first row in which they differ, and the key that settles it."""
    keys = [key for key in ("separator", "decimal", "thousands") if _value(one, key) != _value(other, key)]
    if one.layout.kind != other.layout.kind:
        keys = [*keys, "orientation"] if {one.layout.kind, other.layout.kind} != {"two_columns"} else keys
    key = next((key for key in keys if None not in (_value(one, key), _value(other, key))), keys[0])
    return (
        f"two readings are possible: {_PLAIN_WORDS[one.layout.kind]}, the first row being {_shown(one)}; or "
        f"{_PLAIN_WORDS[other.layout.kind]}, the first row being {_shown(other)}. For the first: {one.remedy(key)} "
        f"For the second: {other.remedy(key)}"
    )


def _value(reading: Reading, key: str) -> str | None:
    return reading.layout.kind if key == "orientation" else getattr(reading.signs, key)


def _shown(reading: Reading) -> str:
    """Write the first row of numbers as it is understood."""
    _, cells = body_of(reading.rows, reading.layout)[0]
    numbers = [reading.signs.number(cells[i]) for i in reading.point_columns[:3]]
    return " | ".join(f"{number:.10g}" for number in numbers if number is not None)


def _comparable(number: float | None) -> float:
    return -math.inf if number is None or math.isnan(number) else number
