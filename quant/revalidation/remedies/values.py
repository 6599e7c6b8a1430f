"""Corrections of the predicted value: a bias, or slope and bias."""

from dataclasses import replace

import numpy as np

from quant.arrays import IntArray
from quant.errors import NotEnoughDataError, ParameterError
from quant.model.calibration import Calibration
from quant.regression.factor_regression import FactorRegression
from quant.regression.method import Method
from quant.revalidation.standards import Standards


def correct_bias(standards: Standards, rows: IntArray) -> Calibration:
    """Return the model with the mean difference of some standards taken off.

    Parameters
    ----------
    standards : Standards
    rows : array of int
        The standards that the remedy may see.
    """
    return with_line(standards.model, _target_mean(standards, rows) - float(standards.after.value[rows].mean()), 1.0)


def correct_slope_and_bias(standards: Standards, rows: IntArray) -> Calibration:
    """Return the model with its values put on the line of target on prediction of some standards.

    Parameters
    ----------
    standards : Standards
    rows : array of int
        The standards that the remedy may see, two levels at least.

    Raises
    ------
    NotEnoughDataError
        All predictions are the same.

    References
    ----------
    .. [1] E. Bouveresse et al., Anal. Chem. 68 (1996) 982; from memory.
    """
    x, y = standards.after.value[rows], standards.target[rows]
    centred = x - x.mean()
    if not np.any(centred):
        raise NotEnoughDataError("all standards have one level; a slope needs two or more.")
    slope = float(centred @ (y - y.mean()) / (centred @ centred))
    return with_line(standards.model, float(y.mean()) - slope * float(x.mean()), slope)


def with_line(model: Calibration, intercept: float, slope: float) -> Calibration:
    """Return a model that predicts intercept + slope·ŷ where this one predicts ŷ.

    Parameters
    ----------
    model : Calibration
    intercept : float
        [unit of the analyte]
    slope : float
    """
    return replace(model, method=_moved(model.method, intercept, slope))


def _moved(method: Method, intercept: float, slope: float) -> Method:
    """The regression with its response moved; scores, leverages and residuals stay as they are."""
    if not isinstance(method, FactorRegression):
        raise ParameterError(f"{type(method).__name__} carries no correction of its values; correct the spectra.")
    moved = type(method)(**method.get_params())
    moved.__dict__.update(method.__dict__)
    moved.y_mean_ = intercept + slope * method.y_mean_
    moved.y_loadings_ = slope * method.y_loadings_
    moved.coefficients_ = slope * method.coefficients_
    moved.intercepts_ = intercept + slope * method.intercepts_
    return moved


def _target_mean(standards: Standards, rows: IntArray) -> float:
    return float(standards.target[rows].mean())
