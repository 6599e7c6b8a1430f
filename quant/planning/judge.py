"""What a design of standards is worth: correlations, condition, coverage, gaps, counts, space filling."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, name_some
from quant.errors import NotEnoughDataError, ParameterError
from quant.planning.criterion import correlations, squared_distances
from quant.planning.judgement import ComponentSpread, Correlation, DesignJudgement

LARGE_CORRELATION = 0.1  # between components that need not be correlated
LARGE_CONDITION = 30.0  # of standardised concentrations; the usual mark of collinearity (from memory: Belsley 1980)
WIDE_GAP = 30.0  # % of a range; five levels leave 25
_PROBES = 4000  # random mixtures from which the largest hole is found
_SAME = 1e-9  # of a range


def judge_design(
    amounts: ArrayLike,
    names: Sequence[str],
    *,
    ranges: ArrayLike | None = None,
    balance: str | None = None,
    unit: str = "",
    possible: ArrayLike | None = None,
    seed: int = 1,
) -> DesignJudgement:
    """Judge the concentrations of standards, planned or already prepared.

    Parameters
    ----------
    amounts : array of shape (n, k)
        Concentrations, one row a standard. [unit]
    names : sequence of str
        The k components.
    ranges : array of shape (2, k), optional
        Low and high ends that the standards should span; the lowest and highest values if not given. [unit]
    balance : str, optional
        The component that makes up a fixed total. Found out if all rows add up to the same: then it is the one that
        varies most.
    unit : str, optional
        As printed.
    possible : array of shape (m, k), optional
        Mixtures that could be asked for, in which holes are looked for; random ones in the ranges if not given. [unit]
    seed : int, optional
        Of random mixtures.

    Raises
    ------
    NotEnoughDataError
        Fewer than three standards, or a component that does not vary.
    ParameterError
        Columns and names differ in number, or the balance is not among the names.
    """
    table = as_matrix("The concentrations", amounts)
    _check_table(table, names, balance)
    ends = np.array([table.min(axis=0), table.max(axis=0)]) if ranges is None else np.asarray(ranges, dtype=np.float64)
    total = _fixed_total(table)
    if balance is None and total is not None:
        balance = names[int(np.argmax(table.std(axis=0)))]
    varied = [c for c, name in enumerate(names) if name != balance]
    order = varied + [c for c, name in enumerate(names) if name == balance]
    scaled = (table - ends[0]) / (ends[1] - ends[0])
    if possible is None:
        probes = np.random.default_rng(seed).random((_PROBES, len(varied)))
    else:
        probes = ((np.asarray(possible, dtype=np.float64) - ends[0]) / (ends[1] - ends[0]))[:, varied]
    inflations, condition = _collinearity(scaled[:, varied])
    spreads = tuple(
        _spread(names[c], table[:, c], ends[:, c], inflations[varied.index(c)] if c in varied else None) for c in order
    )
    pairs = _pairs(table, names, order, balance)
    among = [abs(pair.r) for pair in pairs if pair.unavoidable is None]
    holes = [_largest_hole(probes, points) for points in (scaled[:, varied], probes[: len(table)])]
    apart = squared_distances(scaled[:, varied], scaled[:, varied])
    np.fill_diagonal(apart, np.inf)
    factors = len(varied)
    return DesignJudgement(
        n_standards=len(table),
        unit=unit,
        balance=balance,
        total=total if balance is not None else None,
        components=spreads,
        correlations=pairs,
        largest_correlation=max(among, default=None),
        condition=condition,
        nearest=float(np.sqrt(apart.min())),
        largest_hole=holes[0],
        random_hole=holes[1],
        factors=factors,
        e1655_standards=max(24, 6 * (factors + 1)),
        e1655_validation=max(20, 4 * factors),
        findings=_findings(len(table), factors, spreads, pairs, condition, apart),
    )


def _check_table(table: FloatArray, names: Sequence[str], balance: str | None) -> None:
    if table.shape[1] != len(names):
        raise ParameterError(
            f"{table.shape[1]} columns of concentrations for {len(names)} components; expected one each."
        )
    if len(table) < 3:
        raise NotEnoughDataError(f"{len(table)} standard(s); at least 3 are needed to judge a design.")
    if balance is not None and balance not in names:
        raise ParameterError(f"balance = {balance!r}; expected one of the components {', '.join(names)}.")
    size = np.abs(table).max(axis=0)
    still = [
        name for name, width, most in zip(names, np.ptp(table, axis=0), size, strict=True) if width <= _SAME * most
    ]
    if still:
        raise NotEnoughDataError(
            f"{name_some(still)} has the same value in all standards; expected it to vary. Leave the column out if it "
            "is meant to be constant."
        )


def _fixed_total(table: FloatArray) -> float | None:
    """Return what the rows add up to, if all add up to the same within a millionth."""
    sums = table.sum(axis=1)
    same = table.shape[1] > 1 and np.ptp(sums) <= 1e-6 * abs(sums.mean())
    return float(sums.mean()) if same else None


def _collinearity(scaled: FloatArray) -> tuple[list[float | None], float | None]:
    """Return the variance inflation of each column, and the condition number of the standardised columns."""
    r = correlations(scaled)
    values = np.linalg.eigvalsh(r)
    if values[0] <= 1e-12 * values[-1]:
        return [None] * len(r), None
    return [float(v) for v in np.diag(np.linalg.inv(r))], float(np.sqrt(values[-1] / values[0]))


def _spread(name: str, values: FloatArray, ends: FloatArray, inflation: float | None) -> ComponentSpread:
    width = float(ends[1] - ends[0])
    inside = np.unique(np.clip(values, *ends))
    gaps = np.diff(np.concatenate([ends[:1], inside, ends[1:]]))
    return ComponentSpread(
        component=name,
        lowest=float(values.min()),
        highest=float(values.max()),
        coverage=100 * float(np.ptp(inside)) / width,
        values=int((np.diff(np.sort(values)) > _SAME * width).sum()) + 1,
        largest_gap=100 * float(gaps.max()) / width,
        inflation=inflation,
    )


def _pairs(table: FloatArray, names: Sequence[str], order: list[int], balance: str | None) -> tuple[Correlation, ...]:
    r, spread = correlations(table), table.std(axis=0)
    together = np.sqrt(sum(spread[c] ** 2 for c in order if names[c] != balance))
    found = [
        Correlation(
            components=(names[a], names[b]),
            r=float(r[a, b]),
            # balance = total − sum of the others, hence cov(balance, a) = −var(a) if these are uncorrelated
            unavoidable=-float(spread[a] / together) if names[b] == balance else None,
        )
        for place, a in enumerate(order)
        for b in order[place + 1 :]
    ]
    return tuple(sorted(found, key=lambda pair: (pair.unavoidable is not None, -abs(pair.r))))


def _largest_hole(probes: FloatArray, points: FloatArray) -> float:
    nearest = np.full(len(probes), np.inf)
    for point in points:
        nearest = np.minimum(nearest, ((probes - point) ** 2).sum(axis=1))
    return float(np.sqrt(nearest.max()))


def _findings(
    n: int,
    factors: int,
    spreads: Sequence[ComponentSpread],
    pairs: Sequence[Correlation],
    condition: float | None,
    apart: FloatArray,
) -> tuple[str, ...]:
    found = []
    if condition is None:
        found.append(
            "The components are linearly dependent: one could be predicted through the others. Vary them apart."
        )
    elif condition > LARGE_CONDITION:
        found.append(f"Condition number {condition:.3g}, above {LARGE_CONDITION:g}: the components hardly vary apart.")
    large = [pair for pair in pairs if pair.unavoidable is None and abs(pair.r) > LARGE_CORRELATION]
    if large:
        named = name_some(f"{' and '.join(pair.components)} (r = {pair.r:+.2f})" for pair in large)
        found.append(f"Components that vary together, |r| above {LARGE_CORRELATION:g}: {named}.")
    needed = max(24, 6 * (factors + 1))
    if n < needed:
        found.append(
            f"{n} standards; ASTM E1655 asks for {needed} (the greater of 24 and 6·({factors} factors + 1), from "
            "memory)."
        )
    narrow = [spread for spread in spreads if spread.coverage < 95]
    if narrow:
        named = name_some(f"{spread.component} ({spread.coverage:.0f} %)" for spread in narrow)
        found.append(f"Ranges not spanned to 95 %: {named}.")
    wide = [s for s in spreads if s.largest_gap > WIDE_GAP]
    if wide:
        named = name_some(f"{spread.component} ({spread.largest_gap:.0f} % of the range)" for spread in wide)
        found.append(f"Gaps without a standard, where a bend would not be seen: {named}.")
    twins = int((np.triu(apart < _SAME, 1)).sum())
    if twins:
        found.append(f"{twins} pair(s) of standards have the same composition.")
    return tuple(found)
