"""What the uncertainty of a prediction is made of, and the intervals beside the one by Student's t."""

import math
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.model.calibration import Calibration
from quant.regression.band_area import BandArea
from quant.statistics.intervals import NOT_RESOLVABLE, true_value_share

NOT_STATED = "no laboratory error stated"
NO_LEFT_OUT_MODELS = "the model holds no left-out models"


@dataclass(frozen=True, kw_only=True)
class ErrorShares:
    """Parts of the standard error against a new reference result, as standard errors; their squares add up.

    None where a part is not known. [unit of the analyte]
    """

    presentation: float | None
    calibration: float
    laboratory: float | None
    unexplained: float | None


@dataclass(frozen=True, kw_only=True)
class FreeInterval:
    """Distribution-free intervals of one sample, of constant width and scaled by level; None where there are none."""

    low: float | None
    high: float | None
    scaled_low: float | None
    scaled_high: float | None
    note: str


def fewer_replicates(model: Calibration, count: IntArray) -> FloatArray:
    """Variance to add where a sample has fewer spectra than the calibration's samples had. [(unit of the analyte)²]"""
    known = model.uncertainty
    if known.replicate_sd is None:
        return np.zeros(count.size)
    return known.replicate_sd**2 * np.maximum(1 / count - 1 / known.replicates, 0.0)


def true_value_interval(
    model: Calibration, value: float, error: float, low: float, high: float
) -> tuple[float, float] | str:
    """Return the 95 % interval of the true value, or why there is none.

    The base variance is s0², for band area the squared standard error; see `quant.statistics.intervals`.
    """
    share = _true_share(model, error)
    if isinstance(share, str):
        return share
    return value - (value - low) * share, value + (high - value) * share


def standard_uncertainty(model: Calibration, error: float) -> float:
    """Return what decisions count with: the standard error against the true value, if it can be told.

    Else it is that against a new reference result, which holds the laboratory's error, too, and is larger.

    Parameters
    ----------
    model : Calibration
    error : float
        Standard error against a new reference result. [unit of the analyte]
    """
    share = _true_share(model, error)
    return error * share if isinstance(share, float) else error


def error_parts(model: Calibration, error: float, leverage: float, count: int) -> ErrorShares:
    """Split a standard error: var = presentation + calibration + laboratory + unexplained.

    Parameters
    ----------
    model : Calibration
    error : float
        Standard error against a new reference result. [unit of the analyte]
    leverage : float
        1/n included.
    count : int
        Spectra averaged; more than the calibration's samples had promise no more.
    """
    known = model.uncertainty
    laboratory, presentation = known.laboratory_error, None
    if known.replicate_sd is not None:
        presentation = known.replicate_sd / math.sqrt(min(float(count), known.replicates))
    extra = float(fewer_replicates(model, np.array([count]))[0])
    calibration = (error**2 - extra) * leverage / (1 + leverage)  # s0²·h
    rest = error**2 - calibration - (presentation or 0.0) ** 2 - (laboratory or 0.0) ** 2
    return ErrorShares(
        presentation=presentation,
        calibration=math.sqrt(max(calibration, 0.0)),
        laboratory=laboratory,
        unexplained=math.sqrt(rest) if rest >= 0 else None,
    )


def free_intervals(model: Calibration, mean: FloatArray, value: FloatArray) -> list[FreeInterval]:
    """Return the distribution-free intervals of samples, one entry a sample.

    Parameters
    ----------
    model : Calibration
    mean : array of shape (n_samples, n_points_after)
        Processed spectra, one a sample.
    value : array of shape (n_samples,)
        Predictions. [unit of the analyte]
    """
    if model.left_out is None:
        note = model.left_out_note or NO_LEFT_OUT_MODELS
        return [FreeInterval(low=None, high=None, scaled_low=None, scaled_high=None, note=note)] * value.size
    plain = model.left_out.intervals(model.method, mean, value)
    scaled = model.left_out.intervals(model.method, mean, value, scaled=True)
    ends = zip(plain.low, plain.high, scaled.low, scaled.high, strict=True)
    return [
        FreeInterval(
            low=_bound(low),
            high=_bound(high),
            scaled_low=_bound(scaled_low),
            scaled_high=_bound(scaled_high),
            note=model.left_out.note,
        )
        for low, high, scaled_low, scaled_high in ends
    ]


def _bound(end: float) -> float | None:
    return float(end) if math.isfinite(end) else None


def _true_share(model: Calibration, error: float) -> float | str:
    """Share of the standard error that is left against the true value, or why there is none."""
    laboratory = model.uncertainty.laboratory_error
    if laboratory is None:
        return NOT_STATED
    base = error if isinstance(model.method, BandArea) else model.uncertainty.s0
    share = true_value_share(error, base, laboratory)
    return NOT_RESOLVABLE if share is None else share
