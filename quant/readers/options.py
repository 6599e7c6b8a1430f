"""How spectra files are to be read: everything a file may leave unsaid."""

from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from typing import Any

from quant.checks import name_some, one_of
from quant.errors import ParameterError
from quant.units import AXIS_UNITS, QUANTITIES

FORMATS = ("auto", "jcamp_dx", "matrix", "two_columns")
SEPARATORS = (",", ";", "tab", "space")
DECIMALS = (".", ",")
STATED_QUANTITIES = (*QUANTITIES, "percent_transmittance", "percent_reflectance")


@dataclass(frozen=True, kw_only=True)
class ReadingOptions:
    """What the files do not say themselves, or how it is found in them.

    A saved model keeps these options, so that new files are read as those of the calibration were.

    Parameters
    ----------
    format : {"auto", "jcamp_dx", "matrix", "two_columns"}
        "auto": the first reader that recognises the file.
    sample_column : str, optional
        Column of a matrix that holds the sample IDs (else the column called sample, sample_id or id).
    sample_label : str, optional
        Label of a JCAMP-DX file that holds the sample ID (else TITLE).
    sample_pattern : str, optional
        Regular expression that finds the sample ID in the file's name, see `quant.spectra.sample_ids.notes_from_name`.
        At most one of these three.
    separator : {",", ";", "tab", "space"}, optional
        Between the cells of a text file; found out when it is not given.
    decimal : {".", ","}
        The decimal sign of the numbers.
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
    separator: str | None = None
    decimal: str = "."
    axis_unit: str | None = None
    quantity: str | None = None
    notes: Mapping[str, str] = field(default_factory=dict, hash=False)
    resample: bool = False

    def __post_init__(self) -> None:
        one_of("format", self.format, FORMATS)
        one_of("decimal", self.decimal, DECIMALS)
        if self.separator is not None:
            one_of("separator", self.separator, SEPARATORS)
        if self.axis_unit is not None:
            one_of("axis_unit", self.axis_unit, tuple(AXIS_UNITS))
        if self.quantity is not None:
            one_of("quantity", self.quantity, STATED_QUANTITIES)
        if self.separator == self.decimal:
            raise ParameterError(f"separator and decimal are both {self.decimal!r}; expected two different signs.")
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
