"""The table of readers."""

import pytest

from quant.readers.options import FORMATS
from quant.readers.registry import READERS


def test_every_reader_can_be_named_in_the_options() -> None:
    assert {"auto", *(reader.name for reader in READERS)} == set(FORMATS)


@pytest.mark.parametrize(
    ("head", "name", "expected"),
    [
        (b"##TITLE= a\n", "a", "jcamp_dx"),
        (b"\xef\xbb\xbf\r\n  ##TITLE= a\n", "a.txt", "jcamp_dx"),
        (b"anything", "a.JDX", "jcamp_dx"),
        (b"id,900,902\nS,1,2\n", "a.csv", "matrix"),
        (b"900,0.1\n902,0.2\n904,0.3\n", "a.csv", "two_columns"),
        (b"sample,ethanol\nS,1\n", "a.csv", None),
        (b"", "a.csv", None),
        (b"\xff\xfe\x00", "a.bin", None),
    ],
)
def test_the_first_that_recognises_a_file(head: bytes, name: str, expected: str | None) -> None:
    assert next((reader.name for reader in READERS if reader.recognises(head, name)), None) == expected
