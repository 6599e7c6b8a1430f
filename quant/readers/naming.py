"""What a file calls its axis and its ordinate, and what the reading options add."""

import re
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path

import numpy as np

from quant.arrays import FloatArray
from quant.errors import AxisMismatchError, FileFormatError, QuantityError
from quant.readers.options import ReadingOptions
from quant.spectra.sample_ids import notes_from_name
from quant.units import axis_unit_named, plain_word

# Written names of ordinates, after `plain_word` and without "%" and "percent".
_QUANTITY_WORDS = {
    "absorbance": "absorbance",
    "absorbanceunits": "absorbance",
    "abs": "absorbance",
    "au": "absorbance",
    "a": "absorbance",
    "transmittance": "transmittance",
    "transmission": "transmittance",
    "t": "transmittance",
    "reflectance": "reflectance",
    "r": "reflectance",
    "log1/r": "log_reflectance",
    "log101/r": "log_reflectance",
    "logreflectance": "log_reflectance",
    "arbitrary": "arbitrary",
    "arbitraryunits": "arbitrary",
    "kubelka-munk": "arbitrary",
}
_AXIS_NAMES = ("wavelength", "wavenumber", "wellenlänge", "wellenzahl", "lambda", "frequency", "axis", "x")
_NOTES_IN_AXIS_UNITS = ("resolution", "path_length", "slit", "slit_width", "bandwidth", "spectral_bandwidth")
_FRACTIONS = ("transmittance", "reflectance")
_NOTE_ALIASES = {
    "pathlength": "path_length",
    "cell_path_length": "path_length",
    "optical_path_length": "path_length",
    "layer_thickness": "path_length",
    "temp": "temperature",
    "temp.": "temperature",
    "batch_id": "batch",
    "batch_no": "batch",
    "batch_no.": "batch",
    "batch_number": "batch",
    "spectral_resolution": "resolution",
    "spectrometer": "instrument",
    "analyst": "operator",
    "measured_by": "operator",
    "measurement_date": "date",
    "date_measured": "date",
}
"""Other names of the notes path_length, temperature, batch, resolution, instrument, operator and date."""

_X_LABEL = re.compile(r"^\W*x[\s_-]*(?:units?|axis|label)\b\W*(?P<rest>.*)$", re.IGNORECASE)
_Y_LABEL = re.compile(r"^\W*y[\s_-]*(?:units?|axis|label)\b\W*?(?P<rest>[\w%].*)$", re.IGNORECASE)
LARGEST_FRACTION = 1.5  # a transmittance above this can only be percent
LARGEST_MEAN_ABSORBANCE = 5.0  # no spectrometer measures this on average


def quantity_named(text: str) -> str | None:
    """Return the ordinate that `text` names, as the option ``quantity`` would give it, or None.

    >>> quantity_named("%T"), quantity_named("LOG(1/R)"), quantity_named("counts")
    ('percent_transmittance', 'log_reflectance', None)
    """
    word = plain_word(text)
    plain = word.replace("percent", "").replace("%", "")
    quantity = _QUANTITY_WORDS.get(plain)
    if plain == word or quantity is None:
        return quantity
    return f"percent_{quantity}" if quantity in _FRACTIONS else None


def axis_unit_in(heading: str) -> str | None:
    """Return the axis unit in a column's heading such as ``wavelength (nm)``, or None."""
    words = re.split(r"[\s,_/]+", heading)
    return next(filter(None, map(axis_unit_named, [*_parts(heading), *words])), None)


def names_an_axis(heading: str) -> bool:
    """Tell whether a heading names an axis or its unit: ``Wavelength``, ``nm``, ``x``, not ``Resolution (cm-1)``."""
    if note_name(heading)[0] in _NOTES_IN_AXIS_UNITS:
        return False
    words = re.findall(r"[^\W\d_]+", heading.lower())
    return axis_unit_in(heading) is not None or any(word.removesuffix("s") in _AXIS_NAMES for word in words)


def quantity_in(heading: str) -> str | None:
    """Return the ordinate named in a column's heading such as ``Transmittance [%]``, or None."""
    found = next(filter(None, map(quantity_named, _parts(heading))), None)
    is_percent = "%" in heading or "percent" in heading.lower()
    return found if found is None or is_percent == found.startswith("percent_") else None


def words_above(rows: Sequence[Sequence[str]]) -> tuple[str | None, str | None]:
    """Return axis unit and ordinate that lines above a table name, such as ``X units: cm-1`` or ``Y axis;%T``."""
    unit, quantity = None, None
    for cells in rows:
        line = " ".join(cells)
        if match := _X_LABEL.match(line):
            unit = unit or axis_unit_in(match["rest"])
        elif match := _Y_LABEL.match(line):
            quantity = quantity or quantity_in(match["rest"].strip())
    return unit, quantity


def only_word(path: Path, what: str, words: Iterable[str | None]) -> str | None:
    """Return the one word that a file says for something in several places, or None if it says none.

    Raises
    ------
    FileFormatError
        It says two.
    """
    said = list(dict.fromkeys(filter(None, words)))
    if len(said) > 1:
        raise FileFormatError(
            path, f"its words name the {what} {' and '.join(map(repr, said[:3]))}; expected one. Correct the file."
        )
    return said[0] if said else None


def note_name(heading: str) -> tuple[str, str]:
    """Return name and unit of a note: lower case, blanks as ``_``, what stands in brackets as unit, aliases replaced.

    >>> note_name("Path Length (mm)"), note_name("Batch No."), note_name("Day")
    (('path_length', 'mm'), ('batch', ''), ('day', ''))
    """
    match = re.fullmatch(r"(?P<name>.*?)\s*[(\[](?P<unit>[^()\[\]]*)[)\]]", heading.strip())
    name, unit = (match["name"], match["unit"].strip()) if match and match["name"] else (heading, "")
    plain = re.sub(r"\s+", "_", name.strip().lower())
    return _NOTE_ALIASES.get(plain, plain), unit


def note_of(heading: str, cell: str) -> dict[str, str]:
    """Return the note in a cell, or nothing if it is empty; a number gets the unit of its heading.

    The resolution stays a plain number, since it is always in cm⁻¹.

    >>> note_of("Path Length (mm)", "0.5"), note_of("Resolution [cm-1]", "4")
    ({'path_length': '0.5 mm'}, {'resolution': '4'})
    """
    name, unit = note_name(heading)
    text = cell.strip()
    if not text:
        return {}
    bare = name == "resolution" and axis_unit_named(unit) == "cm-1"
    return {name: f"{text} {unit}" if unit and not bare and text[-1].isdigit() else text}


def first_nonempty(*texts: str) -> str:
    """Return the first text that is not empty."""
    return next(filter(None, texts), "")


def _parts(heading: str) -> Iterator[str]:
    """Yield the whole heading, what is inside its brackets, and what is outside."""
    yield heading
    yield from re.findall(r"[(\[]([^)\]]*)[)\]]", heading)
    yield re.sub(r"[(\[][^)\]]*[)\]]", "", heading)


def agreed_axis_unit(path: Path, found: str | None, options: ReadingOptions) -> str:
    """Return the axis unit: the file's own, else the one stated, else "point".

    Raises
    ------
    AxisMismatchError
        The file gives one unit and the options another.
    """
    if found is not None and options.axis_unit not in (None, found):
        raise AxisMismatchError(
            f"{path}: the file gives its axis in {found!r}, but axis_unit = {options.axis_unit!r} is stated. "
            "Leave axis_unit out, or read this file apart."
        )
    return found or options.axis_unit or "point"


def agreed_quantity(path: Path, found: str | None, options: ReadingOptions) -> str | None:
    """Return the ordinate: the one stated, else the file's own, else None; percent and fraction may replace each other.

    Raises
    ------
    QuantityError
        The file names one ordinate and the options another.
    """
    stated = options.quantity
    if stated is None:
        return found
    if found not in (None, "arbitrary") and stated.removeprefix("percent_") != str(found).removeprefix("percent_"):
        raise QuantityError(
            f"{path}: the file names its ordinate {found!r}, but quantity = {stated!r} is stated. "
            "Leave quantity out, or read this file apart."
        )
    return stated


def as_quantity(path: Path, values: FloatArray, quantity: str | None) -> tuple[FloatArray, str]:
    """Return ordinates and what they are, percent turned into fractions; absorbance where nothing names them.

    Raises
    ------
    FileFormatError
        Nothing names the ordinate and the values are too large for absorbance.
    """
    if quantity is None:
        mean = float(np.abs(values[np.isfinite(values)]).mean()) if np.isfinite(values).any() else 0.0
        if mean > LARGEST_MEAN_ABSORBANCE:
            raise FileFormatError(
                path,
                f"the ordinates are {mean:.4g} on average, too much for absorbance, and nothing says what they are. "
                'Are they percent transmittance? Then set quantity = "percent_transmittance" (or what else they are).',
            )
        return values, "absorbance"
    if quantity.startswith("percent_"):
        return values / 100, quantity.removeprefix("percent_")
    return values, quantity


def from_file_name(path: Path, options: ReadingOptions) -> dict[str, str]:
    """Return what sample_pattern finds in the file's name (``sample`` and others), or nothing without a pattern."""
    if options.sample_pattern is None:
        return {}
    return {note_name(key)[0]: text for key, text in notes_from_name(path, options.sample_pattern).items()}
