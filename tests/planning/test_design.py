"""The designs keep what is promised of them; the figures are those of the goal, not tuned ones."""

import numpy as np
import pytest
from scipy.spatial.distance import pdist

from quant.errors import ParameterError
from quant.planning.criterion import largest_correlation
from quant.planning.design import design_standards, design_validation, round_amounts
from quant.planning.exchange import equal_shares, random_mixtures
from quant.planning.region import region_of

BALANCE = '[mixture]\ntotal = 100\nbalance = "rest"\n'


@pytest.mark.parametrize("seed", [1, 2, 3])
@pytest.mark.parametrize(
    "plan",
    [
        pytest.param({"k": 4}, id="free totals"),
        pytest.param({"k": 4, "low": 0.5, "high": 5, "rest": BALANCE}, id="four minor beside a balance"),
        pytest.param({"k": 4, "top": 'constraints = ["a + b <= 14", "c <= 0.5 * d + 6"]'}, id="constraints"),
    ],
)
def test_24_standards_of_four_components(make_plan, plan, seed):
    region = region_of(make_plan(standards=24, **plan))
    found = region.scaled(design_standards(region, 24, seed))
    assert largest_correlation(found) <= 0.1
    assert found.min(axis=0) == pytest.approx(0, abs=0.05)
    assert found.max(axis=0) == pytest.approx(1, abs=0.05)
    assert region.contains(found)


def test_24_random_standards_are_worse(make_plan):
    """Known-bad control: what the test above asks for is not met by chance, and random points lie closer."""
    region = region_of(make_plan(4, standards=24))
    found = region.scaled(design_standards(region, 24, 1))
    rng = np.random.default_rng(0)
    draws = [rng.random((24, 4)) for _ in range(200)]
    assert np.mean([largest_correlation(points) <= 0.1 for points in draws]) < 0.05
    assert pdist(found).min() > 1.5 * np.quantile([pdist(points).min() for points in draws], 0.95)


def test_the_same_seed_gives_the_same_design(make_plan, short_search):
    region = region_of(make_plan(3))
    one, two, other = (design_standards(region, 12, seed) for seed in (1, 1, 2))
    assert np.array_equal(one, two)
    assert not np.array_equal(one, other)


def test_a_latin_hypercube_takes_equally_spaced_values_once(make_plan, short_search):
    region = region_of(make_plan(3, standards=9))
    found = design_standards(region, 9, 1)
    assert np.sort(found, axis=0) == pytest.approx(np.repeat(np.arange(1.0, 10.0)[:, None], 3, axis=1))


@pytest.mark.parametrize("top", ["", 'constraints = ["a + b <= 14"]'])
def test_levels_are_kept(make_plan, short_search, top):
    plan = make_plan(2, standards=12, top=top)
    levelled = [table.model_copy(update={"levels": 5}) for table in plan.component]
    region = region_of(plan.model_copy(update={"component": levelled}))
    found = design_standards(region, 12, 1)
    assert set(found.ravel()) == {1.0, 3.0, 5.0, 7.0, 9.0}
    if not top:
        assert all(np.unique(column, return_counts=True)[1].tolist() == [3, 2, 2, 2, 3] for column in found.T)


def test_fewer_mixtures_than_standards_are_refused(make_plan):
    plan = make_plan(2, standards=12, top='constraints = ["a + b <= 11"]')
    levelled = [table.model_copy(update={"levels": 3}) for table in plan.component]
    region = region_of(plan.model_copy(update={"component": levelled}))
    with pytest.raises(ParameterError, match="allow 6 different mixtures, but 12 standards were asked for"):
        design_standards(region, 12, 1)


@pytest.mark.parametrize("top", ["", 'constraints = ["a + b <= 14"]'])
def test_validation_lies_between_the_standards_and_spans_95_percent(make_plan, top):
    region = region_of(make_plan(3, standards=20, top=top))
    standards = design_standards(region, 20, 1)
    found = region.scaled(design_validation(region, 12, standards, 1))
    fixed = region.scaled(standards)
    assert region.contains(found)
    assert (np.ptp(found, axis=0) >= 0.95 * np.ptp(fixed, axis=0)).all()
    nearest = np.sqrt(((found[:, None] - fixed) ** 2).sum(axis=2)).min(axis=1)
    random = np.sqrt(((random_mixtures(region, 400, np.random.default_rng(1))[:, None] - fixed) ** 2).sum(axis=2))
    assert nearest.min() > np.quantile(random.min(axis=1), 0.5)  # farther from all standards than half of all mixtures


def test_no_validation(make_plan):
    region = region_of(make_plan(3))
    assert design_validation(region, 0, np.zeros((12, 3)), 1).shape == (0, 3)


def test_the_order_of_preparation_is_not_one_of_concentration(make_plan):
    found = design_standards(region_of(make_plan(4, standards=24)), 24, 1)
    number = np.arange(24.0)
    assert max(abs(np.corrcoef(number, column)[0, 1]) for column in found.T) < 0.2


def test_rounding_never_breaks_a_limit(make_plan):
    region = region_of(make_plan(2, top='constraints = ["a + b <= 12.34567"]'))
    edge = region.scaled(np.array([[6.172835, 6.172835], [4.1234567, 5.0]]))
    found = round_amounts(region, edge)
    assert region.contains(region.scaled(found))
    assert found[1] == pytest.approx([4.123, 5.0], abs=1e-12)


def test_random_mixtures_fill_the_region(make_plan):
    region = region_of(make_plan(2, low=0, high=100, rest=BALANCE))
    found = random_mixtures(region, 3000, np.random.default_rng(1))
    assert region.contains(found)
    # Uniform on a triangle: each coordinate has the mean 1/3 (the borders count a little more here).
    assert found.mean(axis=0) == pytest.approx([1 / 3, 1 / 3], abs=0.05)


def test_equal_shares_put_what_is_over_to_the_ends():
    assert equal_shares(7, 3).tolist() == [0, 0, 0, 0.5, 0.5, 1, 1]
    assert equal_shares(4, 4) == pytest.approx([0, 1 / 3, 2 / 3, 1])
