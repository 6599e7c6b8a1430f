"""What to weigh for each standard, how well that fixes its composition, and when a stock mixture is needed."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.errors import RecipeError
from quant.planning.stock import StockAdvice, advise_stocks
from quant.recipe.plan_schema import Plan, WeighingTable
from quant.result import Result, documented
from quant.text_table import format_columns
from quant.units import plain_word

# A unit, after `plain_word`: how much of it the pure substance is.
WHOLE = {
    **dict.fromkeys(("%m/m", "%w/w", "wt%", "m/m%", "g/100g"), 100.0),
    **dict.fromkeys(("g/kg", "mg/g"), 1000.0),
    **dict.fromkeys(("mg/kg", "ug/g", "µg/g"), 1e6),
    **dict.fromkeys(("g/g", "kg/kg"), 1.0),
}
# ... and the mass in one millilitre. [g/mL]
PER_ML = {
    **dict.fromkeys(("g/l", "mg/ml", "kg/m3", "kg/m³"), 1e-3),
    **dict.fromkeys(("mg/l", "ug/ml", "µg/ml"), 1e-6),
    **dict.fromkeys(("%m/v", "%w/v", "g/100ml"), 1e-2),
    "g/ml": 1.0,
}


@dataclass(frozen=True, kw_only=True)
class ComponentWeighing(Result):
    """Weighings of one component over all standards and validation samples."""

    component: str = documented("Name of the component")
    smallest: float | None = documented("Smallest mass to weigh, zeros left out; none if there is no other", "g")
    largest: float = documented("Largest mass to weigh", "g")
    needed: float = documented("Mass needed for all samples", "g")
    uncertainty: float = documented("Largest standard uncertainty of a concentration", "unit")
    relative: float | None = documented("Largest relative standard uncertainty of a concentration, zeros left out", "%")


@dataclass(frozen=True, kw_only=True, eq=False)
class WeighingPlan(Result):
    """Masses for every sample, and what they make uncertain."""

    batch: str = documented("Size of one sample, in words")
    mass_uncertainty: float = documented("Standard uncertainty of one net weighing", "g")
    largest_relative: float = documented("Relative standard uncertainty beyond which is warned", "%")
    components: tuple[ComponentWeighing, ...] = documented("One entry a component")
    masses: FloatArray = documented("Masses for the standards: one row a standard, one column a component", "g")
    uncertainties: FloatArray = documented("Standard uncertainty of each concentration of the standards", "unit")
    validation_masses: FloatArray = documented("The same for the validation samples", "g")
    validation_uncertainties: FloatArray = documented("The same for the validation samples", "unit")
    stocks: tuple[StockAdvice, ...] = documented("Components better taken from a stock mixture, and how")
    findings: tuple[str, ...] = documented("Weighings that are too small, and what to do")

    def __str__(self) -> str:
        """One line a component, then what is too small."""
        table = format_columns(
            ("component", "weigh from [g]", "to [g]", "in all [g]", "largest u(c)", "relative %"),
            [(c.component, c.smallest, c.largest, c.needed, c.uncertainty, c.relative) for c in self.components],
        )
        head = f"{self.batch}; standard uncertainty of one weighing {self.mass_uncertainty:g} g"
        return "\n".join([head, table, *(f"! {finding}" for finding in self.findings)])


def masses_for(plan: Plan, amounts: FloatArray) -> FloatArray:
    """Return the mass of each component in each sample.

    Parameters
    ----------
    plan : Plan
        With a [weighing] table.
    amounts : array of shape (n, k)
        Concentrations in the order of `plan.names`. [unit of the plan]

    Returns
    -------
    array of shape (n, k)
        [g]

    Raises
    ------
    RecipeError
        The unit is no share of the mass (fixed total) or no mass in a volume (free totals), or the total is not the
        whole.
    """
    table, word = _weighing(plan), plain_word(plan.unit)
    if plan.mixture is None:
        if word not in PER_ML:
            closed = " Shares of the whole need a [mixture] with total and balance." if word in WHOLE else ""
            raise RecipeError(
                f"[weighing] with free totals: unit = {plan.unit!r}; expected a mass in a volume, such as g/L, mg/mL, "
                f"mg/L or % m/v.{closed}"
            )
        return amounts * (table.batch * PER_ML[word])
    if word not in WHOLE:
        raise RecipeError(
            f"[weighing] with a fixed total: unit = {plan.unit!r}; expected a share of the mass, such as % m/m, g/kg "
            "or mg/kg. Convert the ranges, or leave [weighing] out."
        )
    if abs(plan.mixture.total - WHOLE[word]) > 1e-9 * WHOLE[word]:
        raise RecipeError(
            f"[mixture] total = {plan.mixture.total:g} {plan.unit}, but what is weighed adds up to {WHOLE[word]:g} "
            f"{plan.unit}; expected that total. Count everything else in the balance component."
        )
    return amounts * (table.batch / plan.mixture.total)


def concentration_uncertainty(plan: Plan, amounts: FloatArray) -> FloatArray:
    """Standard uncertainty of each concentration from the weighings (and the volume).

    Fixed total T: c_i = T·m_i/Σm, hence with w = m/Σm and the same u for each weighing that is made
    u²(c_i) = (T/Σm)²·u²·[(1 − w_i)²·a_i + w_i²·Σ_{j≠i} a_j], a_j = 1 where component j is weighed, 0 where it is not.
    Free totals: c = m/V, u²(c) = (u/V)² + (c·u_V/V)². Purities are taken as known.

    Parameters
    ----------
    plan : Plan
        With a [weighing] table.
    amounts : array of shape (n, k)
        Concentrations in the order of `plan.names`. [unit of the plan]

    Returns
    -------
    array of shape (n, k)
        [unit of the plan]

    Raises
    ------
    RecipeError
        As in `masses_for`.

    References
    ----------
    .. [1] JCGM 100:2008 (GUM), eq. 10, uncorrelated input quantities (from memory).
    """
    table, masses = _weighing(plan), masses_for(plan, amounts)
    weighed = (masses > 0).astype(np.float64)
    if plan.mixture is None:
        per_gram = 1.0 / (table.batch * PER_ML[plain_word(plan.unit)])
        by_volume = amounts * (table.volume_uncertainty / table.batch)
        return np.asarray(np.hypot(per_gram * table.mass_uncertainty * weighed, by_volume))
    share = masses / table.batch
    others = weighed.sum(axis=1, keepdims=True) - weighed
    variance = (1 - share) ** 2 * weighed + share**2 * others
    return np.asarray(plan.mixture.total / table.batch * table.mass_uncertainty * np.sqrt(variance))


def plan_weighings(plan: Plan, standards: FloatArray, validation: FloatArray) -> WeighingPlan:
    """Return what to weigh for standards and validation samples, with warnings and advice.

    Parameters
    ----------
    plan : Plan
        With a [weighing] table.
    standards, validation : array of shape (n, k)
        Concentrations in the order of `plan.names`. [unit of the plan]

    Raises
    ------
    RecipeError
        As in `masses_for`.
    """
    table = _weighing(plan)
    everything = np.concatenate([standards, validation])
    masses, uncertainty = masses_for(plan, everything), concentration_uncertainty(plan, everything)
    components = tuple(
        _summary(name, everything[:, c], masses[:, c], uncertainty[:, c]) for c, name in enumerate(plan.names)
    )
    limit = 100 * table.largest_relative
    poor = [c for c, entry in enumerate(components) if entry.relative is not None and entry.relative > limit]
    balance = None if plan.mixture is None else len(plan.names) - 1
    stocks = advise_stocks(plan, masses, [c for c in poor if c != balance])
    n = len(standards)
    return WeighingPlan(
        batch=f"{table.batch:g} {'mL' if plan.mixture is None else 'g'} of each sample",
        mass_uncertainty=table.mass_uncertainty,
        largest_relative=limit,
        components=components,
        masses=masses[:n],
        uncertainties=uncertainty[:n],
        validation_masses=masses[n:],
        validation_uncertainties=uncertainty[n:],
        stocks=stocks,
        findings=_findings([components[c] for c in poor], limit, stocks),
    )


def _weighing(plan: Plan) -> WeighingTable:
    if plan.weighing is None:
        raise RecipeError("The plan has no [weighing]; expected batch and mass_uncertainty there. Add the table.")
    return plan.weighing


def _summary(name: str, amounts: FloatArray, masses: FloatArray, uncertainty: FloatArray) -> ComponentWeighing:
    there = masses > 0
    return ComponentWeighing(
        component=name,
        smallest=float(masses[there].min()) if there.any() else None,
        largest=float(masses.max()),
        needed=float(masses.sum()),
        uncertainty=float(uncertainty.max()),
        relative=100 * float((uncertainty[there] / amounts[there]).max()) if there.any() else None,
    )


def _findings(poor: Sequence[ComponentWeighing], limit: float, stocks: Sequence[StockAdvice]) -> tuple[str, ...]:
    advice = {stock.component: stock.advice for stock in stocks}
    return tuple(
        f"{entry.component}: weighing {entry.smallest:.3g} g leaves {entry.relative:.2g} % relative standard "
        f"uncertainty, above {limit:g} %. {advice.get(entry.component, 'Make larger samples.')}"
        for entry in poor
    )
