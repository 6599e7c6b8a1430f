"""Which part of the error dominates, and which next experiment helps most, in expected RMSEP.

The expected squared error of a new sample against its true value is taken as

    V = p/m + q + h·(p/m + q + l/r),    h = 1/n + (A/n)/w²,

with p the variance of one spectrum's presentation, m replicates, q the unexplained variance, l the variance of one
laboratory value, r laboratory values averaged for each standard, n standards, A factors, and w how many times as wide
as the samples' range the standards' is. h is the mean leverage of samples that spread as standards with w = 1 do.
RMSEP = sqrt(V). The kind of model is held fixed: a wider range may bend, or need more factors; no formula foresees it.
"""

import math
from dataclasses import dataclass, replace

from quant.errors import NotEnoughDataError, ParameterError
from quant.result import Result, documented
from quant.text_table import Row, format_rows


@dataclass(frozen=True, kw_only=True)
class Situation:
    """What the expected error depends on.

    Attributes
    ----------
    presentation, unexplained, laboratory : float
        p, q and l: variances of one spectrum, of what is unexplained, of one laboratory value; 0 or more.
        [unit of the analyte, squared]
    n_standards, n_factors : int
        n and A.
    replicates, laboratory_values : float
        m and r: spectra averaged a sample, laboratory values averaged a standard; 1 or more.
    relative_range : float
        w: range of the standards over that of the samples, above 0.
    """

    presentation: float
    unexplained: float
    laboratory: float
    n_standards: float
    n_factors: int
    replicates: float = 1.0
    laboratory_values: float = 1.0
    relative_range: float = 1.0


@dataclass(frozen=True, kw_only=True)
class Improvement(Result):
    """One way to a smaller error."""

    name: str = documented("What is done")
    rmsep: float = documented("Expected RMSEP after doubling it", "unit of the analyte")
    elasticity: float = documented("Relative change of RMSEP with a relative change of it: d ln RMSEP / d ln")


@dataclass(frozen=True, kw_only=True)
class ErrorBudget(Result):
    """Expected error, its parts, and what would make it smaller."""

    rmsep: float = documented("Expected RMSEP against true values", "unit of the analyte")
    shares: dict[str, float] = documented("Share of each part in the expected squared error; they add up to 1")
    dominant: str = documented("The part with the largest share")
    steps: tuple[Improvement, ...] = documented("Ways to a smaller error, each doubled alone, the most helpful first")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("expected RMSEP", self.rmsep, ""),
            *((f"share of {name}", share, "") for name, share in self.shares.items()),
            *((f"RMSEP with {step.name}", step.rmsep, "") for step in self.steps),
        ]

    def __str__(self) -> str:
        return f"Error budget\n{format_rows(self.rows())}"


def expected_rmsep(situation: Situation) -> float:
    """Expected RMSEP against true values, sqrt(V) of the formula at the top. [unit of the analyte]

    Raises
    ------
    ParameterError
        Negative variances, fewer than one standard, replicate or laboratory value, or a range not above zero.
    """
    return math.sqrt(sum(_parts(situation).values()))


def error_budget(situation: Situation) -> ErrorBudget:
    """Split the expected squared error, and rank what would make it smaller.

    Elasticities, with R = RMSEP and s² = p/m + q + l/r: laboratory values -h·(l/r)/(2·V); replicates
    -(1 + h)·(p/m)/(2·V); standards -h·s²/(2·V); range -(A/(n·w²))·s²/V.

    Parameters
    ----------
    situation : Situation
        What the expected error depends on.

    Raises
    ------
    ParameterError
        Negative variances, fewer than one standard, replicate or laboratory value, or a range not above zero.
    NotEnoughDataError
        All variances are zero: there is no error to split.
    """
    parts = _parts(situation)
    total = sum(parts.values())
    if total == 0:
        raise NotEnoughDataError("all variances are zero; there is no error to split.")
    s, h = situation, _mean_leverage(situation)
    presentation, laboratory = s.presentation / s.replicates, s.laboratory / s.laboratory_values
    base = presentation + s.unexplained + laboratory
    ways = {
        "twice the laboratory values a standard": ("laboratory_values", -h * laboratory / (2 * total)),
        "twice the replicates": ("replicates", -(1 + h) * presentation / (2 * total)),
        "twice the standards": ("n_standards", -h * base / (2 * total)),
        "standards over twice the range": (
            "relative_range",
            -s.n_factors / (s.n_standards * s.relative_range**2) * base / total,
        ),
    }
    steps = [
        Improvement(
            name=name, rmsep=expected_rmsep(replace(s, **{field: 2 * getattr(s, field)})), elasticity=elasticity
        )
        for name, (field, elasticity) in ways.items()
    ]
    return ErrorBudget(
        rmsep=math.sqrt(total),
        shares={name: part / total for name, part in parts.items()},
        dominant=max(parts, key=lambda name: parts[name]),
        steps=tuple(sorted(steps, key=lambda step: step.rmsep)),
    )


def _parts(s: Situation) -> dict[str, float]:
    _check(s)
    h = _mean_leverage(s)
    presentation = s.presentation / s.replicates
    return {
        "presentation": presentation,
        "unexplained": s.unexplained,
        "calibration, from laboratory values": h * s.laboratory / s.laboratory_values,
        "calibration, from spectra and unexplained": h * (presentation + s.unexplained),
    }


def _mean_leverage(s: Situation) -> float:
    return (1 + s.n_factors / s.relative_range**2) / s.n_standards


def _check(s: Situation) -> None:
    variances = (s.presentation, s.unexplained, s.laboratory)
    counts = (s.n_standards, s.replicates, s.laboratory_values)
    if not all(math.isfinite(v) and v >= 0 for v in variances):
        raise ParameterError(f"variances {variances}; expected finite numbers, 0 or more.")
    if not (all(c >= 1 for c in counts) and s.n_factors >= 0 and s.relative_range > 0):
        raise ParameterError(
            f"{s.n_standards} standards, {s.replicates} replicates, {s.laboratory_values} laboratory values, "
            f"{s.n_factors} factors, relative range {s.relative_range}; expected 1 or more, and a range above 0."
        )
