"""Reference values."""

import numpy as np
import pytest

from quant.errors import ParameterError, SampleMismatchError
from quant.spectra.reference_table import Analyte, ReferenceTable, Repeatability

ETHANOL, WATER = Analyte("ethanol", "% m/m"), Analyte("water")


def test_a_table() -> None:
    table = ReferenceTable(["A", "B"], [ETHANOL, WATER], [[1, 2], [3, np.nan]], [{"batch": "1"}, {}])
    assert len(table) == 2
    assert str(table) == "2 samples with reference values of ethanol [% m/m], water"
    with pytest.raises(ValueError, match="read-only"):
        table.values[0, 0] = 9


@pytest.mark.parametrize("error", [-0.1, np.nan, np.inf])
def test_a_laboratory_error_is_0_or_more(error: float) -> None:
    with pytest.raises(ParameterError, match="laboratory_error of ethanol"):
        Analyte("ethanol", "%", error)
    assert Analyte("ethanol", "%", 0.0).laboratory_error == 0


@pytest.mark.parametrize(("values", "notes"), [([[1], [2], [3]], None), ([1, 2], None), ([[1], [2]], [{}])])
def test_parts_that_do_not_fit(values: list[object], notes: list[dict[str, str]] | None) -> None:
    with pytest.raises(ParameterError, match="one row a sample and one column an analyte"):
        ReferenceTable(["A", "B"], [WATER], values, notes)


def test_a_sample_has_one_row() -> None:
    with pytest.raises(SampleMismatchError, match="more than one row for A, C; expected one"):
        ReferenceTable(["C", "A", "B", "A", "C"], [WATER], [[1]] * 5)


def test_a_basis_is_printed_with_the_unit() -> None:
    assert Analyte("fat", "% m/m", basis="dry").printed_unit == "% m/m dry basis"
    assert (Analyte("fat", "% m/m").printed_unit, Analyte("fat", basis="wet").printed_unit) == ("% m/m", "wet basis")
    with pytest.raises(ParameterError, match="basis of fat = 'moist'; expected one of '', 'wet', 'dry'"):
        Analyte("fat", basis="moist")


def test_limits_and_determinations() -> None:
    table = ReferenceTable(["A", "B"], [ETHANOL], [[np.nan], [2]], censored=[[0.5], [np.nan]])
    assert table.censored[0, 0] == 0.5
    assert table.determinations.tolist() == [[1], [1]]
    with pytest.raises(ValueError, match="read-only"):
        table.censored[0, 0] = 1
    with pytest.raises(ParameterError, match="Both a value and an upper limit for B; expected one of the two"):
        ReferenceTable(["A", "B"], [ETHANOL], [[1], [2]], censored=[[np.nan], [3]])
    with pytest.raises(ParameterError, match=r"determinations has shape \(2,\); expected that of the values, \(2, 1\)"):
        ReferenceTable(["A", "B"], [ETHANOL], [[1], [2]], determinations=[2, 2])
    known = {"ethanol": Repeatability(0.1, 3, 3)}
    assert ReferenceTable(["A"], [ETHANOL], [[1]], repeatability=known).repeatability == known
