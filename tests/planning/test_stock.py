import numpy as np
import pytest

from quant.planning.load import plan_from_text
from quant.planning.stock import advise_stocks

CLOSED = """title = "t"
unit = "% m/m"
standards = 6
[[component]]
name = "a"
low = 0
high = 10
[mixture]
total = 100
balance = "rest"
[weighing]
batch = 10
mass_uncertainty = 0.001
"""


def test_a_stock_by_hand():
    # Portions of √2·0.001/0.01 = 0.1414 g at least, so 0.01 g is to be diluted 14.1 times, roundly 20.
    masses = np.array([[0.01, 9.99], [0.0, 10.0], [0.3, 9.7]])
    [found] = advise_stocks(plan_from_text(CLOSED), masses, [0])
    assert found.strength == pytest.approx(5.0)
    assert (found.smallest_portion, found.largest_portion) == pytest.approx((0.2, 6.0))
    assert found.stock_mass == pytest.approx(1.2 * 20 * 0.31)
    assert found.component_mass == pytest.approx(1.2 * 0.31)
    assert found.relative == pytest.approx(100 * np.hypot(0.001 / 0.2, 0.001 / 0.372))
    assert found.relative < 1
    assert found.batch_instead == pytest.approx(100)
    assert "a stock of 5 % m/m in rest" in found.advice
    assert "samples of at least 100 g" in found.advice


def test_the_room_in_every_sample_bounds_the_dilution():
    # 0.5 g of component and 9.5 g of the rest: at most 20-fold; 0.01 g needs 14.1-fold, so the round 20 just fits.
    plan = plan_from_text(CLOSED)
    [fits] = advise_stocks(plan, np.array([[0.01, 9.99], [0.5, 9.5]]), [0])
    assert fits.strength == pytest.approx(5.0)
    [cut] = advise_stocks(plan, np.array([[0.01, 9.99], [0.6, 9.4]]), [0])
    assert 100 / cut.strength == pytest.approx(1 + 9.4 / 0.6)  # 16.7, no round number but what there is room for
    [none] = advise_stocks(plan, np.array([[0.01, 9.99], [0.9, 9.1]]), [0])
    assert none.strength is None
    assert none.advice.startswith("No stock in rest would do: there is not enough of it to replace.")
    assert none.advice.endswith("Make samples of at least 100 g.")


def test_free_totals_use_the_solvent():
    plan = plan_from_text(CLOSED.replace("% m/m", "g/L").replace('[mixture]\ntotal = 100\nbalance = "rest"\n', ""))
    [found] = advise_stocks(plan, np.array([[0.01], [0.1]]), [0])
    assert found.strength == pytest.approx(5.0)
    assert "in the solvent" in found.advice
    assert "at least 100 mL" in found.advice


def test_nothing_to_advise():
    assert advise_stocks(plan_from_text(CLOSED), np.ones((2, 2)), []) == ()
