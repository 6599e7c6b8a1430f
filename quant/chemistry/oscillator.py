"""The harmonic oscillator of two atoms: where a bond should show, and how an isotope moves it."""

import math

from quant.checks import one_of
from quant.errors import ParameterError

WAVENUMBER = 1302.79  # cm⁻¹ at 1 mdyn/Å and 1 u: 1/(2πc)·√(100 N/m / u), computed from CODATA values

# Masses of single isotopes, from memory of the atomic mass tables; never those of the natural mixture. [u]
MASSES = {
    "H": 1.00782503,
    "D": 2.01410178,
    "B": 11.00930536,
    "C": 12.0,
    "13C": 13.00335484,
    "N": 14.00307400,
    "15N": 15.00010890,
    "O": 15.99491462,
    "18O": 17.99915961,
    "F": 18.99840316,
    "Si": 27.97692653,
    "P": 30.97376200,
    "S": 31.97207117,
    "Cl": 34.96885268,
    "37Cl": 36.96590260,
    "79Br": 78.91833760,
}

FORCE_CONSTANTS = {"single": 5.0, "double": 10.0, "triple": 15.0}
"""Rough values by the order of the bond; 1 mdyn/Å = 10⁵ dyn/cm. [mdyn/Å] From memory: textbooks."""


def reduced_mass(first: str, second: str) -> float:
    """Return m1·m2/(m1 + m2) of two atoms. [u]

    Parameters
    ----------
    first, second : str
        Isotopes as in `MASSES`: the most abundant one by its element's sign ("C", "Cl"), "D", "13C", "18O" ...

    Raises
    ------
    ParameterError
        An isotope that is not in the table.
    """
    m1, m2 = (MASSES[one_of("atom", atom, tuple(MASSES))] for atom in (first, second))
    return m1 * m2 / (m1 + m2)


def oscillator_wavenumber(first: str, second: str, force_constant: float) -> float:
    """Return where two atoms on a spring absorb: 1302.79·√(k/μ). [cm⁻¹]

    An estimate: real bonds are anharmonic (X-H bonds lie a few percent lower than their harmonic value) and couple
    with their neighbours.

    Parameters
    ----------
    first, second : str
        As in `reduced_mass`.
    force_constant : float
        About 5, 10, 15 for single, double, triple bonds. [mdyn/Å = 10⁵ dyn/cm]

    Raises
    ------
    ParameterError
        An unknown isotope, or a force constant that is not above 0.
    """
    if not (math.isfinite(force_constant) and force_constant > 0):
        raise ParameterError(f"force_constant = {force_constant} mdyn/Å; expected a number above 0.")
    return WAVENUMBER * math.sqrt(force_constant / reduced_mass(first, second))


def isotope_ratio(bond: tuple[str, str], other: tuple[str, str]) -> float:
    """Return by what factor a band moves where one isotope takes another's place: √(μ/μ'), the spring unchanged.

    Parameters
    ----------
    bond : pair of str
        The atoms as they were: ("C", "H").
    other : pair of str
        The atoms now: ("C", "D").
    """
    return math.sqrt(reduced_mass(*bond) / reduced_mass(*other))
