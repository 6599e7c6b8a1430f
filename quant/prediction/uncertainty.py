"""What the uncertainty of a prediction is made of, and the intervals beside the one by Student's t."""

import math
from typing import Any

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.model.calibration import Calibration
from quant.regression.method import LineMethod
from quant.statistics.intervals import NOT_RESOLVABLE, true_value_share

NOT_STATED = "no laboratory error stated"
NO_LEFT_OUT_MODELS = "the model holds no left-out models"


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


def error_parts(model: Calibration, error: float, leverage: float, count: int) -> dict[str, Any]:
    """Split a standard error: var = presentation + calibration + laboratory + unexplained.

    The parts come by the names of the fields of `Prediction`, None where one is not known. [unit of the analyte]

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
    return {
        "part_presentation": presentation,
        "part_calibration": math.sqrt(max(calibration, 0.0)),
        "part_laboratory": laboratory,
        "part_unexplained": math.sqrt(rest) if rest >= 0 else None,
    }


def free_intervals(model: Calibration, mean: FloatArray, value: FloatArray) -> list[dict[str, Any]]:
    """Return the distribution-free intervals, one entry a sample, by the names of the fields of `Prediction`.

    Parameters
    ----------
    model : Calibration
    mean : array of shape (n_samples, n_points_after)
        Processed spectra, one a sample.
    value : array of shape (n_samples,)
        Predictions. [unit of the analyte]
    """
    ends: list[tuple[float | None, ...]]
    if model.left_out is None:
        ends, note = [(None,) * 4] * value.size, model.left_out_note or NO_LEFT_OUT_MODELS
    else:
        plain = model.left_out.intervals(model.method, mean, value)
        scaled = model.left_out.intervals(model.method, mean, value, scaled=True)
        bounds = np.array([*plain, *scaled]).T.tolist()
        ends, note = [tuple(map(_bound, row)) for row in bounds], model.left_out.note
    names = ("free_low", "free_high", "scaled_low", "scaled_high")
    return [{**dict(zip(names, row, strict=True)), "free_note": note} for row in ends]


def _bound(end: float) -> float | None:
    return end if math.isfinite(end) else None


def _true_share(model: Calibration, error: float) -> float | str:
    """Share of the standard error that is left against the true value, or why there is none."""
    laboratory = model.uncertainty.laboratory_error
    if laboratory is None:
        return NOT_STATED
    base = error if isinstance(model.method, LineMethod) else model.uncertainty.s0
    share = true_value_share(error, base, laboratory)
    return NOT_RESOLVABLE if share is None else share
