"""Units of axis and ordinate, and every conversion between them, in one place."""

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import ParameterError, QuantityError

AXIS_UNITS = {"cm-1": "cm⁻¹", "nm": "nm", "um": "µm", "point": "point number"}
"""Axis units: the word used in recipes and files, and how it is printed."""

QUANTITIES = {
    "absorbance": "absorbance",
    "transmittance": "transmittance",
    "reflectance": "reflectance",
    "log_reflectance": "log 1/R",
    "arbitrary": "arbitrary units",
}
"""Ordinates: the word used in recipes and files, and how it is printed. Transmittance and reflectance are fractions."""

# Written names of axis units, after `plain_word`: JCAMP-DX 4.24 labels and common spellings.
_AXIS_WORDS = {
    "1/cm": "cm-1",
    "cm-1": "cm-1",
    "cm^-1": "cm-1",
    "cm⁻¹": "cm-1",
    "wavenumber": "cm-1",
    "wavenumbers": "cm-1",
    "nanometers": "nm",
    "nanometres": "nm",
    "nm": "nm",
    "micrometers": "um",
    "micrometres": "um",
    "microns": "um",
    "um": "um",
    "µm": "um",
    "μm": "um",
    "point": "point",
    "pointnumber": "point",
}
_CM_IN = {"nm": 1e7, "um": 1e4}  # wavelength units in one centimetre


def plain_word(text: str) -> str:
    """Return `text` in lower case without blanks, brackets and underscores, as unit names are compared."""
    return "".join(c for c in text.lower() if not c.isspace() and c not in "_()[]")


def axis_unit_named(text: str) -> str | None:
    """Return the axis unit that `text` names, or None if it names none.

    >>> axis_unit_named("1/CM"), axis_unit_named("NANOMETERS"), axis_unit_named("SECONDS")
    ('cm-1', 'nm', None)
    """
    return _AXIS_WORDS.get(plain_word(text))


def convert_axis(values: ArrayLike, unit: str, to: str) -> FloatArray:
    """Convert axis values between wavenumber and wavelength.

    Parameters
    ----------
    values : array of shape (n_points,)
        Positive axis values. [unit]
    unit, to : {"cm-1", "nm", "um"}
        Units before and after.

    Returns
    -------
    array of shape (n_points,)
        [to]

    Raises
    ------
    ParameterError
        A unit that has no conversion (point numbers have none), or a value that is not positive.
    """
    array = np.array(values, dtype=np.float64)
    if unit == to:
        return array
    for name in (unit, to):
        if name != "cm-1" and name not in _CM_IN:
            raise ParameterError(f"No conversion from {unit!r} to {to!r}; expected two of 'cm-1', 'nm', 'um'.")
    if (array <= 0).any():
        raise ParameterError(
            f"An axis value of {array.min():g} {unit} has no counterpart in {to}; expected values above 0."
        )
    if "cm-1" in (unit, to):
        return _CM_IN[to if unit == "cm-1" else unit] / array
    return array * (_CM_IN[to] / _CM_IN[unit])


def absorbance_from_transmittance(transmittance: ArrayLike) -> FloatArray:
    """Return A = −log10(T), T a fraction (1 = nothing absorbed).

    Raises
    ------
    QuantityError
        A T that is zero or negative: it has no absorbance.
    """
    fraction = np.asarray(transmittance, dtype=np.float64)
    if not (fraction > 0).all():
        raise QuantityError(
            f"Transmittance of {np.nanmin(fraction):.4g} has no absorbance; expected T above 0. "
            "Leave that range out before converting, or measure again."
        )
    return np.asarray(-np.log10(fraction))


def transmittance_from_absorbance(absorbance: ArrayLike) -> FloatArray:
    """Return T = 10^(−A) as a fraction."""
    return np.asarray(10.0 ** -np.asarray(absorbance, dtype=np.float64))
