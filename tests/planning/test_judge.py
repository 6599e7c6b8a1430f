import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.planning.judge import judge_design

CORNERS = np.array([[0.0, 0.0], [0.0, 10.0], [4.0, 0.0], [4.0, 10.0]])


def test_a_square_by_hand():
    found = judge_design(CORNERS, ["a", "b"], unit="g/L", possible=[[2.0, 5.0], [4.0, 10.0]])
    assert (found.n_standards, found.factors, found.balance, found.total) == (4, 2, None, None)
    assert found.largest_correlation == pytest.approx(0)
    assert found.condition == pytest.approx(1)
    assert found.nearest == pytest.approx(1)
    assert found.largest_hole == pytest.approx(np.sqrt(0.5))  # the middle, both ranges scaled to 1
    assert (found.e1655_standards, found.e1655_validation) == (24, 20)
    a = found.components[0]
    assert (a.lowest, a.highest, a.coverage, a.values, a.largest_gap) == (0, 4, 100, 2, 100)
    assert a.inflation == pytest.approx(1)
    assert found.findings[0].startswith("4 standards; ASTM E1655 asks for 24")
    assert (
        "Gaps without a standard, where a bend would not be seen: a (100 % of the range), b (100 % of the range)."
        in found.findings
    )


# Computed from the rules of ASTM E1655 (from memory), mean-centred standards 6(k+1), validation 4k.
@pytest.mark.parametrize(("k", "standards", "validation"), [(1, 24, 20), (3, 24, 20), (4, 30, 20), (6, 42, 24)])
def test_counts_of_e1655(k, standards, validation):
    table = np.random.default_rng(1).random((10, k))
    found = judge_design(table, [f"c{i}" for i in range(k)])
    assert (found.e1655_standards, found.e1655_validation) == (standards, validation)


def test_components_that_rise_together_are_named():
    x = np.linspace(0, 1, 12)
    wiggle = 0.05 * np.cos(7 * x)
    found = judge_design(np.column_stack([x, x + wiggle, np.sin(20 * x)]), ["a", "b", "c"])
    pair = found.correlations[0]
    assert pair.components == ("a", "b")
    assert pair.r == pytest.approx(np.corrcoef(x, x + wiggle)[0, 1])
    assert found.largest_correlation == pytest.approx(pair.r)
    assert any("|r| above 0.1: a and b (r = +" in finding for finding in found.findings)
    # Variance inflation is 1/(1 − R²) of a regression on the other components.
    others = np.column_stack([np.ones(12), x + wiggle, np.sin(20 * x)])
    rest = x - others @ np.linalg.lstsq(others, x, rcond=None)[0]
    assert found.components[0].inflation == pytest.approx(x.var() / rest.var())


def test_linear_dependence_is_infinite_condition():
    x, y = np.random.default_rng(2).random((2, 30))
    found = judge_design(np.column_stack([x, y, 2 * x - y]), ["a", "b", "c"])
    assert found.condition is None
    assert [spread.inflation for spread in found.components] == [None] * 3
    assert found.findings[0].startswith("The components are linearly dependent")
    assert "condition number                   infinite" in str(found)


def test_a_fixed_total_is_found_and_its_correlations_called_unavoidable():
    minor = np.random.default_rng(3).permuted(np.tile(np.linspace(0.0, 1.0, 30), (3, 1)).T, axis=0)
    table = np.column_stack([100 - minor.sum(axis=1), minor])
    found = judge_design(table, ["powder", "a", "b", "c"])
    assert found.balance == "powder"
    assert found.total == pytest.approx(100)
    assert found.factors == 3
    assert [spread.component for spread in found.components] == ["a", "b", "c", "powder"]
    with_powder = [pair for pair in found.correlations if "powder" in pair.components]
    # Three uncorrelated components of equal spread: each has r = −1/√3 with what makes up the rest.
    assert [pair.unavoidable for pair in with_powder] == pytest.approx([-1 / np.sqrt(3)] * 3)
    among = [abs(pair.r) for pair in found.correlations if "powder" not in pair.components]
    assert found.largest_correlation == pytest.approx(max(among))
    assert "unavoidable with a fixed total: -0.577" in str(found)


def test_what_the_plan_wanted_and_the_standards_do_not_reach():
    found = judge_design(CORNERS, ["a", "b"], ranges=[[0.0, 0.0], [8.0, 10.0]])
    assert found.components[0].coverage == pytest.approx(50)
    assert "Ranges not spanned to 95 %: a (50 %)." in found.findings


def test_twins_are_told():
    found = judge_design(np.vstack([CORNERS, CORNERS[:1]]), ["a", "b"])
    assert found.nearest == 0
    assert "1 pair(s) of standards have the same composition." in found.findings


@pytest.mark.parametrize(
    ("table", "names", "balance", "error", "message"),
    [
        (CORNERS[:2], ["a", "b"], None, NotEnoughDataError, r"2 standard\(s\); at least 3"),
        (CORNERS, ["a"], None, ParameterError, "2 columns of concentrations for 1 components"),
        (CORNERS, ["a", "b"], "c", ParameterError, "balance = 'c'; expected one of the components a, b"),
        (CORNERS * [1, 0] + [0, 3], ["a", "b"], None, NotEnoughDataError, "b has the same value in all standards"),
        ([[1.0, np.nan]] * 3, ["a", "b"], None, ParameterError, "not finite"),
    ],
)
def test_what_cannot_be_judged(table, names, balance, error, message):
    with pytest.raises(error, match=message):
        judge_design(table, names, balance=balance)
