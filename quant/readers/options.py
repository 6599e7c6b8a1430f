"""How spectra files are to be read: everything a file may leave unsaid."""

from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from typing import Any

from quant.checks import name_some, one_of
from quant.errors import ParameterError
from quant.units import AXIS_UNITS, QUANTITIES

HEAD = 2**16  # bytes that a reader is shown to recognise a file: the header of some thousand columns ...
FIRST_LINES, LARGEST_HEAD = 3, 2**24  # ... or as many lines, where they are longer, up to so many bytes
FORMATS = ("auto", "jcamp_dx", "matrix", "two_columns", "spreadsheet")
SEPARATORS = (",", ";", "tab", "space")
DECIMALS = (".", ",")
THOUSANDS = (",", ".", "'", "space")
ORIENTATIONS = ("spectra_in_rows", "spectra_in_columns")
STATED_QUANTITIES = (*QUANTITIES, "percent_transmittance", "percent_reflectance")

_CHOICES = {
    "decimal": DECIMALS,
    "thousands": THOUSANDS,
    "separator": SEPARATORS,
    "orientation": ORIENTATIONS,
    "axis_unit": tuple(AXIS_UNITS),
    "quantity": STATED_QUANTITIES,
}


@dataclass(frozen=True, kw_only=True)
class ReadingOptions:
    """What the files do not say themselves, or how it is found in them.

    A saved model keeps these options, so that new files are read as those of the calibration were.

    Parameters
    ----------
    format : {"auto", "jcamp_dx", "matrix", "two_columns", "spreadsheet"}
        "auto": the first reader that recognises the file.
    sample_column : str, optional
        Column of a matrix that holds the sample IDs (else the column called sample, sample_id or id).
    sample_label : str, optional
        Label of a JCAMP-DX file that holds the sample ID (else TITLE).
    sample_pattern : str, optional
        Regular expression that finds the sample ID in the file's name, see `quant.spectra.sample_ids.notes_from_name`.
        At most one of these three.
    block : str or int, optional
        Title or number of the block (or page) to read where a JCAMP-DX file holds several; all of them without it.
    separator : {",", ";", "tab", "space"}, optional
        Between the cells of a text file; found out when it is not given.
    decimal : {".", ","}, optional
        The decimal sign of the numbers; found out when it is not given.
    thousands : {",", ".", "'", "space"}, optional
        The sign between groups of three digits; found out when it is not given.
    orientation : {"spectra_in_rows", "spectra_in_columns"}, optional
        How a table lies: axis in the header, or axis in the first column; found out when it is not given.
    sheet : str, optional
        The sheet of a workbook; else the first.
    axis_unit : {"cm-1", "nm", "um", "point"}, optional
        Unit of the axis where the file gives none. A file that gives another one is refused.
    quantity : str, optional
        The ordinate where the file does not name it: a word of `quant.units.QUANTITIES`, or "percent_transmittance" or
        "percent_reflectance" (divided by 100 when read). A file that names another one is refused.
    notes : mapping of str to str
        What all files have in common: technique, resolution, accessory ... A file's own notes come first.
    resample : bool
        Interpolate files whose axis differs from the first file's.

    Raises
    ------
    ParameterError
        A word that is not among those listed, two ways of finding the sample ID, or one sign for two purposes.
    """

    format: str = "auto"
    sample_column: str | None = None
    sample_label: str | None = None
    sample_pattern: str | None = None
    block: str | int | None = None
    separator: str | None = None
    decimal: str | None = None
    thousands: str | None = None
    orientation: str | None = None
    sheet: str | None = None
    axis_unit: str | None = None
    quantity: str | None = None
    notes: Mapping[str, str] = field(default_factory=dict, hash=False)
    resample: bool = False

    def __post_init__(self) -> None:
        one_of("format", self.format, FORMATS)
        for name, allowed in _CHOICES.items():
            if (value := getattr(self, name)) is not None:
                one_of(name, value, allowed)
        for one, other in (("separator", "decimal"), ("separator", "thousands"), ("decimal", "thousands")):
            if (sign := getattr(self, one)) is not None and sign == getattr(self, other):
                raise ParameterError(f"{one} and {other} are both {sign!r}; expected two different signs.")
        if self.block is not None and (isinstance(self.block, bool) or not isinstance(self.block, str | int)):
            raise ParameterError(f"block = {self.block!r}; expected a title or a number.")
        if not isinstance(self.resample, bool):
            raise ParameterError(f"resample = {self.resample!r}; expected true or false.")
        if not isinstance(self.notes, Mapping):
            raise ParameterError(f"notes = {self.notes!r}; expected names and texts.")
        given = [
            name for name in ("sample_column", "sample_label", "sample_pattern") if getattr(self, name) is not None
        ]
        if len(given) > 1:
            raise ParameterError(f"{' and '.join(given)} are given; expected at most one way to find the sample ID.")
        object.__setattr__(self, "notes", {str(key): str(value) for key, value in self.notes.items()})

    def to_dict(self) -> dict[str, Any]:
        """Return the options that differ from the defaults, as plain values for JSON or TOML."""
        return {
            option.name: dict(value) if isinstance(value := getattr(self, option.name), Mapping) else value
            for option in fields(self)
            if getattr(self, option.name) != getattr(_DEFAULTS, option.name)
        }

    @classmethod
    def from_dict(cls, options: Mapping[str, Any]) -> "ReadingOptions":
        """Return the options that `to_dict` gave.

        Raises
        ------
        ParameterError
            An option there is not.
        """
        known = [option.name for option in fields(cls)]
        unknown = [name for name in options if name not in known]
        if unknown:
            raise ParameterError(f"No reading option {name_some(unknown)}; expected one of {', '.join(known)}.")
        return cls(**options)


_DEFAULTS = ReadingOptions()
