"""Remedies that fit the regression anew to the calibration's own spectra: orthogonal removal, recalibration."""

from dataclasses import replace

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.estimator.base import unfitted_copy
from quant.model.calibration import Calibration
from quant.preprocessing.orthogonal_removal import orthogonal_directions
from quant.preprocessing.spectral_map import low_rank_map
from quant.regression.factor_regression import FactorRegression
from quant.regression.method import Method
from quant.revalidation.standards import Standards, Training

MOST_WEIGHT = 5.0  # of a new standard, that of an old sample being 1


def remove_difference(standards: Standards, rows: IntArray) -> Calibration:
    """Return the model fitted at right angles to the main direction of the differences after - before.

    Parameters
    ----------
    standards : Standards
        With spectra from before, and with the calibration's own.
    rows : array of int
        The standards that the remedy may see.
    """
    model, training = standards.model, _training(standards)
    direction = orthogonal_directions(standards.after_processed[rows] - standards.before_processed[rows], 1)
    step = low_rank_map(direction.T, -direction, np.zeros(direction.shape[1]))
    method = _fitted(model, step.transform(training.processed), training.values, training.weights, model.factors)
    return replace(model, steps=(*model.steps, step), method=method)


def recalibrate(standards: Standards, rows: IntArray) -> Calibration:
    """Return the model fitted to the calibration's own samples and the standards as measured now.

    All new standards together weigh as much as all old samples, though none more than five of them; one factor more is
    allowed for the difference between the two.

    Parameters
    ----------
    standards : Standards
        With the calibration's own spectra.
    rows : array of int
        The standards that the remedy may see.
    """
    model, training = standards.model, _training(standards)
    weight = min(MOST_WEIGHT, float(training.weights.sum()) / rows.size)
    spectra = np.concatenate([training.processed, standards.after_processed[rows]])
    values = np.concatenate([training.values, standards.reference[rows]])
    weights = np.concatenate([training.weights, np.full(rows.size, weight)])
    more = model.factors + isinstance(model.method, FactorRegression)
    method = _fitted(model, spectra, values, weights, more)
    return replace(model, method=method, factors=method.factor_counts_[-1], n_samples=model.n_samples + rows.size)


def _fitted(model: Calibration, spectra: FloatArray, values: FloatArray, weights: FloatArray, factors: int) -> Method:
    method = unfitted_copy(model.method)
    if isinstance(method, FactorRegression):
        method.set_params(n_factors=factors)
    method.fit(spectra, values, sample_weight=weights)
    return method


def _training(standards: Standards) -> Training:
    assert standards.training is not None  # the table of remedies sees to it
    return standards.training
