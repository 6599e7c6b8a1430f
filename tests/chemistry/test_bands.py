"""Characteristic bands: common practice as check values (from memory of the handbooks)."""

import pytest

from quant.chemistry.bands import CARBON_DIOXIDE, WATER_VAPOUR, group_bands, named_bands
from quant.errors import ParameterError


def covered(bands, position):
    return any(band.low <= position <= band.high for band in bands)


@pytest.mark.parametrize(
    ("name", "position"),
    [
        ("hydrogen-bonded O-H", 3300),
        ("ketone C=O", 1715),  # acetone 1715.43 found in public notes
        ("ester C=O", 1741),
        ("C=C alkene", 1650),
        ("CH3 stretch", 2960),
        ("aromatic C-H", 3026),  # styrene oligomer 3025.85 found in public notes
        ("C-D", 2150),
        ("alkyl C≡N", 2253),
        ("aryl C≡N", 2229),
        ("monosubstituted benzene", 694),
        ("alcohol C-O", 1050),
    ],
)
def test_practice_lies_in_the_ranges(name, position):
    assert covered(named_bands(name), position)


def test_sp3_stretches_lie_under_3000_and_sp2_over():
    assert max(band.high for name in ("CH3 stretch", "CH2 stretch") for band in named_bands(name)) < 3000
    assert min(band.low for name in ("=C-H", "aromatic C-H") for band in named_bands(name)) >= 3000


def test_every_range_rises_and_names_its_source():
    assert len(group_bands()) > 60
    for band in group_bands():
        assert 600 <= band.low < band.high <= 3700
        assert band.source
        assert band.strength in ("", "strong", "medium", "weak")


def test_groups_of_several_bands_and_solvents_come_whole():
    assert [(band.low, band.high) for band in named_bands("anhydride c=o")] == [(1800, 1850), (1740, 1790)]
    assert [band.low for band in named_bands("EtOAc")] == [1741, 1374, 1241, 1047]
    assert named_bands("EtOAc") == named_bands("Ethyl acetate")


def test_bonds_are_told_apart_and_unknown_names_get_a_hint():
    assert named_bands("C≡C") != named_bands("C=C alkene")
    with pytest.raises(ParameterError, match=r"such as 'ester C=O'"):
        named_bands("ester C=0")
    with pytest.raises(ParameterError, match="a position such as 1741"):
        named_bands("qqq")


def test_the_air():
    # Band origins from memory of Herzberg: CO2 2349.1 and 667.4; H2O 1594.8, 3657.1, 3755.9.
    assert all(covered(CARBON_DIOXIDE, position) for position in (2349.1, 667.4))
    assert all(covered(WATER_VAPOUR, position) for position in (1594.8, 3657.1, 3755.9))
    assert not covered(WATER_VAPOUR, 2349.1)
