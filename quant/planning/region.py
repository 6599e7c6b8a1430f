"""The space that mixtures may occupy: ranges, levels, a fixed total, linear inequalities."""

import math
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike
from scipy.optimize import Bounds, LinearConstraint, milp

from quant.arrays import FloatArray
from quant.errors import ParameterError
from quant.planning.constraints import Inequality, parse_inequality
from quant.recipe.plan_schema import Plan

TOLERANCE = 1e-9  # of a range: what rounding of numbers may break a limit by
_NO_ROOM = 1e-4  # of a range: less is no room that could be weighed
COVERED = 0.95  # share of a range that mixtures have to reach


@dataclass(frozen=True, eq=False)
class Region:
    """Mixtures u of the varied components, each range scaled to 0 ... 1, with A·u <= b.

    Attributes
    ----------
    names : tuple of str
        The k varied components.
    low, high : array of shape (k,)
        Ranges. [unit]
    levels : tuple of int or None
        Equally spaced values of each component; None: any.
    A, b : arrays of shape (m, k) and (m,)
        Inequalities that the ranges alone do not fulfil. [ranges]
    reasons : tuple of str
        What each inequality is, in words.
    reach : array of shape (2, k)
        Least and greatest value of each component that some mixture has. [ranges]
    """

    names: tuple[str, ...]
    low: FloatArray
    high: FloatArray
    levels: tuple[int | None, ...]
    A: FloatArray
    b: FloatArray
    reasons: tuple[str, ...]
    reach: FloatArray

    @property
    def is_box(self) -> bool:
        """True if any value of one component goes with any value of the others."""
        return self.b.size == 0

    @property
    def span(self) -> FloatArray:
        """Ranges of shape (k,). [unit]"""
        return self.high - self.low

    def amounts(self, points: FloatArray) -> FloatArray:
        """Return concentrations [unit] of scaled points, the ends of each range exact."""
        values = self.low + points * self.span
        return np.where(points == 0, self.low, np.where(points == 1, self.high, values))

    def scaled(self, amounts: ArrayLike) -> FloatArray:
        """Return scaled points of concentrations [unit]."""
        return np.asarray((np.asarray(amounts, dtype=np.float64) - self.low) / self.span)

    def contains(self, points: FloatArray) -> bool:
        """Return whether every one of the points, shape (n, k), is inside, levels apart."""
        inside = (points >= -TOLERANCE).all() and (points <= 1 + TOLERANCE).all()
        return bool(inside and (points @ self.A.T <= self.b + TOLERANCE).all())

    def segment(self, point: FloatArray, c: int) -> tuple[float, float]:
        """Return between which values component `c` may move while the others of a point stay as they are."""
        low, high = 0.0, 1.0
        slope = self.A[:, c]
        room = self.b - self.A @ point + slope * point[c]
        for a, r in zip(slope.tolist(), room.tolist(), strict=True):
            if a > TOLERANCE:
                high = min(high, r / a)
            elif a < -TOLERANCE:
                low = max(low, r / a)
        return low, high

    def segments(self, points: FloatArray, c: int) -> tuple[FloatArray, FloatArray]:
        """Return the same for many points, shape (n, k), as two arrays of shape (n,)."""
        slope = self.A[:, c]
        room = self.b - points @ self.A.T + np.outer(points[:, c], slope)  # (n, m)
        up, down = slope > TOLERANCE, slope < -TOLERANCE
        return (
            (room[:, down] / slope[down]).max(axis=1, initial=0.0),
            (room[:, up] / slope[up]).min(axis=1, initial=1.0),
        )

    def values_between(self, c: int, low: float, high: float, most: int) -> FloatArray:
        """Return up to `most` (or all levels') values of component `c` in a segment, round numbers in the unit."""
        count = self.levels[c]
        if count is not None:
            values = np.arange(count) / (count - 1)
        else:
            step = 10.0 ** -decimals_of(self.span[c])
            ends = self.low[c] + np.array([low, high]) * self.span[c]
            first, last = math.ceil(ends[0] / step - 1e-6), math.floor(ends[1] / step + 1e-6)
            marks = np.unique(np.linspace(first, last, most).round()) if first <= last else np.empty(0)
            values = np.concatenate([[0.0], (marks * step - self.low[c]) / self.span[c], [1.0]])
        values = values[(values >= low - TOLERANCE) & (values <= high + TOLERANCE)]
        return np.unique(np.clip(values, 0.0, 1.0))

    def free_of_levels(self) -> "Region":
        """Return the same space with every component free to take any value."""
        return replace(self, levels=(None,) * len(self.names))


def decimals_of(span: float) -> int:
    """Decimals by which a concentration is written: steps of 1/1000 to 1/10000 of the range.

    >>> decimals_of(2.0), decimals_of(100.0)
    (3, 1)
    """
    return 3 - math.floor(math.log10(span))


def region_of(plan: Plan) -> Region:
    """Return the space of a plan's mixtures, the components in the order of their names.

    Raises
    ------
    ParameterError
        No mixture obeys the ranges, the total and the constraints, they leave no room to vary, or a part of a range
        cannot be reached: the message says which and by how much.
    RecipeError
        A constraint that cannot be read.
    """
    tables = sorted(plan.component, key=lambda table: table.name)
    names = tuple(table.name for table in tables)
    low, high = (np.array([getattr(table, end) for table in tables], dtype=np.float64) for end in ("low", "high"))
    rules = _inequalities(plan, names)
    rows = np.array([[rule.coefficients[name] for name in names] for rule in rules]).reshape(len(rules), len(names))
    bounds = np.array([rule.bound for rule in rules], dtype=np.float64)
    A, b = rows * (high - low), bounds - rows @ low
    size = np.abs(A).max(axis=1, initial=0.0) + (np.abs(A).max(axis=1, initial=0.0) == 0)
    A, b = A / size[:, None], b / size
    binding = np.maximum(A, 0).sum(axis=1) > b + TOLERANCE  # the others hold wherever the ranges do
    region = Region(
        names=names,
        low=low,
        high=high,
        levels=tuple(table.levels for table in tables),
        A=A[binding],
        b=b[binding],
        reasons=tuple(rule.text for rule, kept in zip(rules, binding, strict=True) if kept),
        reach=np.array([np.zeros(len(names)), np.ones(len(names))]),
    )
    return region if region.is_box else _with_reach(region, plan)


def extreme_points(region: Region) -> FloatArray:
    """Mixtures that reach the ends of each component's range, otherwise as far from all limits as can be.

    Returns
    -------
    array of shape (2k, k)
        Scaled points: first the k least, then the k greatest values.
    """
    return np.array([_middle_of_slice(region, c, end) for end in (0, 1) for c in range(len(region.names))])


def _inequalities(plan: Plan, names: tuple[str, ...]) -> list[Inequality]:
    rules = [parse_inequality(text, plan.names) for text in plan.constraints]
    mixture = plan.mixture
    if mixture is None:
        return rules
    told = f"a fixed total of {mixture.total:g} {plan.unit} with {mixture.balance} from {mixture.balance_low:g} to "
    told += f"{mixture.most:g}"
    closed = [  # balance = total − sum of the others
        Inequality(
            rule.text,
            {name: rule.coefficients[name] - rule.coefficients[mixture.balance] for name in names},
            rule.bound - rule.coefficients[mixture.balance] * mixture.total,
        )
        for rule in rules
    ]
    return [
        Inequality(told, dict.fromkeys(names, 1.0), mixture.total - mixture.balance_low),
        Inequality(told, dict.fromkeys(names, -1.0), mixture.most - mixture.total),
        *closed,
    ]


def _with_reach(region: Region, plan: Plan) -> Region:
    ends = np.array(
        [[_optimum(region, c, sign) for c in range(len(region.names))] for sign in (1.0, -1.0)]
    )  # least, greatest; NaN if there is no mixture at all
    limits = "; ".join(dict.fromkeys(region.reasons))
    if np.isnan(ends).any():
        lowest = ", ".join(f"{name} {low:g}" for name, low in zip(region.names, region.low, strict=True))
        raise ParameterError(
            f"No mixture obeys everything asked for: {limits}; with ranges that begin at {lowest} (sum "
            f"{region.low.sum():g}) and end at a sum of {region.high.sum():g} {plan.unit}. Expected at least one "
            "mixture; widen a range, or change the total or a constraint."
        )
    short = np.flatnonzero((ends[0] > 1 - COVERED) | (ends[1] < COVERED))
    if short.size:
        found = "; ".join(
            f"{region.names[c]} {region.low[c]:g} to {region.high[c]:g}: only "
            f"{region.low[c] + ends[0, c] * region.span[c]:.4g} to "
            f"{region.low[c] + ends[1, c] * region.span[c]:.4g} {plan.unit} can be reached"
            for c in short
        )
        raise ParameterError(
            f"Ranges that the mixtures cannot span: {found}. Limits in force: {limits}. Expected mixtures that reach "
            "both ends of every range within 5 % of it; narrow those ranges, or lower the low ends of the others."
        )
    if _largest_ball(region) < _NO_ROOM:
        raise ParameterError(
            f"The limits leave the components no room to vary apart: {limits}. Together they fix one component when "
            "the others are known. Expected inequalities with room between them; take one away, or plan that component "
            "as the balance."
        )
    return replace(region, reach=ends)


def _largest_ball(region: Region) -> float:
    """Radius of the largest ball inside the inequalities, levels apart. [ranges]"""
    k = len(region.names)
    cost = np.zeros(k + 1)
    cost[k] = -1.0
    rows = np.column_stack([region.A, np.linalg.norm(region.A, axis=1)])
    found = _solve(region.free_of_levels(), cost, rows, np.zeros(k + 1), np.ones(k + 1))
    return 0.0 if found is None else float(found[k])


def _optimum(region: Region, c: int, sign: float) -> float:
    """Least (sign 1) or greatest (sign −1) value of component c, NaN if there is no mixture."""
    cost = np.zeros(len(region.names))
    cost[c] = sign
    found = _solve(region, cost, region.A, np.zeros(cost.size), np.ones(cost.size))
    return math.nan if found is None else float(found[c])


def _middle_of_slice(region: Region, c: int, end: int) -> FloatArray:
    """Return the point at one end of component c that is farthest from the inequalities (centre of a ball)."""
    k = len(region.names)
    others = np.delete(np.arange(k), c)
    norms = np.linalg.norm(region.A[:, others], axis=1)
    low, high = np.zeros(k + 1), np.ones(k + 1)
    low[c] = high[c] = region.reach[end, c]
    high[k] = 0.5  # the ball's radius, last variable
    rows = np.column_stack([region.A, norms])
    cost = np.zeros(k + 1)
    cost[k] = -1.0
    found = _solve(region, cost, rows, low, high)
    if found is None:  # only by rounding of the end itself
        raise ParameterError(
            f"No mixture found at the end of {region.names[c]}; expected one. Widen a range or a constraint slightly."
        )
    return np.clip(found[:k], 0.0, 1.0)


def _solve(region: Region, cost: FloatArray, rows: FloatArray, low: FloatArray, high: FloatArray) -> FloatArray | None:
    """Solve a mixed-integer linear programme: levels are whole numbers of steps."""
    steps = np.ones(cost.size)
    steps[: len(region.names)] = [1 if count is None else count - 1 for count in region.levels]
    whole = np.zeros(cost.size, dtype=np.int64)
    whole[: len(region.names)] = [count is not None for count in region.levels]
    limits = LinearConstraint(rows / steps, -np.inf, region.b + TOLERANCE / 10)
    found = milp(cost / steps, integrality=whole, bounds=Bounds(low * steps, high * steps), constraints=limits)
    if found.x is None:
        return None
    solution = np.where(whole == 1, np.round(found.x), found.x) / steps
    return np.asarray(solution, dtype=np.float64)
