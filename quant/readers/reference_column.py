"""One column of reference values: what it holds, and how a cell becomes a value of the analyte."""

import re
from dataclasses import dataclass, field
from fractions import Fraction
from pathlib import Path

from quant.errors import FileFormatError, ParameterError
from quant.readers import delimited
from quant.spectra.concentration import (
    MASS_FRACTION,
    concentration_unit_named,
    conversion_ratio,
    convert_basis,
    scaled,
)
from quant.spectra.reference_table import NO_LIMIT, Analyte

MISSING = ("", "-", "n/a", "nan")
"""Cells that say that the laboratory gave no value (in any case)."""

NOT_DETECTED = ("nd", "n.d.", "n.d", "not detected", "<lod", "< lod", "<loq", "< loq")
"""Cells that say that the value lies below a detection limit, which the recipe has to state (in any case)."""

LARGEST = 1e100  # what is larger is a slip of the pen, and its square no number
MOISTURE_UNIT = "% m/m"
_BELOW = re.compile(
    r"(?:n\.?\s?d\.?|not detected)?\s*\(?\s*(?:<=?|≤)\s*(?P<limit>[^()<]*[^()<\s])\s*\)?", re.IGNORECASE
)

ReadCell = tuple[float, float]  # value, upper limit: one of them NaN, or both


@dataclass(frozen=True)
class ColumnOf:
    """Where the values of an analyte stand, and what they have to be converted from.

    Parameters
    ----------
    analyte : Analyte
        What the values become: unit and basis are those of the calibration.
    column : str
        Heading of the column; default: the analyte's name.
    unit : str
        Unit of the cells; default: the analyte's.
    basis : {"", "wet", "dry"}
        Basis of the cells; default: the analyte's.
    density : float, optional
        Of the samples, where mass fractions become concentrations or the other way round. [g/mL]
    molar_mass : float, optional
        Of the analyte, where amounts become masses or the other way round. [g/mol]
    moisture_column : str
        Heading of the moisture of each wet sample, where the basis is changed.
    moisture_unit : str
        Its unit, a mass fraction.
    detection_limit : float, optional
        What "nd" means. [unit of the cells]

    Raises
    ------
    ParameterError
        A conversion that is not defined (what it lacks is named), or a detection limit that is not above 0.
    """

    analyte: Analyte
    column: str = ""
    unit: str = ""
    basis: str = ""
    density: float | None = None
    molar_mass: float | None = None
    moisture_column: str = ""
    moisture_unit: str = MOISTURE_UNIT
    detection_limit: float | None = None
    _ratio: Fraction = field(init=False, repr=False, default=Fraction(1))

    def __post_init__(self) -> None:
        if self.unit:
            object.__setattr__(self, "_ratio", self._unit_ratio())
        elif self.density is not None or self.molar_mass is not None:
            raise ParameterError("density and molar_mass go with column_unit, the unit to convert from.")
        if self.detection_limit is not None and not self.detection_limit > 0:
            raise ParameterError(f"detection_limit = {self.detection_limit}; expected a number above 0.")
        if self.changes_basis:
            self._check_basis()
        elif self.moisture_column:
            raise ParameterError(
                "moisture_column is given, but no basis is changed; expected basis and column_basis, one wet, one dry."
            )

    @property
    def heading(self) -> str:
        """Heading of the column."""
        return self.column or self.analyte.name

    @property
    def changes_basis(self) -> bool:
        """True if wet has to become dry or the other way round."""
        return bool(self.basis) and self.basis != self.analyte.basis

    def _unit_ratio(self) -> Fraction:
        if not self.analyte.unit:
            raise ParameterError(f"column_unit = {self.unit!r} needs unit, the unit to convert to.")
        return conversion_ratio(self.unit, self.analyte.unit, density=self.density, molar_mass=self.molar_mass)

    def _check_basis(self) -> None:
        if not self.analyte.basis:
            raise ParameterError(f"column_basis = {self.basis!r} needs basis, the basis to convert to.")
        if not self.moisture_column:
            raise ParameterError(
                f"No conversion from {self.basis} to {self.analyte.basis} basis without the moisture of each sample; "
                "name its column as moisture_column."
            )
        for name, unit in (
            ("unit", self.analyte.unit),
            ("column_unit", self.unit),
            ("moisture_unit", self.moisture_unit),
        ):
            known = concentration_unit_named(unit)
            if unit and (known is None or known.kind != MASS_FRACTION):
                raise ParameterError(
                    f"No conversion from {self.basis} to {self.analyte.basis} basis of {name} = {unit!r}; expected a "
                    "mass fraction, such as % m/m."
                )

    def read(self, path: Path, line: int, cell: str, moisture: str, decimal: str) -> ReadCell:
        """Return the value that a cell holds and its upper limit, in the analyte's unit and basis.

        Parameters
        ----------
        path, line
            For messages.
        cell : str
            A number, a limit such as "<0.05" or "n.d. <0.05", a word of `NOT_DETECTED`, or a word of `MISSING`.
        moisture : str
            The sample's moisture, where the basis is changed.
        decimal : {".", ","}

        Returns
        -------
        value, limit : float
            NaN where the cell gives none. [unit of the analyte]

        Raises
        ------
        FileFormatError
            Neither; or no moisture for a value that needs it.
        """
        number, is_limit = self._number(path, line, cell, decimal)
        if number is None:
            return NO_LIMIT, NO_LIMIT
        value = scaled(number, self._ratio)
        if self.changes_basis:
            value = convert_basis(value, self.basis, self.analyte.basis, self._moisture(path, line, moisture, decimal))
        return (NO_LIMIT, float(value)) if is_limit else (float(value), NO_LIMIT)

    def _number(self, path: Path, line: int, cell: str, decimal: str) -> tuple[float | None, bool]:
        """Return the number in a cell, if any, and whether it is an upper limit."""
        text = cell.strip()
        word = text.lower()
        if word in MISSING:
            return None, False
        if word in NOT_DETECTED:
            if self.detection_limit is None:
                raise FileFormatError(
                    path,
                    f"found {text!r} in column {self.heading!r}; expected a number or a limit such as '<0.05'. State "
                    "what it means as detection_limit under [[analyte]].",
                    line=line,
                )
            return self.detection_limit, True
        below = _BELOW.fullmatch(text)
        digits = below["limit"] if below else text
        number = delimited.numbers_from(path, line, [digits], [self.heading], decimal)[0]
        if abs(number) > LARGEST or (below and number <= 0):
            expected = "a detection limit above 0" if below and number <= 0 else f"a number of at most {LARGEST:g}"
            raise FileFormatError(
                path, f"found {text!r} in column {self.heading!r}; expected {expected}. Mend the cell.", line=line
            )
        return number, below is not None

    def _moisture(self, path: Path, line: int, cell: str, decimal: str) -> float:
        """Return the moisture of a sample as a mass fraction. [g/g]"""
        number = delimited.numbers_from(path, line, [cell], [self.moisture_column], decimal, MISSING)[0]
        fraction = float(scaled(number, conversion_ratio(self.moisture_unit, "g/g")))
        if not 0 <= fraction < 1:
            raise FileFormatError(
                path,
                f"found {cell.strip()!r} as moisture in column {self.moisture_column!r}; expected a number from 0 to "
                f"below 100 % of the wet sample (in {self.moisture_unit}), because {self.analyte.name} is converted "
                f"from {self.basis} to {self.analyte.basis} basis.",
                line=line,
            )
        return fraction
