"""Reader of a film's certificate: one row a band, columns position and tolerance."""

from pathlib import Path

from quant.chemistry.film_positions import FilmBand, FilmTable
from quant.errors import FileFormatError
from quant.files import decode_text, read_bytes
from quant.readers import delimited

COLUMNS = ("position", "tolerance")


def read_film_certificate(path: str | Path, *, decimal: str = ".") -> FilmTable:
    """Read positions and tolerances from the certificate of the film in use.

    Certified positions are minima of the transmittance, as they are found here; centroids of bands lie elsewhere.

    Parameters
    ----------
    path : str or Path
        Delimited text with the headings position and tolerance. [cm⁻¹]
    decimal : {".", ","}
        Decimal sign.

    Raises
    ------
    FileFormatError
        A column is missing, a cell is no number above zero, or a position stands twice.
    """
    path = Path(path)
    text = decode_text(path, read_bytes(path))
    sign = delimited.separator_of(text.lstrip().partition("\n")[0], decimal)
    rows = delimited.read_rows(path, text, sign)
    if not rows:
        raise FileFormatError(path, "is empty; expected the headings position and tolerance, and a row a band.")
    headings = [cell.lower() for cell in rows[0][1]]
    places = [delimited.find_column(path, headings, name, "of a film's certificate") for name in COLUMNS]
    bands = []
    for row in rows[1:]:
        delimited.check_width(path, row, len(headings))
        line, cells = row
        numbers = delimited.numbers_from(path, line, [cells[p] for p in places], COLUMNS, decimal)
        if not all(number > 0 for number in numbers):
            raise FileFormatError(
                path, f"position {numbers[0]:g}, tolerance {numbers[1]:g}; expected numbers above zero.", line=line
            )
        bands.append(FilmBand(*numbers))
    if len({band.position for band in bands}) < len(bands):
        raise FileFormatError(path, "a position stands twice; expected one row a band.")
    return FilmTable(tuple(sorted(bands, key=lambda band: -band.position)), f"the film's certificate, {path.name}")
