import numpy as np
import pytest

from quant.errors import RecipeError
from quant.planning.load import plan_from_text
from quant.planning.weighing import concentration_uncertainty, masses_for, plan_weighings

CLOSED = """title = "t"
unit = "% m/m"
standards = 6
[[component]]
name = "a"
low = 0
high = 10
[[component]]
name = "b"
low = 1
high = 30
[mixture]
total = 100
balance = "rest"
[weighing]
batch = 20
mass_uncertainty = 0.001
"""
FREE = CLOSED.replace("% m/m", "g/L").replace('[mixture]\ntotal = 100\nbalance = "rest"\n', "")
FREE = FREE.replace("batch = 20", "batch = 50\nvolume_uncertainty = 0.05")


def test_masses_by_hand():
    assert masses_for(plan_from_text(CLOSED), np.array([[5.0, 25.0, 70.0]])) == pytest.approx(np.array([[1, 5, 14]]))
    assert masses_for(plan_from_text(FREE), np.array([[5.0, 20.0]])) == pytest.approx(np.array([[0.25, 1.0]]))


@pytest.mark.parametrize(
    ("unit", "whole"), [("% m/m", 100), ("%(m/m)", 100), ("g/kg", 1000), ("mg/kg", 1e6), ("g/g", 1)]
)
def test_units_of_a_share(unit, whole):
    text = CLOSED.replace("% m/m", unit).replace("total = 100", f"total = {whole}")
    text = text.replace("high = 10", f"high = {whole * 0.1}").replace(
        "low = 1\nhigh = 30", f"low = 0\nhigh = {whole * 0.3}"
    )
    assert masses_for(plan_from_text(text), np.array([[0.1, 0.2, 0.7]]) * whole) == pytest.approx(
        np.array([[2, 4, 14]])
    )


@pytest.mark.parametrize(("unit", "grams"), [("g/L", 0.5), ("mg/mL", 0.5), ("mg/L", 5e-4), ("% m/v", 5.0)])
def test_units_of_a_mass_in_a_volume(unit, grams):
    plan = plan_from_text(FREE.replace("g/L", unit))
    assert masses_for(plan, np.array([[10.0, 10.0]])) == pytest.approx(np.full((1, 2), grams))


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (FREE.replace("g/L", "% m/m"), "Shares of the whole need a \\[mixture\\]"),
        (FREE.replace("g/L", "mol/L"), "unit = 'mol/L'; expected a mass in a volume"),
        (CLOSED.replace("% m/m", "mol %"), "unit = 'mol %'; expected a share of the mass"),
        (CLOSED.replace("total = 100", "total = 90"), r"total = 90 % m/m, but what is weighed adds up to 100"),
        (CLOSED.split("[weighing]")[0], "The plan has no \\[weighing\\]"),
    ],
)
def test_units_that_cannot_be_weighed(text, message):
    plan = plan_from_text(text)
    with pytest.raises(RecipeError, match=message):
        masses_for(plan, np.ones((1, len(plan.names))))


@pytest.mark.parametrize(
    ("text", "amounts"),
    [(CLOSED, [0.5, 25.0, 74.5]), (CLOSED, [0.0, 30.0, 70.0]), (FREE, [0.5, 25.0]), (FREE, [0.0, 25.0])],
)
def test_uncertainty_equals_simulated_weighing(text, amounts):
    """Weigh 200 000 times with normal errors, and compute what the concentrations really became."""
    plan = plan_from_text(text)
    rng = np.random.default_rng(5)
    masses = masses_for(plan, np.array([amounts]))
    weighed = masses + rng.normal(0, 0.001, (200_000, masses.shape[1])) * (masses > 0)
    if plan.mixture is None:
        became = weighed / (rng.normal(50, 0.05, (200_000, 1)) * 1e-3)
    else:
        became = 100 * weighed / weighed.sum(axis=1, keepdims=True)
    found = concentration_uncertainty(plan, np.array([amounts]))[0]
    assert found == pytest.approx(became.std(axis=0), rel=0.02, abs=1e-12)


def test_small_weighings_are_warned_about_and_zeros_are_not():
    amounts = np.array([[0.0, 20.0, 80.0], [0.2, 30.0, 69.8], [10.0, 1.0, 89.0]])
    found = plan_weighings(plan_from_text(CLOSED), amounts[:2], amounts[2:])
    a, b, rest = found.components
    assert (a.smallest, a.largest, a.needed) == pytest.approx((0.04, 2.0, 2.04))
    assert a.relative == pytest.approx(100 * 0.001 / 0.04, rel=0.01)
    assert b.relative < 1 > rest.relative
    assert found.masses.shape == (2, 3)
    assert found.validation_masses == pytest.approx(np.array([[2.0, 0.2, 17.8]]))
    assert found.uncertainties[0, 0] == 0
    assert len(found.findings) == len(found.stocks) == 1
    assert found.findings[0].startswith(
        "a: weighing 0.04 g leaves 2.5 % relative standard uncertainty, above 1 %. Make"
    )
    assert found.findings[0] in str(found)


def test_a_good_balance_needs_no_advice():
    plan = plan_from_text(CLOSED.replace("0.001", "0.00001"))
    found = plan_weighings(plan, np.array([[0.2, 30.0, 69.8]]), np.empty((0, 3)))
    assert found.findings == found.stocks == ()
