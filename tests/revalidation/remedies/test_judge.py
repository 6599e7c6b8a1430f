"""Remedies side by side, on standards left out."""

from dataclasses import replace

import numpy as np
import pytest

from quant.revalidation.remedies.judge import expected_sep, judge_remedies
from quant.revalidation.remedies.table import REMEDIES


def test_a_shift_calls_for_the_axis_and_each_remedy_is_judged_on_what_it_had_not_seen(world):
    standards = world.standards(np.random.default_rng(3), shift=0.8)
    judged = {entry.row.name: entry for entry in judge_remedies(standards)}
    rows = {name: entry.row for name, entry in judged.items()}
    assert list(rows) == ["none", *(remedy.name for remedy in REMEDIES)]
    assert [name for name, row in rows.items() if row.proposed] == ["axis"]
    assert rows["none"].not_applicable == len(standards)
    assert not rows["bias"].qualifies  # values would be right, but the spectra stay strange
    differences = standards.after.value - standards.target
    others = (differences.sum() - differences) / (differences.size - 1)
    np.testing.assert_allclose(judged["bias"].predicted, standards.after.value - others, rtol=1e-9)


def test_the_simplest_within_one_standard_error_is_proposed(world):
    rows = [entry.row for entry in judge_remedies(world.standards(np.random.default_rng(4), resolution=5.0))]
    chosen = [row for row in rows if row.qualifies]
    best = min(chosen, key=lambda row: row.rmse)
    near = [row for row in chosen if row.rmse**2 <= best.rmse**2 + best.standard_error]
    assert [row.name for row in rows if row.within_one_se] == [row.name for row in near]
    assert [row.name for row in rows if row.proposed] == [near[0].name]


@pytest.mark.parametrize("name", ["orthogonal", "recalibration"])
def test_remedies_that_fit_anew_say_that_they_need_the_calibration(world, name):
    rows = {e.row.name: e.row for e in judge_remedies(world.standards(np.random.default_rng(5), fit_anew=False))}
    assert not rows[name].available
    assert "its recipe" in rows[name].note
    assert rows[name].rmse is None


def test_maps_and_new_fits_restore_a_shift(world):
    standards = world.standards(np.random.default_rng(6), shift=0.8)
    rows = {entry.row.name: entry.row for entry in judge_remedies(standards)}
    for name in ("orthogonal", "recalibration", "direct", "piecewise"):
        assert rows[name].not_applicable <= 3
        assert rows[name].rmse_reference < 0.6 * rows["none"].rmse_reference


def test_the_expected_sep_is_the_validated_one_and_what_pairs_show_beyond_presentation(world):
    standards = world.standards(np.random.default_rng(11))
    standards = replace(standards, after_spectra=standards.before_spectra)  # of equal noise
    sep, sd = standards.validated_sep, standards.difference_sd[0]
    signs = np.where(np.arange(12) % 2, 1.0, -1.0)
    for scatter, expected in ((0.5 * sd, sep), (sd, sep), (np.hypot(sd, sep), np.sqrt(2) * sep)):
        assert expected_sep(standards, world.model, standards.before + scatter * signs) == pytest.approx(expected)
    alone = replace(standards, before_spectra=None, before_index=None)
    assert expected_sep(alone, world.model, alone.reference + 0.3 * signs) == pytest.approx(0.3)


def test_where_no_model_applies_again_limits_are_renewed_with_the_remedy(world):
    rows = {e.row.name: e.row for e in judge_remedies(world.standards(np.random.default_rng(12), noise=1.6e-3))}
    assert not any(row.qualifies for row in rows.values())
    proposed = next(row for row in rows.values() if row.proposed)
    assert proposed.not_applicable > 3
    assert rows["limits"].rmse == rows["none"].rmse
