"""Units of concentration: what is converted, exactly, and what is refused by name."""

from fractions import Fraction

import numpy as np
import pytest

from quant.errors import ParameterError, SampleMismatchError
from quant.spectra.concentration import (
    concentration_unit_named,
    conversion_ratio,
    convert_basis,
    convert_concentration,
    refuse_other_scale,
    same_unit,
)
from quant.spectra.reference_table import Analyte


@pytest.mark.parametrize(
    ("value", "unit", "to", "expected"),
    [
        (500, "ppm", "% m/m", 0.05),
        (0.05, "% m/m", "mg/kg", 500),
        (3, "g/kg", "mg/g", 3),
        (3, "g/kg", "wt%", 0.3),
        (1.5, "% w/w", "g/g", 0.015),
        (7, "ppb", "µg/kg", 7),
        (7, "\u03bcg/g", "ppm", 7),  # the Greek letter instead of the micro sign
        (7, "ug/g", "ppm", 7),
        (0.9, "% m/v", "g/L", 9),
        (250, "mg/L", "g/L", 0.25),
        (2, "mg/mL", "g/l", 2),
        (20, "mmol/L", "mol/L", 0.02),
        (5, "octane number", "Octane Number", 5),
    ],
)
def test_conversions_within_one_kind(value, unit, to, expected):
    assert convert_concentration(value, unit, to) == expected


def test_sodium_chloride_in_saline():
    # By hand: 0.9 % m/v is 9 g/L; 9 / 58.44 = 0.154004 mol/L; at 1.0046 g/mL it is 9 / 1004.6 = 0.895879 % m/m.
    assert convert_concentration(0.9, "% m/v", "mol/L", molar_mass=58.44) == pytest.approx(9 / 58.44, rel=1e-15)
    assert convert_concentration(0.9, "% m/v", "% m/m", density=1.0046) == pytest.approx(900 / 1004.6, rel=1e-15)
    found = convert_concentration([0.9 / 1.0046], "% m/m", "mmol/L", density=1.0046, molar_mass=58.44)
    assert found == pytest.approx([9000 / 58.44], rel=1e-14)


def test_ratios_are_exact():
    assert conversion_ratio("ppm", "% m/m") == Fraction(1, 10**4)
    assert conversion_ratio("g/g", "g/L", density=0.5) == 500
    values = convert_concentration(np.arange(1, 400), "ppm", "g/g")
    assert values.tolist() == [float(f"{n}e-6") for n in range(1, 400)]  # rounded once, so that they print as written


@pytest.mark.parametrize(
    ("unit", "to", "given", "message"),
    [
        ("mg/kg", "g/L", {}, r"'mg/kg' \(mass fraction\) to 'g/L' .* without density of the sample \[g/mL\]; give it"),
        ("g/L", "mol/L", {}, r"without molar_mass of the analyte \[g/mol\]; give it"),
        ("g/L", "mol/L", {"density": 1.0}, "without molar_mass"),
        ("mol/L", "% m/m", {}, "without density of the sample .* and molar_mass of the analyte .*; give them"),
        ("%", "ppm", {}, "'%' alone does not say of what; state % m/m or % m/v"),
        ("% v/v", "% m/m", {"density": 1.0}, "a volume fraction depends on how"),
        ("mol/kg", "mol/L", {"density": 1.0}, "a molality counts the solvent"),
        ("ppm", "bushel", {}, "'bushel' is no unit of concentration known here; expected two of g/g"),
        ("ppm", "g/L", {"density": 0.0}, "density = 0.0; expected a number above 0"),
        ("g/L", "mol/L", {"molar_mass": float("nan")}, "molar_mass = nan; expected"),
    ],
)
def test_undefined_conversions_are_refused(unit, to, given, message):
    with pytest.raises(ParameterError, match=message):
        convert_concentration(1.0, unit, to, **given)


def test_same_unit():
    assert same_unit("ppm", "MG / KG")
    assert same_unit("mol/L", "mol/dm³")
    assert same_unit("octane number", "Octane number")
    assert not same_unit("ppm", "mg/L")
    assert not same_unit("octane number", "cetane number")
    assert concentration_unit_named("") is None


def test_basis():
    # By hand: 10 g of fat in 100 g of wet sample with 20 g of water are 10 g in 80 g of dry matter.
    assert convert_basis(10.0, "wet", "dry", 0.2) == pytest.approx(12.5)
    assert convert_basis([12.5, 1.0], "dry", "wet", [0.2, 0.0]) == pytest.approx([10.0, 1.0])
    assert convert_basis([3.0], "dry", "dry", [0.9]).tolist() == [3.0]
    for moisture in (1.0, -0.01, np.nan):
        with pytest.raises(ParameterError, match="outside 0 to 1 g/g"):
            convert_basis(1.0, "wet", "dry", moisture)
    with pytest.raises(ParameterError, match="basis = 'moist'; expected one of 'wet', 'dry'"):
        convert_basis(1.0, "moist", "dry", 0.1)


def test_another_scale_is_refused() -> None:
    dry, wet = Analyte("fat", "% m/m", basis="dry"), Analyte("fat", "% m/m", basis="wet")
    with pytest.raises(SampleMismatchError, match="of fat are in % m/m dry basis, the validation's in % m/m wet basis"):
        refuse_other_scale(dry, wet)
    with pytest.raises(SampleMismatchError, match="are in % m/m, the validation's in mg/kg"):
        refuse_other_scale(Analyte("fat", "% m/m"), Analyte("fat", "mg/kg"))
    for other in (Analyte("fat"), Analyte("fat", "wt%"), dry):
        refuse_other_scale(dry, other)  # what is not stated does not clash
