"""Laws of every design: ranges respected, totals exact, constraints kept, names and units of no account."""

from unittest.mock import patch

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from quant.errors import ParameterError
from quant.planning import exchange
from quant.planning.constraints import parse_inequality
from quant.planning.judge import judge_design
from quant.planning.load import plan_from_text
from quant.planning.plan import plan
from quant.planning.precision import rmsep_precision

laws = settings(max_examples=20)
NAMES = "abcd"


@pytest.fixture(autouse=True, scope="module")
def short_search():
    with patch.object(exchange, "_BUDGET", 1e4):
        yield


@st.composite
def plans(draw):
    """Draw two to four components, perhaps with levels, a fixed total and a constraint."""
    k = draw(st.integers(2, 4))
    n = draw(st.integers(k + 2, 14))
    text = f'title = "t"\nunit = "% m/m"\nstandards = {n}\nseed = {draw(st.integers(0, 99))}\n'
    if draw(st.booleans()):
        text += f'constraints = ["a + {draw(st.floats(0.1, 2)):.3f} * b <= {draw(st.floats(10, 60)):.2f}"]\n'
    for name in NAMES[:k]:
        low = draw(st.floats(0, 5).map(lambda x: round(x, 4)))
        high = round(low + draw(st.floats(0.5, 30)), 4)
        text += f'[[component]]\nname = "{name}"\nlow = {low}\nhigh = {high}\n'
        if draw(st.integers(0, 3)) == 0:
            text += f"levels = {draw(st.integers(2, n))}\n"
    if draw(st.booleans()):
        text += f'[mixture]\ntotal = 100\nbalance = "rest"\nbalance_low = {draw(st.integers(0, 40))}\n'
    return plan_from_text(f"{text}[validation]\nsamples = {draw(st.sampled_from([0, 2, 5]))}\n")


def planned(wanted):
    """Return the plan's result, None where ranges and constraints cannot be reconciled (which is said)."""
    try:
        return plan(wanted)
    except ParameterError as error:
        assert any(word in str(error) for word in ("cannot span", "No mixture obeys", "no room", "different mixtures"))  # noqa: PT017
        return None


@laws
@given(plans())
def test_ranges_totals_constraints_and_levels_hold(wanted):
    result = planned(wanted)
    if result is None:
        return
    assert result.standards.shape == (wanted.standards, len(wanted.names))
    for amounts in (result.standards, result.validation):
        for c, table in enumerate(wanted.component):
            width = table.high - table.low
            assert (amounts[:, c] >= table.low - 1e-9 * width).all()
            assert (amounts[:, c] <= table.high + 1e-9 * width).all()
        if wanted.mixture is not None:
            assert amounts.sum(axis=1) == pytest.approx(np.full(len(amounts), 100.0), abs=1e-9)
            assert (amounts[:, -1] >= wanted.mixture.balance_low - 1e-6).all()
        for text in wanted.constraints:
            rule = parse_inequality(text, wanted.names)
            assert (amounts @ [rule.coefficients[name] for name in wanted.names] <= rule.bound + 1e-6).all()
    for c, table in enumerate(wanted.component):
        if table.levels is not None:
            steps = (result.standards[:, c] - table.low) / (table.high - table.low) * (table.levels - 1)
            assert steps == pytest.approx(np.round(steps), abs=1e-6)


@settings(max_examples=8)
@given(plans(), st.randoms(use_true_random=False))
def test_the_order_of_components_changes_only_the_order_of_columns(wanted, random):
    order = list(range(len(wanted.component)))
    random.shuffle(order)
    one = planned(wanted)
    other = planned(wanted.model_copy(update={"component": [wanted.component[c] for c in order]}))
    assert (one is None) == (other is None)
    if one is not None:
        assert np.array_equal(one.standards[:, order], other.standards[:, : len(order)])
        assert np.array_equal(one.validation[:, order], other.validation[:, : len(order)])


@given(st.integers(0, 2**32 - 1), st.integers(6, 20), st.integers(2, 4), st.floats(1e-3, 1e3))
def test_a_judgement_does_not_depend_on_unit_or_order(seed, n, k, factor):
    rng = np.random.default_rng(seed)
    table, order = rng.random((n, k)), rng.permutation(k)
    one = judge_design(table, NAMES[:k], possible=table)
    other = judge_design(factor * table[:, order], [NAMES[c] for c in order], possible=factor * table[:, order])
    for name in ("largest_correlation", "condition", "nearest", "largest_hole"):
        assert getattr(other, name) == pytest.approx(getattr(one, name), rel=1e-6, abs=1e-9), name
    inflation = {spread.component: spread.inflation for spread in one.components}
    for spread in other.components:
        assert spread.inflation == pytest.approx(inflation[spread.component], rel=1e-6)
        assert spread.inflation >= 1 - 1e-9


@given(st.integers(1, 5000))
def test_more_validation_samples_tell_rmsep_better(n):
    fewer, more = rmsep_precision(n), rmsep_precision(n + 1)
    assert fewer.low < more.low < 0 < more.high < fewer.high
