"""How many points: what NPOINTS may get wrong, and what it may not."""

from pathlib import Path

import pytest

from quant.errors import FileFormatError
from quant.readers.jcamp_dx.count import Scale, agree_on_count
from quant.readers.jcamp_dx.labels import Block


def agree(found: int, stated: int | None, step: float | None, *, closed: bool = False, ended: bool = True) -> str:
    """Return the note on a table from 0 to 9."""
    block = Block(Path("a.dx"), ended=ended)
    agree_on_count(block, found, Scale(first=0, last=9, step=step, n_points=stated, factor=1), 20, closed=closed)
    return "; ".join(block.deviations)


@pytest.mark.parametrize(
    ("found", "stated", "step", "closed", "note"),
    [
        (10, 10, None, False, ""),
        (10, None, None, False, "##NPOINTS= is missing"),
        (10, 9, None, False, "##NPOINTS= is 9 where 10 ordinates are"),
        (10, 50, -1.0, False, "##NPOINTS= is 50 where 10 ordinates are"),  # DELTAX confirms, whatever its sign
        (10, 11, None, True, "##NPOINTS= is 11 where 10 ordinates are, the check line is counted in it"),
    ],
)
def test_counts_that_are_confirmed(found: int, stated: int | None, step: float | None, closed: bool, note: str) -> None:
    assert agree(found, stated, step, closed=closed) == note


@pytest.mark.parametrize(
    ("found", "stated", "step", "closed", "ended"),
    [
        (1, 1, None, False, True),
        (10, None, None, False, False),
        (10, 11, None, False, False),
        (10, 11, 0.9, False, True),  # DELTAX sides with NPOINTS
        (10, 12, None, False, True),
        (8, 10, None, True, True),
        (10, 11, 0.9, True, True),  # an ordinate lost looks the same
        (5, 10, 1.0, False, True),
    ],
)
def test_counts_that_are_not(found: int, stated: int | None, step: float | None, closed: bool, ended: bool) -> None:
    with pytest.raises(FileFormatError, match="line 20"):
        agree(found, stated, step, closed=closed, ended=ended)
