"""Ordinates written as plain decimal numbers: AFFN, and PAC form with decimals."""

import re
from contextlib import suppress
from itertools import chain

import numpy as np

from quant.arrays import FloatArray
from quant.readers.jcamp_dx.scan import Lines, TokenError
from quant.readers.jcamp_dx.tokens import Ordinates

_NUMBER = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[Ee][+-]?\d+)?|\?", re.ASCII)
_NOT_PLAIN = re.compile(r"[^0-9+\-.Ee,; \t\n]")
_BLANK_LEFT_OUT = re.compile(r"(?<=[\d.?])(?=[+-])", re.ASCII)  # in PAC form a sign stands for the blank before it


def decode_plain(lines: Lines) -> Ordinates:
    """Decode the ordinates of a ``(X++(Y..Y))`` table written with decimals or exponents.

    Raises
    ------
    TokenError
        A word that is no number, or an abscissa without ordinates.
    """
    rows = [plain_values(line, row) for line, row in zip(lines.ordinates(), lines.rows.tolist(), strict=True)]
    counts = np.array([len(row) for row in rows])
    if not counts.all():
        raise TokenError(int(lines.rows[(counts == 0).argmax()]), "an abscissa without ordinates")
    return Ordinates(np.array(list(chain.from_iterable(rows))), np.cumsum(counts) - counts)


def decode_pairs(text: str) -> tuple[FloatArray, int]:
    """Decode ``(XY..XY)``: pairs of plain numbers, whole pairs on each line.

    Returns
    -------
    array of shape (n_points, 2)
        Abscissa and ordinate as written.
    int
        The last line that holds data, counted from 0.

    Raises
    ------
    TokenError
        A word that is no number, an odd count of numbers in a line, or no line at all.
    """
    rows: list[list[float]] = []
    last = 0
    for number, line in enumerate(text.split("\n")):
        row = plain_values(line, number)
        if len(row) % 2:
            raise TokenError(number, "an odd count of numbers where pairs of X and Y should be")
        if row:
            rows.append(row)
            last = number
    if not rows:
        raise TokenError(0, "no ordinates")
    return np.array(list(chain.from_iterable(rows))).reshape(-1, 2), last


def plain_values(line: str, row: int) -> list[float]:
    """Return the numbers of a line in AFFN or PAC form, NaN for "?".

    Raises
    ------
    TokenError
        A word that is no number, or one too large.
    """
    text = line.replace(",", " ").replace(";", " ")
    values: list[float] | None = None
    if not _NOT_PLAIN.search(text):  # float() would take 1_000, nan, inf
        with suppress(ValueError):  # blanks left out, or damage: looked at below
            values = list(map(float, text.split()))
    if values is None:
        words = _BLANK_LEFT_OUT.sub(" ", text).replace("?", " ? ").split()
        wrong = next((word for word in words if not _NUMBER.fullmatch(word)), None)
        if wrong is not None:
            raise TokenError(row, f"{wrong[:40]!r} where a number should be")
        values = [float("nan") if word == "?" else float(word) for word in words]
    if float("inf") in values or -float("inf") in values:
        raise TokenError(row, "a number too large")
    return values
