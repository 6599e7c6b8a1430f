"""The harmonic oscillator: wavenumbers and isotope ratios, computed from fixed isotope masses."""

import pytest

from quant.chemistry.oscillator import FORCE_CONSTANTS, isotope_ratio, oscillator_wavenumber, reduced_mass
from quant.errors import ParameterError

# bond, force constant [mdyn/Å], reduced mass [u], wavenumber [cm⁻¹]: computed, masses of the isotopes
BONDS = [
    ("C", "H", 5.0, 0.92974, 3021.2),
    ("C", "D", 5.0, 1.72464, 2218.3),
    ("N", "H", 6.4, 0.94016, 3399.1),
    ("O", "H", 7.7, 0.94809, 3712.8),
    ("O", "D", 7.7, 1.78885, 2702.9),
    ("C", "C", 4.5, 6.00000, 1128.3),
    ("C", "C", 9.6, 6.00000, 1647.9),
    ("C", "C", 15.6, 6.00000, 2100.7),
    ("C", "O", 5.0, 6.85621, 1112.5),
    ("C", "O", 12.0, 6.85621, 1723.5),
    ("C", "O", 12.3, 6.85621, 1745.0),
    ("13C", "O", 12.0, 7.17241, 1685.1),
    ("C", "18O", 12.0, 7.19987, 1681.9),
    ("C", "N", 5.3, 6.46219, 1179.8),
    ("C", "N", 17.7, 6.46219, 2156.1),
    ("C", "Cl", 3.4, 8.93414, 803.7),
    ("H", "Cl", 5.163, 0.97959, 2990.9),  # harmonic value
    ("D", "Cl", 5.163, 1.90441, 2145.1),
    ("C", "O", 19.02, 6.85621, 2169.9),  # carbon monoxide, harmonic value
]


@pytest.mark.parametrize(("first", "second", "constant", "mass", "wavenumber"), BONDS)
def test_computed_bonds(first, second, constant, mass, wavenumber):
    assert reduced_mass(first, second) == pytest.approx(mass, abs=6e-6)
    assert oscillator_wavenumber(first, second, constant) == pytest.approx(wavenumber, abs=0.06)


@pytest.mark.parametrize(
    ("bond", "other", "ratio"),
    [
        ("C H", "C D", 0.73423),
        ("N H", "N D", 0.73070),
        ("O H", "O D", 0.72801),
        ("C O", "13C O", 0.97771),
        ("C O", "C 18O", 0.97584),
        ("C N", "13C N", 0.97900),
        ("C N", "C 15N", 0.98454),
        ("H Cl", "D Cl", 0.71720),
        ("H Cl", "H 37Cl", 0.99924),
    ],
)
def test_computed_isotope_ratios(bond, other, ratio):
    assert isotope_ratio(tuple(bond.split()), tuple(other.split())) == pytest.approx(ratio, abs=6e-6)


def test_rough_constants_lead_where_practice_expects():
    # C-D about 2100 to 2200 where C-H lies just under 3000: the ratio carries the measured band over.
    assert 2100 < 2950 * isotope_ratio(("C", "H"), ("C", "D")) < 2200
    # computed: 1302.79·√(k/6)
    for order, wavenumber in (("single", 1189.3), ("double", 1681.9), ("triple", 2059.9)):
        assert oscillator_wavenumber("C", "C", FORCE_CONSTANTS[order]) == pytest.approx(wavenumber, abs=0.1)


def test_integer_masses_would_be_seen():
    assert oscillator_wavenumber("C", "H", 5.0) != pytest.approx(3032.1, abs=1)  # computed with 12 and 1


def test_what_is_refused():
    with pytest.raises(ParameterError, match="expected one of 'H', 'D'"):
        reduced_mass("C", "X")
    with pytest.raises(ParameterError, match="above 0"):
        oscillator_wavenumber("C", "H", 0.0)
