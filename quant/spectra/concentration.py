"""Units of concentration, the conversions that are well defined, and wet and dry basis.

A mass fraction w [g/g], a mass concentration ρ [g/L] and an amount concentration c [mol/L] of one substance are tied by
the density d of the sample [g/mL] and the molar mass M of the substance [g/mol]: ρ = 1000·d·w, c = ρ/M. A mass fraction
of the dry matter is w/(1 - m), m being the mass fraction of moisture in the sample as it is (wet).
"""

from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import ParameterError, SampleMismatchError
from quant.spectra.reference_table import BASES, Analyte
from quant.units import plain_word

MASS_FRACTION = "mass fraction"
MASS_CONCENTRATION = "mass concentration"
AMOUNT_CONCENTRATION = "amount concentration"

_KINDS = {
    MASS_FRACTION: {  # in g/g
        Fraction(1): ("g/g", "kg/kg", "m/m", "w/w", "mass/mass"),
        Fraction(1, 100): ("% m/m", "% w/w", "wt%", "wt.%", "wt-%", "wt.-%", "mass%", "% mass", "g/100 g"),
        Fraction(1, 1000): ("g/kg", "mg/g"),
        Fraction(1, 10**6): ("mg/kg", "µg/g", "ppm", "ppm m/m"),
        Fraction(1, 10**9): ("µg/kg", "ng/g", "ppb", "ppb m/m"),
    },
    MASS_CONCENTRATION: {  # in g/L
        Fraction(1000): ("g/mL", "kg/L", "g/cm3", "g/cm³"),
        Fraction(10): ("% m/v", "% w/v", "g/100 mL", "g/dL"),
        Fraction(1): ("g/L", "mg/mL", "kg/m3", "kg/m³"),
        Fraction(1, 1000): ("mg/L", "µg/mL", "g/m3", "g/m³"),
        Fraction(1, 10**6): ("µg/L", "ng/mL"),
    },
    AMOUNT_CONCENTRATION: {  # in mol/L
        Fraction(1): ("mol/L", "mol/dm3", "mol/dm³"),
        Fraction(1, 1000): ("mmol/L", "mol/m3", "mol/m³"),
        Fraction(1, 10**6): ("µmol/L",),
    },
}
_LITRE_GRAMS = 1000  # mL in one litre: turns g/mL into g/L
_UNDEFINED = {
    "%": "'%' alone does not say of what; state % m/m or % m/v",
    "%v/v": "a volume fraction depends on how the volumes of the components add up",
    "vol%": "a volume fraction depends on how the volumes of the components add up",
    "mol%": "an amount fraction depends on the molar masses of all components",
    "mol/mol": "an amount fraction depends on the molar masses of all components",
    "mol/kg": "a molality counts the solvent, not the sample",
}


@dataclass(frozen=True)
class ConcentrationUnit:
    """A unit: what kind of quantity it measures, and how many g/g, g/L or mol/L it is."""

    kind: str
    scale: Fraction


def _word(text: str) -> str:
    """Return a unit as it is compared; µ (U+00B5), μ (U+03BC) and u are one letter."""
    return plain_word(text).replace("\u03bc", "\u00b5").replace("ug/", "µg/").replace("umol/", "µmol/")


_UNITS = {
    _word(name): ConcentrationUnit(kind, scale)
    for kind, scales in _KINDS.items()
    for scale, names in scales.items()
    for name in names
}
KNOWN = tuple(name for scales in _KINDS.values() for names in scales.values() for name in names[:2])
"""Usual spellings, for messages."""


def concentration_unit_named(text: str) -> ConcentrationUnit | None:
    """Return the unit of concentration that `text` names, or None if it names none.

    >>> concentration_unit_named("PPM") == concentration_unit_named("mg / kg"), concentration_unit_named("octane")
    (True, None)
    """
    return _UNITS.get(_word(text))


def same_unit(one: str, other: str) -> bool:
    """Tell whether two units are one: the same word, or the same quantity on the same scale."""
    known = concentration_unit_named(one)
    return _word(one) == _word(other) or (known is not None and known == concentration_unit_named(other))


def conversion_ratio(unit: str, to: str, *, density: float | None = None, molar_mass: float | None = None) -> Fraction:
    """Return what a number in one unit is multiplied by to be in another, exactly.

    Parameters
    ----------
    unit, to : str
        Units before and after, such as "mg/kg" and "% m/m". "ppm" and "ppb" are by mass.
    density : float, optional
        Of the sample; ties mass fractions to concentrations. [g/mL]
    molar_mass : float, optional
        Of the substance; ties mass to amount. [g/mol]

    Raises
    ------
    ParameterError
        A unit that is not known or has no defined conversion, a density or molar mass that is lacking or not positive.
    """
    for name, value in (("density", density), ("molar_mass", molar_mass)):
        if value is not None and not (np.isfinite(value) and value > 0):
            raise ParameterError(f"{name} = {value}; expected a number above 0.")
    if _word(unit) == _word(to):
        return Fraction(1)
    first, second = _known(unit, unit, to), _known(to, unit, to)
    kinds = {first.kind, second.kind}
    lacking = []
    if len(kinds) == 2 and MASS_FRACTION in kinds and density is None:
        lacking.append("density of the sample [g/mL]")
    if len(kinds) == 2 and AMOUNT_CONCENTRATION in kinds and molar_mass is None:
        lacking.append("molar_mass of the analyte [g/mol]")
    if lacking:
        raise ParameterError(
            f"No conversion from {unit!r} ({first.kind}) to {to!r} ({second.kind}) without {' and '.join(lacking)}; "
            f"give {'them' if len(lacking) == 2 else 'it'}, or state values and results in one unit."
        )
    return _in_grams_a_litre(first, kinds, density, molar_mass) / _in_grams_a_litre(second, kinds, density, molar_mass)


def _known(name: str, unit: str, to: str) -> ConcentrationUnit:
    found = concentration_unit_named(name)
    if found is None:
        why = _UNDEFINED.get(_word(name), f"{name!r} is no unit of concentration known here")
        raise ParameterError(f"No conversion from {unit!r} to {to!r}: {why}; expected two of {', '.join(KNOWN)}.")
    return found


def _in_grams_a_litre(
    unit: ConcentrationUnit, kinds: set[str], density: float | None, molar_mass: float | None
) -> Fraction:
    """Return the scale of a unit in g/L; within one kind in that kind's own unit, so that nothing else is needed."""
    if len(kinds) == 2 and unit.kind == MASS_FRACTION and density is not None:
        return unit.scale * Fraction(density) * _LITRE_GRAMS
    if len(kinds) == 2 and unit.kind == AMOUNT_CONCENTRATION and molar_mass is not None:
        return unit.scale * Fraction(molar_mass)
    return unit.scale


def scaled(values: ArrayLike, ratio: Fraction) -> FloatArray:
    """Return values times an exact ratio, rounded once where the ratio or its inverse is a whole number."""
    array = np.asarray(values, dtype=np.float64)
    return array * float(ratio) if ratio >= 1 else array / float(1 / ratio)


def convert_concentration(
    values: ArrayLike, unit: str, to: str, *, density: float | None = None, molar_mass: float | None = None
) -> FloatArray:
    """Convert concentrations from one unit to another.

    Parameters
    ----------
    values : array
        Any shape. [unit]
    unit, to, density, molar_mass
        See `conversion_ratio`.

    Returns
    -------
    array
        [to]

    Raises
    ------
    ParameterError
        As `conversion_ratio`.

    Examples
    --------
    >>> convert_concentration([500.0], "ppm", "% m/m").tolist()
    [0.05]
    """
    return scaled(values, conversion_ratio(unit, to, density=density, molar_mass=molar_mass))


def convert_basis(values: ArrayLike, basis: str, to: str, moisture: ArrayLike) -> FloatArray:
    """Convert mass fractions between wet and dry basis.

    Parameters
    ----------
    values : array
        Mass fractions in any unit. [unit]
    basis, to : {"wet", "dry"}
        Basis before and after.
    moisture : array
        Mass fraction of moisture in the wet sample, from 0 to below 1. [g/g]

    Raises
    ------
    ParameterError
        A basis that is not among those listed, or a moisture outside [0, 1).
    """
    for name in (basis, to):
        if name not in BASES:
            raise ParameterError(f"basis = {name!r}; expected one of {', '.join(map(repr, BASES))}.")
    array, water = np.asarray(values, dtype=np.float64), np.asarray(moisture, dtype=np.float64)
    if not ((water >= 0) & (water < 1)).all():
        raise ParameterError(
            "A mass fraction of moisture lies outside 0 to 1 g/g; expected moisture of the wet sample."
        )
    if basis == to:
        return array.copy()
    return array / (1 - water) if to == "dry" else array * (1 - water)


def refuse_other_scale(calibrated: Analyte, found: Analyte) -> None:
    """Refuse values whose stated unit or basis is not that of the calibration's.

    Raises
    ------
    SampleMismatchError
        Both state a unit, or both a basis, and they differ.
    """
    units = calibrated.unit and found.unit and not same_unit(calibrated.unit, found.unit)
    if units or (calibrated.basis and found.basis and calibrated.basis != found.basis):
        raise SampleMismatchError(
            f"The calibration's values of {calibrated.name} are in {calibrated.printed_unit}, the validation's in "
            f"{found.printed_unit}; expected one unit and one basis. Convert one of the tables."
        )
