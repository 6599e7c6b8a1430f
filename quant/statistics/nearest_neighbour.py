"""Distances in score space: is there a gap inside the calibrated range? NumPy only: everyday prediction may pass here.

Leverage and Hotelling's T² measure the distance to the middle of the calibration. A sample between two clusters is near
the middle and yet far from every standard; the distance to the nearest standard tells.
"""

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix
from quant.errors import NotEnoughDataError, ParameterError


def whitened_scores(scores: ArrayLike, calibration_scores: ArrayLike) -> FloatArray:
    """Turn scores so that squared lengths are leverages: w·w' = (s - s̄)(S'S)^-1(s - s̄)', without the term 1/n.

    Parameters
    ----------
    scores : array of shape (n_new, n_factors)
        Scores to be turned, one row a sample.
    calibration_scores : array of shape (n_samples, n_factors)
        Scores of the calibration samples; they need be neither centred nor orthogonal.

    Returns
    -------
    array of shape (n_new, n_factors)
        Without unit.

    Raises
    ------
    ParameterError
        The two differ in the number of factors, or hold numbers that are not finite.
    NotEnoughDataError
        No more samples than factors, or scores of one factor that follow from the others'.
    """
    new, calibration = as_matrix("scores", scores), as_matrix("calibration_scores", calibration_scores)
    n, n_factors = calibration.shape
    if new.shape[1] != n_factors:
        raise ParameterError(f"scores have {new.shape[1]} factor(s), those of the calibration {n_factors}.")
    if n <= n_factors:
        raise NotEnoughDataError(f"{n} samples with {n_factors} factor(s); more samples than factors are needed.")
    middle = calibration.mean(axis=0)
    centred = calibration - middle
    triangle = np.linalg.qr(centred)[1]  # S'S = R'R
    size = np.linalg.norm(centred, axis=0)
    if (np.abs(np.diag(triangle)) <= 10 * n * np.finfo(np.float64).eps * size).any():
        raise NotEnoughDataError("the scores of one factor are constant or follow from the others'; use fewer factors.")
    turned: FloatArray = np.linalg.solve(triangle.T, (new - middle).T).T
    return turned


def nearest_neighbour_distance(scores: ArrayLike, calibration_scores: ArrayLike) -> FloatArray:
    """Squared Mahalanobis distance of each new sample to its nearest calibration sample.

    Parameters
    ----------
    scores : array of shape (n_new, n_factors)
        Scores of new samples.
    calibration_scores : array of shape (n_samples, n_factors)
        Scores of the calibration samples, one row a sample.

    Returns
    -------
    array of shape (n_new,)
        min over i of (s - s_i)(S'S)^-1(s - s_i)', without unit. To be compared with `gap_limit`.

    Raises
    ------
    ParameterError
        The two differ in the number of factors, or hold numbers that are not finite.
    NotEnoughDataError
        No more samples than factors, or scores of one factor that follow from the others'.

    References
    ----------
    .. [1] ASTM E1655-05(2012), nearest neighbour distance (from memory).
    """
    nearest: FloatArray = _squared_distances(scores, calibration_scores).min(axis=1)
    return nearest


def neighbour_distances(calibration_scores: ArrayLike) -> FloatArray:
    """Squared Mahalanobis distance of each calibration sample to its nearest other one.

    Parameters
    ----------
    calibration_scores : array of shape (n_samples, n_factors)
        Scores of the calibration samples, one row a sample (not one a replicate, which would be its own neighbour).

    Returns
    -------
    array of shape (n_samples,)
        On the scale of `nearest_neighbour_distance`.

    Raises
    ------
    ParameterError
        Numbers that are not finite.
    NotEnoughDataError
        No more samples than factors, or scores of one factor that follow from the others'.
    """
    distances = _squared_distances(calibration_scores, calibration_scores)
    np.fill_diagonal(distances, np.inf)
    nearest: FloatArray = distances.min(axis=1)
    return nearest


def gap_limit(calibration_scores: ArrayLike) -> float:
    """Largest distance of a calibration sample to its own nearest neighbour; a new sample beyond lies in a gap.

    Parameters
    ----------
    calibration_scores : array of shape (n_samples, n_factors)
        Scores of the calibration samples, one row a sample (not one a replicate, which would be its own neighbour).

    Returns
    -------
    float
        On the scale of `nearest_neighbour_distance`.

    Raises
    ------
    ParameterError
        Numbers that are not finite.
    NotEnoughDataError
        No more samples than factors, or scores of one factor that follow from the others'.

    References
    ----------
    .. [1] ASTM E1655-05(2012), nearest neighbour distance (from memory).
    """
    return float(neighbour_distances(calibration_scores).max())


def _squared_distances(scores: ArrayLike, calibration_scores: ArrayLike) -> FloatArray:
    new = whitened_scores(scores, calibration_scores)
    standards = whitened_scores(calibration_scores, calibration_scores)
    gaps = new[:, np.newaxis, :] - standards[np.newaxis, :, :]
    squares: FloatArray = np.einsum("mna,mna->mn", gaps, gaps)
    return squares
