"""Shares of regions: a hand example, the order of claims, other axes, moving windows."""

from types import SimpleNamespace

import numpy as np
import pytest

from quant.calibration.band_shares import (
    ANALYTE,
    GASES,
    MATRIX,
    NOWHERE,
    band_shares,
    blurring,
    blurring_remarks,
    why_no_shares,
)
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.preprocessing.snv import SNV
from quant.recipe.chemistry_schema import ChemistryTable


def evidence(axis, mean, vector, unit="cm-1", steps=()):
    """What the shares look at."""
    model = SimpleNamespace(axis=SimpleNamespace(unit=unit), steps=steps)
    return SimpleNamespace(axis_after=np.array(axis), mean=np.array(mean), vector=np.array(vector), model=model)


def table(**given):
    return ChemistryTable.model_validate(given)


AXIS = [
    2400.0,
    2300.0,
    1700.0,
    1600.0,
    1200.0,
]  # one point each: nowhere, carbon dioxide, analyte, water vapour, matrix
MEAN = [[1.0, 0.0, 1.0, 2.0, 0.0], [2.0, 1.0, 3.0, 2.0, 1.0], [3.0, 2.0, 5.0, 2.0, 2.0]]
VECTOR = [1.0, -1.0, 1.0, 7.0, 0.5]


def test_by_hand():
    found = band_shares(evidence(AXIS, MEAN, VECTOR), table(analyte=[1700], matrix=[1200]))
    # Parts b·x rise from sample to sample by 1, −1, 2, 0, 0.5: the prediction rises by 2.5.
    assert {each.region: each.share for each in found} == pytest.approx(
        {ANALYTE: 2 / 2.5, MATRIX: 0.5 / 2.5, GASES[0]: -1 / 2.5, GASES[1]: 0, NOWHERE: 1 / 2.5}
    )
    assert [each.region for each in found] == [ANALYTE, MATRIX, *GASES, NOWHERE]
    assert found[0].bands == ("stated 1688 to 1712",)
    assert all(each.n_points == 1 for each in found)


def test_without_a_table_only_the_air_is_known():
    found = band_shares(evidence(AXIS, MEAN, VECTOR), None)
    assert [each.region for each in found] == [*GASES, NOWHERE]
    assert found[1].n_points == 2  # 1700 and 1600


def test_the_first_claim_counts_and_the_contested_points_are_counted():
    found = band_shares(evidence(AXIS, MEAN, VECTOR), table(analyte=[[1750, 1650]], matrix=[[1720, 1550]]))
    by_name = {each.region: each for each in found}
    assert (by_name[ANALYTE].n_points, by_name[ANALYTE].n_contested) == (1, 1)
    assert (by_name[MATRIX].n_points, by_name[MATRIX].share) == (1, 0)  # 1600 only
    assert GASES[1] not in by_name


def test_wavelengths_are_converted_and_ranges_stay_on_the_axis():
    axis = 1e7 / np.array(AXIS)
    turned = band_shares(evidence(axis, MEAN, VECTOR, unit="nm"), table(analyte=[1700], matrix=[1200]))
    plain = band_shares(evidence(AXIS, MEAN, VECTOR), table(analyte=[1700], matrix=[1200]))
    assert [(each.region, each.share) for each in turned] == [(each.region, each.share) for each in plain]
    low, high = turned[0].ranges[0]
    assert low < 1e7 / 1700 < high


def test_moving_windows_widen_but_not_across_a_cut():
    axis = np.concatenate([np.arange(1800.0, 1698.0, -4.0), np.arange(1300.0, 1200.0, -4.0)])
    mean = np.random.default_rng(1).normal(size=(6, axis.size))
    smoothed = (SavitzkyGolay(window=9, polynomial=2, derivative=1),)
    given = table(analyte=[[1704, 1700]])
    plain = band_shares(evidence(axis, mean, np.ones(axis.size)), given)[0]
    wide = band_shares(evidence(axis, mean, np.ones(axis.size), steps=smoothed), given)[0]
    assert (plain.n_points, wide.n_points) == (2, 6)  # four points more to one side, the cut on the other
    assert wide.ranges == ((1698.0, 1722.0),)
    assert blurring(smoothed) == 4


def test_remarks_name_what_mixes_and_what_blurs():
    assert blurring_remarks([]) == []
    remarks = blurring_remarks([SavitzkyGolay(window=11), SNV()])
    assert "5 points each way" in remarks[0]
    assert remarks[1].startswith("After SNV every ordinate")


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"vector": None}, "no regression vector"),
        ({"model": SimpleNamespace(axis=SimpleNamespace(unit="point"), steps=())}, "counts points"),
        ({"vector": np.zeros(5)}, "all the same"),
    ],
)
def test_where_there_are_none(change, words):
    given = evidence(AXIS, MEAN, VECTOR)
    for name, value in change.items():
        setattr(given, name, value)
    assert words in why_no_shares(given)
    assert band_shares(given, None) == ()
