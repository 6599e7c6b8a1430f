"""Stated intervals hold what they state, and limits reject what they may."""

import pytest


def test_intervals_cover_and_limits_hold_on_a_few_sets(count_sets, bounds, drying):
    counts = count_sets(n_sets=30, n_standards=32, new_a_set=8)
    low, high = bounds(counts.sets, 0.95)
    assert low <= counts.covered <= high
    assert low <= counts.covered_true <= high
    assert counts.true_intervals == counts.sets
    assert counts.rejected <= bounds(counts.new, 0.01)[1]
    assert counts.foreign == dict.fromkeys(drying.FOREIGN, counts.sets)
    # Known-bad controls: intervals half as wide, and limits from the calibration's own residuals, must fail.
    assert counts.covered_at_half_width < low
    assert counts.beyond_calibration > bounds(counts.new, 0.01)[1]


@pytest.mark.long
def test_intervals_cover_200_times(count_sets, keep_result):
    counts = count_sets(n_sets=200, n_standards=36, new_a_set=1)
    keep_result(
        "coverage",
        {
            "sets": counts.sets,
            "covered": counts.covered,
            "true_intervals": counts.true_intervals,
            "covered_true": counts.covered_true,
            "covered_at_half_width": counts.covered_at_half_width,
        },
    )
    assert 179 <= counts.covered <= 198
    assert counts.true_intervals == 200
    assert 179 <= counts.covered_true <= 198
    assert counts.covered_at_half_width < 179


@pytest.mark.long
@pytest.mark.parametrize("n_standards", [30, 60])
def test_limits_reject_one_percent_and_every_foreign_spectrum(count_sets, keep_result, drying, bounds, n_standards):
    counts = count_sets(n_sets=100, n_standards=n_standards, new_a_set=10)
    keep_result(
        f"applicability_{n_standards}",
        {
            "sets": counts.sets,
            "new": counts.new,
            "rejected": counts.rejected,
            "beyond_calibration": counts.beyond_calibration,
            "foreign_a_kind": counts.sets,
            "foreign_rejected": dict(sorted(counts.foreign.items())),
        },
    )
    assert counts.rejected <= bounds(counts.new, 0.01)[1]
    assert counts.foreign == dict.fromkeys(drying.FOREIGN, counts.sets)
    assert counts.beyond_calibration > bounds(counts.new, 0.01)[1]
