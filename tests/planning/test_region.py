import numpy as np
import pytest

from quant.errors import ParameterError
from quant.planning.region import decimals_of, extreme_points, region_of

BALANCE = '[mixture]\ntotal = 100\nbalance = "rest"\n'


def test_what_the_ranges_fulfil_by_themselves_is_no_limit(make_plan):
    region = region_of(make_plan(3, rest=BALANCE))  # three components of at most 9 % always leave room
    assert region.is_box
    assert region_of(make_plan(3, top='constraints = ["a + b <= 18"]')).is_box
    assert not region_of(make_plan(3, top='constraints = ["a + b <= 17.9"]')).is_box


def test_components_stand_in_the_order_of_their_names(make_plan):
    plan = make_plan(3)
    turned = plan.model_copy(update={"component": plan.component[::-1]})
    assert region_of(turned).names == region_of(plan).names == ("a", "b", "c")


def test_a_constraint_on_the_balance_is_one_on_the_others(make_plan):
    region = region_of(make_plan(2, top='constraints = ["rest >= 88"]', rest=BALANCE))
    # a + b <= 12 with a = 1 + 8u, b = 1 + 8v: u + v <= 10/8
    assert pytest.approx(np.array([[1.0, 1.0]])) == region.A
    assert region.b == pytest.approx([10 / 8])


def test_segment_by_hand(make_plan):
    region = region_of(make_plan(2, top='constraints = ["a + b <= 12", "a >= 0.5 * b - 1"]'))
    low, high = region.segment(region.scaled([[5.0, 8.0]])[0], 0)
    assert region.amounts(np.array([[low, 0], [high, 0]]))[:, 0] == pytest.approx([3.0, 4.0])


def test_segments_of_many_points_are_those_of_each(make_plan):
    region = region_of(make_plan(3, top='constraints = ["a + b <= 12", "a >= 0.5 * b - 1", "c <= a + 5"]'))
    points = np.array([[0.2, 0.3, 0.1], [0.0, 0.0, 0.0], [0.5, 0.1, 0.4]])
    for c in range(3):
        low, high = region.segments(points, c)
        assert list(zip(low, high, strict=True)) == [pytest.approx(region.segment(point, c)) for point in points]


def test_values_of_a_segment_are_round_or_ends_or_levels(make_plan):
    region = region_of(make_plan(2, low=0.123456, high=2.0))
    values = region.amounts(np.tile(region.values_between(0, 0.0, 0.41, 5)[:, None], 2))[:, 0]
    assert values[0] == 0.123456
    assert values[1:] == pytest.approx(np.round(values[1:], 3), abs=1e-12)
    assert region.values_between(0, 0.4, 0.4 + 1e-6, 5).size == 0
    plan = make_plan(1, standards=9)
    levelled = plan.model_copy(update={"component": [plan.component[0].model_copy(update={"levels": 5})]})
    assert region_of(levelled).values_between(0, 0.2, 0.8, 12) == pytest.approx([0.25, 0.5, 0.75])


def test_extreme_points_reach_every_end_and_lie_inside(make_plan):
    region = region_of(make_plan(3, low=0, high=100, rest=BALANCE))
    points = extreme_points(region)
    assert region.contains(points)
    assert np.diag(points[:3]) == pytest.approx(0)
    assert np.diag(points[3:]) == pytest.approx(1)


@pytest.mark.parametrize("span", [0.0123, 0.99, 1.0, 9.99, 250.0])
def test_steps_are_between_a_thousandth_and_a_ten_thousandth_of_a_range(span):
    assert span / 10_000 <= 10.0 ** -decimals_of(span) <= span / 1000 * (1 + 1e-12)


def test_a_total_that_is_too_small_says_which_range_it_cuts(make_plan):
    text = 'balance = "rest"\nbalance_low = 20\n'
    with pytest.raises(ParameterError, match=r"b 1 to 90: only 1 to 79 % m/m can be reached\. Limits in force"):
        region_of(make_plan(2, low=1, high=90, rest=f"[mixture]\ntotal = 100\n{text}"))


def test_no_mixture_at_all(make_plan):
    with pytest.raises(ParameterError, match=r"No mixture obeys .* begin at a 30, b 30, c 30, d 30 \(sum 120\)"):
        region_of(make_plan(4, low=30, high=90, rest=BALANCE))
    with pytest.raises(ParameterError, match="No mixture obeys everything asked for: a >= b \\+ 9"):
        region_of(make_plan(2, top='constraints = ["a >= b + 9"]'))


@pytest.mark.parametrize(
    ("top", "rest"),
    [
        ('constraints = ["a <= b", "b <= a"]', ""),
        ("", '[mixture]\ntotal = 100\nbalance = "rest"\nbalance_low = 90\nbalance_high = 90\n'),
    ],
)
def test_limits_that_fix_a_component_are_refused(make_plan, top, rest):
    with pytest.raises(ParameterError, match="no room to vary apart"):
        region_of(make_plan(2, top=top, rest=rest))


def test_levels_narrow_what_can_be_reached(make_plan):
    # Both take 1 or 9 only: a = 1 needs b <= 8, hence 1; b = 9 needs a >= 2, hence 9.
    plan = make_plan(2, top='constraints = ["a >= b - 7"]')
    levelled = [table.model_copy(update={"levels": 2}) for table in plan.component]
    region = region_of(plan.model_copy(update={"component": levelled}))
    least_a, _, _, most_b = region.amounts(extreme_points(region))
    assert least_a == pytest.approx([1, 1])
    assert most_b == pytest.approx([9, 9])
