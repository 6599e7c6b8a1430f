"""Certificates of films: positions and tolerances of the film in use."""

import pytest

from quant.errors import FileFormatError
from quant.readers.film_certificate import read_film_certificate


def test_bands_are_read_from_high_to_low(tmp_path):
    path = tmp_path / "film.csv"
    path.write_text("Band;Position;Tolerance\nring;1028,4;0,3\nring;1601,3;0,25\n", encoding="utf-8")
    table = read_film_certificate(path, decimal=",")
    assert [(band.position, band.tolerance) for band in table.bands] == [(1601.3, 0.25), (1028.4, 0.3)]
    assert "film.csv" in table.source


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty"),
        ("position,width\n1601.3,1\n", "no column 'tolerance'"),
        ("position,tolerance\n1601.3,wide\n", "found 'wide'"),
        ("position,tolerance\n1601.3,\n", "expected numbers above zero"),
        ("position,tolerance\n1601.3,0\n", "expected numbers above zero"),
        ("position,tolerance\n1601.3,1\n1601.3,2\n", "stands twice"),
        ("position,tolerance\n1601.3\n", "line 2"),
    ],
)
def test_what_is_no_certificate_is_refused(tmp_path, text, words):
    path = tmp_path / "film.csv"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(FileFormatError, match=words):
        read_film_certificate(path)
