"""How a table lies: two columns, spectra in rows, or spectra in columns; found from its cells, damaged rows counted."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from quant.readers.delimited import SAMPLE_COLUMNS, Row, looks_like_a_number, number_from, position_from
from quant.readers.naming import names_an_axis

MISSING = ("", "nan", "na", "n/a")
"""Cells (in lower case) that say that a point is missing."""

MOST_DAMAGED = 10  # rows above the data that are looked at for damaged ones
LARGEST_PREAMBLE = 2  # cells with content in a line above the header; more would be a header of its own


@dataclass(frozen=True)
class Signs:
    """What the signs of a text mean."""

    separator: str
    decimal: str
    thousands: str | None = None

    def number(self, cell: str) -> float | None:
        """Return the number in a cell, NaN where it is missing, None where it holds anything else."""
        value = number_from(cell, self.decimal, self.thousands)
        return float("nan") if value is None and cell.strip().lower() in MISSING else value

    def position(self, cell: str) -> tuple[float, str | None] | None:
        """Return axis position and unit in a heading, None where it is no position."""
        return position_from(cell, self.decimal, self.thousands)


@dataclass(frozen=True)
class Layout:
    """Where things stand in the rows of a table.

    Parameters
    ----------
    kind : {"two_columns", "spectra_in_rows", "spectra_in_columns"}
    heads : tuple of int
        Places of the rows of headings; none, one, or (spectra in columns) several.
    start : int
        Place of the first row of data.
    width : int
        Cells of a row of data; empty ones behind them are trailing separators.
    damaged, n_rows : int
        Rows of data that do not fit, out of how many.
    evidence : str
        Why it is taken to lie so; empty where nothing but the shape says it.
    """

    kind: str
    heads: tuple[int, ...]
    start: int
    width: int
    damaged: int
    n_rows: int
    evidence: str = ""


def layouts_of(
    rows: Sequence[Row], signs: Signs, orientation: str | None = None, sample_column: str | None = None
) -> list[Layout]:
    """Return how these rows may lie, whole or damaged; `orientation` rules out what it does not name."""
    found = [
        None if orientation == "spectra_in_columns" else _in_rows(rows, signs, sample_column),
        None if orientation == "spectra_in_rows" else _in_columns(rows, signs, stated=orientation is not None),
    ]
    return [layout for layout in found if layout is not None]


def clipped(cells: Sequence[str]) -> list[str]:
    """Return cells stripped of blanks, without the empty ones at the end and without the sign of a comment."""
    kept = [cell.strip() for cell in cells]
    while kept and not kept[-1]:
        kept.pop()
    if kept and kept[0].startswith("#"):
        kept[0] = kept[0].lstrip("# \t")
        return kept if kept[0] else kept[1:]  # "# a b" parted by blanks begins with a lone sign
    return kept


def is_comment(cells: Sequence[str]) -> bool:
    """Tell whether a row is a comment."""
    return cells[0].lstrip().startswith("#")


def body_of(rows: Sequence[Row], layout: Layout) -> list[Row]:
    """Return the rows of data; comments of another width than the table's are left out."""
    width = layout.width
    return [row for row in rows[layout.start :] if len(row[1]) >= width or not is_comment(row[1])]


def fits_width(cells: Sequence[str], width: int) -> bool:
    """Tell whether a row has `width` cells, and nothing but trailing separators behind them."""
    return len(cells) == width or (len(cells) > width and not any(map(str.strip, cells[width:])))


def _in_rows(rows: Sequence[Row], signs: Signs, sample_column: str | None) -> Layout | None:
    """Header of axis positions and at least one other column; one spectrum a row."""
    for place, (_, cells) in enumerate(rows):
        head = clipped(cells)
        if len(head) <= LARGEST_PREAMBLE:
            continue
        is_point = [signs.position(cell) is not None for cell in head]
        points = [i for i, yes in enumerate(is_point) if yes]
        is_header = 2 <= len(points) < len(head)

        def fits(row: list[str], head: list[str] = head, points: list[int] = points) -> bool:
            return fits_width(row, len(head)) and all(signs.number(row[i]) is not None for i in points)

        if is_comment(cells):
            following = next((row for _, row in rows[place + 1 :] if not is_comment(row)), [])
            if not (is_header and fits(following)):
                continue  # a comment, and no header that is marked as one
        if is_header:
            evidence = _sample_evidence(
                [cell for cell, yes in zip(head, is_point, strict=True) if not yes], sample_column
            )
            return _counted(Layout("spectra_in_rows", (place,), place + 1, len(head), 0, 0, evidence), rows, fits)
        if sum(map(bool, head)) > LARGEST_PREAMBLE:
            return None
    return None


def _sample_evidence(texts: Sequence[str], sample_column: str | None) -> str:
    """Say which of the columns that are no positions holds the sample IDs; empty where none is known to."""
    wanted = SAMPLE_COLUMNS if sample_column is None else (sample_column.lower(),)
    named = next((text for text in texts if text.lower() in wanted), None)
    if named is not None:
        return f"samples in column {named!r}"
    alone = len(texts) == 1 and (not texts[0] or names_an_axis(texts[0]))
    return "samples in the only column without an axis position" if alone else ""


def _in_columns(rows: Sequence[Row], signs: Signs, *, stated: bool) -> Layout | None:
    """Rows of numbers: an axis position, then one ordinate (two columns) or several."""

    def is_data(cells: list[str]) -> bool:
        kept = clipped(cells)
        return (
            len(kept) >= 2
            and number_from(cells[0], signs.decimal, signs.thousands) is not None
            and all(signs.number(cell) is not None for cell in kept[1:])
        )

    start = _first_of_two(rows, is_data)
    if start is None:
        return None
    head = clipped(rows[start - 1][1]) if start else []
    shown = max(len(clipped(cells)) for _, cells in rows[start : start + 2])
    width = len(head) if shown < len(head) <= len(rows[start][1]) else shown  # the last ordinates may be missing

    def fits(cells: list[str]) -> bool:
        return (
            fits_width(cells, width)
            and number_from(cells[0], signs.decimal, signs.thousands) is not None
            and all(signs.number(cell) is not None for cell in cells[1:width])
        )

    if width == 2 and not stated:
        start = _first_damaged(rows, start, signs, is_data)
        head = clipped(rows[start - 1][1]) if start else []
        above = (start - 1,) if len(head) == 2 else ()
        return _counted(Layout("two_columns", above, start, 2, 0, 0), rows, fits)
    top = start = _first_damaged(rows, start, signs, is_data)
    while top and _heads_columns(rows[top - 1][1], width) and not is_data(rows[top - 1][1]):
        top -= 1
    if all(len(clipped(cells)) == 1 for _, cells in rows[top:start]):
        return None  # without headings of all columns there are no sample IDs
    heads = tuple(range(top, start))
    evidence = "as stated" if stated else _axis_evidence([clipped(rows[i][1])[0] for i in heads], rows, start, signs)
    return _counted(Layout("spectra_in_columns", heads, start, width, 0, 0, evidence), rows, fits)


def _heads_columns(cells: list[str], width: int) -> bool:
    """Tell whether a row names every spectrum of a table, or the axis alone."""
    names = clipped(cells)
    return (len(names) == width and all(names[1:])) or (len(names) == 1 and names_an_axis(names[0]))


def _first_damaged(rows: Sequence[Row], start: int, signs: Signs, is_data: Callable[[list[str]], bool]) -> int:
    """Return where the data begin if the rows above are damaged ones of theirs and no headings.

    A damaged row parts those above it from the others; they would pass for text above the table and be lost.
    """
    first, second = (number_from(rows[start + i][1][0], signs.decimal, signs.thousands) or 0.0 for i in (0, 1))
    width, earliest = len(clipped(rows[start][1])), start
    for place in range(start - 1, max(start - MOST_DAMAGED, 0) - 1, -1):
        cells = rows[place][1]
        if is_data(cells):
            position = number_from(cells[0], signs.decimal, signs.thousands) or 0.0
            if second != first and 0 < (first - position) / (second - first) <= MOST_DAMAGED:
                earliest = place
        elif place == earliest - 1 and len(clipped(cells)) == width and _is_damaged(clipped(cells), signs):
            earliest = place
    return earliest


def _is_damaged(cells: Sequence[str], signs: Signs) -> bool:
    """Tell a damaged row of numbers from one of headings; no heading of an axis is a plain number."""
    corner, *others = cells
    numbers = [number_from(cell, signs.decimal, signs.thousands) is not None for cell in others]
    if number_from(corner, signs.decimal, signs.thousands) is not None:
        return True
    return all(numbers) and looks_like_a_number(corner) and not names_an_axis(corner)


def _first_of_two(rows: Sequence[Row], is_data: Callable[[list[str]], bool]) -> int | None:
    """Return the first of two rows of data: a lone one may be part of the text above."""
    before = False
    for place, (_, cells) in enumerate(rows):
        if (now := is_data(cells)) and before:
            return place - 1
        before = now
    return None


def _axis_evidence(corners: Sequence[str], rows: Sequence[Row], start: int, signs: Signs) -> str:
    """Say why the first column is an axis and not a column of numbered samples; empty where nothing says so."""
    named = next((corner for corner in corners if names_an_axis(corner)), None)
    if named is not None:
        return f"the first column is headed {named!r}"
    first = [signs.number(cells[0]) for _, cells in rows[start:]]
    if "" in corners and not is_count(first):
        return f"the first column has no heading and starts {first[0]:g}, {first[1]:g}, no row numbers"
    return ""


def is_count(numbers: Sequence[float | None]) -> bool:
    """Tell whether numbers count rows: 0, 1, 2 ... or 1, 2, 3 ..."""
    return bool(numbers) and numbers[0] in (0, 1) and all(n == numbers[0] + i for i, n in enumerate(numbers))


def _counted(layout: Layout, rows: Sequence[Row], fits: Callable[[list[str]], bool]) -> Layout:
    body = body_of(rows, layout)
    damaged = sum(not fits(cells) for _, cells in body)
    return Layout(layout.kind, layout.heads, layout.start, layout.width, damaged, len(body), layout.evidence)


def sample_row(heads: Sequence[Sequence[str]], column: str | None) -> int:
    """Return which row of headings holds the sample IDs of spectra in columns.

    The one whose first cell is `column`, else sample, sample_id or id; else the one headed like the axis or not at
    all; else the last.
    """
    firsts = [head[0].lower() for head in heads]
    wanted = [column.lower()] if column is not None else list(SAMPLE_COLUMNS)
    full = [i for i, head in enumerate(heads) if len(head) > 1]
    by_name = [i for i in full if firsts[i] in wanted]
    by_axis = [i for i in full if not firsts[i] or names_an_axis(firsts[i])]
    return (*by_name, *by_axis, full[-1])[0]
