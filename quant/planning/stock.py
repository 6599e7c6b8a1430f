"""Stock mixtures: what is too little to weigh is taken as a larger portion of a diluted stock."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.recipe.plan_schema import Plan
from quant.result import Result, documented

_SPARE = 1.2  # stock made for each part used


@dataclass(frozen=True, kw_only=True)
class StockAdvice(Result):
    """How to bring in a component whose mass is too small to weigh."""

    component: str = documented("Name of the component")
    strength: float | None = documented("Mass fraction of it in the stock; none if no stock would do", "% m/m")
    component_mass: float | None = documented("Mass of it in the stock", "g")
    stock_mass: float | None = documented("Mass of stock to make", "g")
    smallest_portion: float | None = documented("Smallest portion of stock to weigh", "g")
    largest_portion: float | None = documented("Largest portion of stock to weigh", "g")
    relative: float | None = documented("Relative standard uncertainty of the smallest concentration then", "%")
    batch_instead: float = documented("Size of one sample at which the pure component could be weighed", "g or mL")
    advice: str = documented("The same in words")


def advise_stocks(plan: Plan, masses: FloatArray, poor: Sequence[int]) -> tuple[StockAdvice, ...]:
    """Return how to bring in the components that are too little to weigh.

    A stock of mass fraction 1/D is weighed in portions D times the component's mass. D makes the smallest portion so
    large that it and the stock's own weighing have each at most 1/√2 of the relative uncertainty allowed. The stock's
    diluent takes the place of the balance component (with free totals: of the solvent, taken as 1 g/mL), so D is
    bounded by how much of that each sample holds, shared among the components that need a stock.

    Parameters
    ----------
    plan : Plan
        With a [weighing] table.
    masses : array of shape (n, k)
        Masses of all samples in the order of `plan.names`. [g]
    poor : sequence of int
        Columns of the components that need it.
    """
    if plan.weighing is None or not poor:
        return ()
    room = np.full(len(masses), plan.weighing.batch) if plan.mixture is None else masses[:, -1]
    diluent = "the solvent" if plan.mixture is None else plan.mixture.balance
    return tuple(_advise(plan, plan.names[c], masses[:, c], room / len(poor), diluent) for c in poor)


def _advise(plan: Plan, name: str, masses: FloatArray, room: FloatArray, diluent: str) -> StockAdvice:
    table = plan.weighing
    assert table is not None  # advise_stocks sees to it
    there = masses > 0
    portion = math.sqrt(2) * table.mass_uncertainty / table.largest_relative  # smallest good one [g]
    smallest, largest = float(masses[there].min()), float(masses.max())
    batch = table.batch * table.mass_uncertainty / table.largest_relative / smallest
    unit = "mL" if plan.mixture is None else "g"
    instead = f"samples of at least {_upwards(batch):g} {unit}"
    most = 1 + float((room[there] / masses[there]).min())
    least = max(portion / smallest, 1.0)
    if least > most:
        advice = f"No stock in {diluent} would do: there is not enough of it to replace. Make {instead}."
        nothing = dict.fromkeys(
            ("strength", "component_mass", "stock_mass", "smallest_portion", "largest_portion", "relative")
        )
        return StockAdvice(component=name, batch_instead=batch, advice=advice, **nothing)
    dilution = min(_upwards(least), most)
    stock = max(_SPARE * dilution * float(masses.sum()), dilution * portion)
    inside = stock / dilution
    relative = math.hypot(table.mass_uncertainty / (dilution * smallest), table.mass_uncertainty / inside)
    return StockAdvice(
        component=name,
        strength=100 / dilution,
        component_mass=inside,
        stock_mass=stock,
        smallest_portion=dilution * smallest,
        largest_portion=dilution * largest,
        relative=100 * relative,
        batch_instead=batch,
        advice=f"Make {stock:.3g} g of a stock of {100 / dilution:.3g} % m/m in {diluent} ({inside:.3g} g in it) and "
        f"weigh {dilution * smallest:.3g} to {dilution * largest:.3g} g of that ({100 * relative:.2g} % then), or make "
        f"{instead}.",
    )


def _upwards(value: float) -> float:
    """Return the next of 1, 2, 5, 10, 20 ... that is not below a value."""
    decade = 10.0 ** math.floor(math.log10(value))
    return next(step * decade for step in (1.0, 2.0, 5.0, 10.0) if step * decade >= value * (1 - 1e-12))
