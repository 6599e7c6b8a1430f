"""Statements of power are true in simulation."""

import math

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.revalidation.equivalence import FAMILY, FAMILY_RISK, bias_equivalence, scatter_equivalence
from quant.revalidation.power import chance_of_holds, power_of, smallest_bias, standards_needed

SD = 0.03
RUNS = 2000


def errors(rng, n, bias=0.0):
    return bias + SD * rng.standard_normal((RUNS, n))


@pytest.mark.parametrize("n", [6, 12, 30])
def test_the_smallest_bias_is_found_in_nine_of_ten_visits(n):
    from scipy import stats

    found = errors(np.random.default_rng(n), n, smallest_bias(n, SD))
    t = np.abs(found.mean(axis=1)) * math.sqrt(n) / found.std(axis=1, ddof=1)
    share = np.mean(t > stats.t.isf(FAMILY_RISK / len(FAMILY) / 2, n - 1))
    assert 0.87 <= share <= 0.93


@pytest.mark.parametrize("allowed_sep", [0.055, 0.06, 0.09])
def test_the_chance_of_holds_is_what_simulation_finds(allowed_sep):
    bounds = {"sep": SD, "allowed_bias": 0.03, "allowed_sep": allowed_sep}
    stated = chance_of_holds(12, sd=SD, paired=False, **bounds)
    rows = errors(np.random.default_rng(1), 12)
    share = np.mean([bias_equivalence(e, 0.03).shown and scatter_equivalence(e, allowed_sep).shown for e in rows[:800]])
    assert share == pytest.approx(stated, abs=3.3 * math.sqrt(stated * (1 - stated) / 800))


def test_so_many_as_are_needed_let_holds_be_said_in_nine_of_ten_visits():
    bounds = {"allowed_bias": 0.03, "allowed_sep": 0.06}
    n = standards_needed(sd=SD, sep=SD, paired=False, **bounds)
    assert n is not None
    assert chance_of_holds(n, sd=SD, sep=SD, paired=False, **bounds) >= 0.9
    assert chance_of_holds(n - 1, sd=SD, sep=SD, paired=False, **bounds) < 0.9
    rows = errors(np.random.default_rng(2), n)
    share = np.mean([bias_equivalence(e, 0.03).shown and scatter_equivalence(e, 0.06).shown for e in rows])
    assert 0.87 <= share <= 0.93


def test_holds_is_said_wrongly_in_five_percent_at_most():
    rows = errors(np.random.default_rng(3), 12, bias=0.03)  # as large as allowed
    wrong = np.mean([bias_equivalence(e, 0.03).shown for e in rows])
    naive = np.mean(np.abs(rows.mean(axis=1)) < 0.03)  # known-bad control: the bias found is below what is allowed
    assert wrong <= 0.05 + 3.3 * math.sqrt(0.05 * 0.95 / RUNS)
    assert naive > 0.4


def test_a_bias_lowers_the_chance_of_holds():
    known = {"sd": SD, "sep": SD, "allowed_bias": 0.03, "allowed_sep": 0.06, "paired": True}
    chances = [chance_of_holds(12, bias=bias, **known) for bias in (0.0, 0.01, 0.02, 0.03)]
    assert chances == sorted(chances, reverse=True)
    assert chances[-1] <= 0.05


def test_what_cannot_be_shown_by_any_number_is_said():
    known = {"sd": SD, "sep": SD, "allowed_bias": 0.03, "paired": True}
    assert standards_needed(allowed_sep=0.9 * SD, **known) is None
    told = power_of(12, sd_source="validation", allowed_sep=0.9 * SD, **known)
    assert told.needed is None
    assert told.chance_of_holds < 0.1


def test_a_chance_is_a_probability():
    with pytest.raises(ParameterError, match="inside"):
        standards_needed(sd=SD, sep=SD, allowed_bias=1.0, allowed_sep=1.0, paired=True, chance=1.0)
