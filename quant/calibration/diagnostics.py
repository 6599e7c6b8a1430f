"""Diagnostics of one calibration: which samples stand out, what the model looks at, whether errors behave.

Samples that stand out are named, never removed.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import TypeVar

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.evidence import Evidence
from quant.calibration.left_out_models import regression_vectors
from quant.calibration.trends import Trend, find_trends
from quant.calibration.validate import ValidationResult
from quant.errors import QuantError
from quant.regression.band_area import BandArea
from quant.regression.pls import PLS
from quant.result import Result, documented
from quant.statistics.hotelling import (
    leverage_flag,
    t_squared_from_leverage,
    t_squared_limit_calibration,
    t_squared_limit_new,
)
from quant.statistics.influence import bonferroni_limit, cooks_distance, studentised_residuals
from quant.statistics.joint_ellipse import JointTest, joint_test
from quant.statistics.linearity import LackOfFitTest, MandelTest, lack_of_fit_test, mandel_test
from quant.statistics.nearest_neighbour import whitened_scores
from quant.statistics.normality import Normality, normality
from quant.statistics.residual_limits import chi_square_by_moments

PROBABILITY = 0.99  # of the limits beyond which a calibration sample is named
COOK = 1.0  # rule of thumb: beyond it a sample pulls hard

T = TypeVar("T")


@dataclass(frozen=True, kw_only=True)
class Outstanding(Result):
    """A calibration sample to look at; it stays in the calibration unless the recipe excludes it with a reason."""

    sample: str = documented("Sample ID")
    reasons: tuple[str, ...] = documented("In what it stands out")


@dataclass(frozen=True, kw_only=True, eq=False)
class DiagnosticsResult(Result):
    """Diagnostics of a calibration, one entry a calibration sample where not said otherwise."""

    t_squared: FloatArray = documented("Hotelling's T²")
    t_squared_limit: float | None = documented("Limit of T² for calibration samples, 99 %")
    t_squared_limit_new: float | None = documented("Limit of T² for new samples, 99 %")
    leverage: FloatArray = documented("Leverages, 1/n included")
    leverage_flag: float = documented("Three times the mean leverage: beyond it ASTM E1655 asks for a look")
    residual: FloatArray = documented("Q, sum of squares of the residual spectrum, left out of the fit")
    residual_limit: float | None = documented("Limit of Q from left-out samples, 99 %")
    nearest: FloatArray | None = documented("Squared distance of each sample's scores to its nearest neighbour's")
    gap_limit: float | None = documented("Largest of them: a new sample farther from every standard is in a gap")
    studentised: FloatArray | None = documented("Externally studentised errors of the fit")
    studentised_limit: float | None = documented("Limit that all good samples respect with 99 % (Bonferroni)")
    influence: FloatArray | None = documented("Cook's distance; above 1 a sample pulls hard")
    vip: FloatArray | None = documented("PLS: variable importance in projection, one a point of the processed axis")
    selectivity_ratio: FloatArray | None = documented(
        "Explained over residual variance of each point after projection on the regression vector"
    )
    vector_error: FloatArray | None = documented(
        "Standard error of the regression vector by the jackknife over folds", "unit of the analyte / ordinate"
    )
    trends: tuple[Trend, ...] = documented("Errors of left-out samples against value, order and notes")
    normality: Normality | None = documented("Shape of the errors of left-out samples, or none")
    mandel: MandelTest | None = documented("Band area: is the calibration line curved?")
    lack_of_fit: LackOfFitTest | None = documented("Band area with repeated levels: does the line fit?")
    joint: JointTest | None = documented("Slope 1 and intercept 0 together, left-out samples")
    joint_validation: JointTest | None = documented("The same, validation samples")
    outstanding: tuple[Outstanding, ...] = documented("Calibration samples to look at; none is removed")


def diagnose(evidence: Evidence, validated: ValidationResult | None) -> DiagnosticsResult:
    """Diagnose one calibration.

    Parameters
    ----------
    evidence : Evidence
    validated : ValidationResult or None
    """
    e, n = evidence, len(evidence.training)
    factors = max(e.n_terms - 1, 1)
    errors = e.left_out - e.values
    studentised = _if_possible(lambda: studentised_residuals(e.weighted_errors, e.leverage, e.n_terms)[1])
    nearest = _if_possible(lambda: _own_neighbours(e.scores))
    mandel, lack = _of_the_line(e)
    found = DiagnosticsResult(
        t_squared=t_squared_from_leverage(e.leverage, n),
        t_squared_limit=_if_possible(lambda: t_squared_limit_calibration(n, factors, PROBABILITY)),
        t_squared_limit_new=_if_possible(lambda: t_squared_limit_new(n, factors, PROBABILITY)),
        leverage=e.leverage,
        leverage_flag=leverage_flag(n, factors, mean_centred=e.n_terms > 1),
        residual=e.crossed.at(e.model.factors)[2].mean(axis=0),
        residual_limit=_if_possible(
            lambda: chi_square_by_moments(e.crossed.at(e.model.factors)[2].mean(axis=0), PROBABILITY)
        ),
        nearest=nearest,
        gap_limit=None if nearest is None else float(nearest.max()),
        studentised=studentised,
        studentised_limit=_if_possible(lambda: bonferroni_limit(n, e.n_terms, PROBABILITY)),
        influence=_if_possible(lambda: cooks_distance(e.weighted_errors, e.leverage, e.n_terms)),
        vip=_vip(e.model.method) if isinstance(e.model.method, PLS) else None,
        selectivity_ratio=None if e.vector is None else _selectivity_ratio(e.mean, e.vector),
        vector_error=_vector_error(e),
        trends=find_trends(errors, e.left_out, e.training.notes, _columns(e)),
        normality=_if_possible(lambda: normality(errors)),
        mandel=mandel,
        lack_of_fit=lack,
        joint=_joint(e, e.left_out, e.values),
        joint_validation=None if validated is None else _joint(e, validated.predicted, validated.reference),
        outstanding=(),
    )
    return _with_names(found, e.training.sample_ids)


def _with_names(found: DiagnosticsResult, samples: tuple[str, ...]) -> DiagnosticsResult:
    looks = (
        ("T²", found.t_squared, found.t_squared_limit),
        ("leverage", found.leverage, found.leverage_flag),
        ("left-out residual spectrum", found.residual, found.residual_limit),
        (
            "studentised error",
            None if found.studentised is None else np.abs(found.studentised),
            found.studentised_limit,
        ),
        ("Cook's distance", found.influence, COOK),
    )
    named = []
    for i, sample in enumerate(samples):
        reasons = tuple(
            f"{name} {values[i]:.3g}, limit {limit:.3g}"
            for name, values, limit in looks
            if values is not None and limit is not None and values[i] > limit
        )
        if reasons:
            named.append(Outstanding(sample=sample, reasons=reasons))
    return replace(found, outstanding=tuple(named))


def _columns(e: Evidence) -> list[str]:
    """Columns of the analytes, which the reference table may hand on as notes."""
    return [name for table in e.recipe.analyte for name in (table.name, table.column) if name]


def _own_neighbours(scores: FloatArray) -> FloatArray:
    """Squared Mahalanobis distance of each sample to the nearest other one (ASTM E1655, from memory)."""
    turned = whitened_scores(scores, scores)
    squares = np.sum((turned[:, None, :] - turned[None, :, :]) ** 2, axis=2)
    np.fill_diagonal(squares, np.inf)
    return np.asarray(squares.min(axis=1))


def _of_the_line(e: Evidence) -> tuple[MandelTest | None, LackOfFitTest | None]:
    if not isinstance(e.model.method, BandArea):
        return None, None
    signals = e.model.method.signals(e.mean)
    return (
        _if_possible(lambda: mandel_test(e.values, signals)),
        _if_possible(lambda: lack_of_fit_test(e.values, signals)) if e.model.method.curve_ is None else None,
    )


def _joint(e: Evidence, predicted: FloatArray, reference: FloatArray) -> JointTest | None:
    """Reference on predicted for PLS and PCR, predicted on reference for classical calibrations."""
    if e.classical:
        return _if_possible(lambda: joint_test(reference, predicted))
    return _if_possible(lambda: joint_test(predicted, reference))


def _vip(method: PLS) -> FloatArray | None:
    """VIP_j = sqrt(k·sum(w_ja²·q_a²)/sum(q_a²)), weights of unit length (Wold et al. 1993, from memory)."""
    explained = method.y_loadings_**2  # scores have unit length: q² is the sum of squares a factor explains
    if not explained.any():
        return None
    weights = method.weights_ / np.linalg.norm(method.weights_, axis=0)
    return np.asarray(np.sqrt(len(weights) * (weights**2 @ explained) / explained.sum()))


def _selectivity_ratio(mean: FloatArray, vector: FloatArray) -> FloatArray:
    """Explained over residual variance after target projection (Kvalheim 2010, from memory); NaN at constant points."""
    centred = mean - mean.mean(axis=0)
    scores = centred @ vector
    explained = np.outer(scores, scores @ centred / float(scores @ scores))
    rest = np.sum((centred - explained) ** 2, axis=0)
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(np.sum(explained**2, axis=0) / rest)


def _vector_error(e: Evidence) -> FloatArray | None:
    """Jackknife: (M - 1)/M times the sum of squared differences to the whole (Martens & Martens 2000, from memory)."""
    if e.vector is None:
        return None
    each = regression_vectors(e.model.left_out, e.vector)
    if each is None:
        return None
    m = len(each)
    return np.asarray(np.sqrt((m - 1) / m * np.sum((each - e.vector) ** 2, axis=0)))


def _if_possible(compute: Callable[[], T]) -> T | None:
    try:
        return compute()
    except QuantError:  # too few samples, or values that do not differ
        return None
