"""The decimal sign of a block."""

from pathlib import Path

import pytest

from quant.readers.jcamp_dx.labels import Block, Record
from quant.readers.jcamp_dx.numbers import decimal_of


@pytest.mark.parametrize(
    ("texts", "stated", "sign"),
    [
        (["600", "609"], None, "."),
        (["600,5"], None, ","),
        (["0,500"], None, ","),  # no thousands begin with 0
        (["4000,125"], None, ","),  # nor have four digits before the sign
        (["1,9288"], None, ","),
        (["1,5E-3"], None, ","),
        (["4,000"], None, "."),  # four or four thousand: refused later
        (["600,5", "1.5"], None, "."),  # both signs: refused later
        (["600,5"], ".", "."),
        (["4,000"], ",", ","),
    ],
)
def test_a_comma_is_taken_for_decimal_only_where_it_can_be_nothing_else(
    texts: list[str], stated: str | None, sign: str
) -> None:
    labels = ("FIRSTX", "LASTX")
    block = Block(Path("a.dx"), [Record(label, label, text, 1) for label, text in zip(labels, texts, strict=False)])
    assert decimal_of(block, stated) == sign
    assert block.deviations == (["decimal commas"] if sign == "," and stated is None else [])
