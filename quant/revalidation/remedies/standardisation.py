"""Mean difference, direct and piecewise direct standardisation: a map of the spectra behind the model's own steps.

Behind the steps, contact, path and baseline of the single measurement are gone, and what differs between before and
after is the instrument. Both standardisations start from "nothing changed but the mean" and are drawn towards it by a
ridge whose strength the standards choose by leaving each out: with a dozen of standards that differ little, an
unrestrained map would fit noise and flatten the very band that is to be measured. What counts in that choice is the
left-out error of the predicted value where the regression has a vector, else that of the spectra.
"""

from dataclasses import replace

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.errors import NotEnoughDataError
from quant.model.calibration import Calibration
from quant.preprocessing.spectral_map import SpectralMap, banded_map, low_rank_map
from quant.regression.factor_regression import FactorRegression
from quant.revalidation.remedies.values import with_line
from quant.revalidation.standards import Standards

REACH = 2  # points to either side in a window
# Strengths tried, as multiples of the mean variance of the predictors.
RIDGES: tuple[float, ...] = (0.0, *np.logspace(-3, 5, 9).tolist())
FEWEST = 3  # standards for a map


def remove_mean_difference(standards: Standards, rows: IntArray) -> Calibration:
    """Return the model with a last step that takes the mean difference after - before off every spectrum.

    Parameters
    ----------
    standards : Standards
        With spectra from before.
    rows : array of int
        The standards that the remedy may see.
    """
    difference = standards.before_processed[rows] - standards.after_processed[rows]
    points = np.arange(difference.shape[1])[:, None]
    return _levelled(standards, rows, banded_map(points, np.ones(points.shape), difference.mean(axis=0)))


def standardise_directly(standards: Standards, rows: IntArray) -> Calibration:
    """Return the model with a last step by direct standardisation.

    Parameters
    ----------
    standards : Standards
        With spectra from before.
    rows : array of int
        The standards that the remedy may see.

    Raises
    ------
    NotEnoughDataError
        Fewer than three standards.
    """
    before, after = _pair(standards, rows)
    return _levelled(standards, rows, direct_map(before, after, vector=_vector(standards.model)))


def standardise_piecewise(standards: Standards, rows: IntArray) -> Calibration:
    """Return the model with a last step by piecewise direct standardisation.

    Parameters
    ----------
    standards : Standards
        With spectra from before.
    rows : array of int
        The standards that the remedy may see.

    Raises
    ------
    NotEnoughDataError
        Fewer than three standards.
    """
    before, after = _pair(standards, rows)
    return _levelled(standards, rows, piecewise_map(before, after, vector=_vector(standards.model)))


def direct_map(
    before: FloatArray, after: FloatArray, ridge: float | None = None, vector: FloatArray | None = None
) -> SpectralMap:
    """Return the map from spectra after to spectra before, a combination of the standards' own directions.

    What lies outside the standards' directions passes unchanged: a strange spectrum's residual still shows.

    Parameters
    ----------
    before, after : array of shape (n, points)
        Spectra of the same standards. [ordinate]
    ridge : float, optional
        Strength of the pull towards "nothing changed but the mean"; chosen by leaving out when not given.
    vector : array of shape (points,), optional
        Regression vector that the choice is made by. [unit of the analyte / ordinate]

    References
    ----------
    .. [1] Y. Wang, D.J. Veltkamp, B.R. Kowalski, Anal. Chem. 63 (1991) 2750; from memory. The ridge is ours.
    """
    centre = after.mean(axis=0)
    _, sizes, directions = np.linalg.svd(after - centre, full_matrices=False)
    kept = directions[sizes > 1e-9 * sizes.max(initial=0.0)]
    scores = (after - centre) @ kept.T
    difference = before - after
    coefficients = _ridge(scores[None], difference[None] - difference.mean(axis=0), ridge, vector)[0]
    offset = difference.mean(axis=0) - (centre @ kept.T) @ coefficients
    return low_rank_map(kept.T, coefficients, offset)


def piecewise_map(
    before: FloatArray,
    after: FloatArray,
    reach: int = REACH,
    ridge: float | None = None,
    vector: FloatArray | None = None,
) -> SpectralMap:
    """Return the map that makes each point before from a window of points after.

    Parameters
    ----------
    before, after : array of shape (n, points)
        Spectra of the same standards. [ordinate]
    reach : int
        Points to either side of the window's middle; 0: each point by itself.
    ridge : float, optional
        As `direct_map` takes it; 0 is plain least squares.
    vector : array of shape (points,), optional
        As `direct_map` takes it.

    References
    ----------
    .. [1] Y. Wang, D.J. Veltkamp, B.R. Kowalski, Anal. Chem. 63 (1991) 2750; from memory. The ridge is ours.
    """
    points = after.shape[1]
    width = min(2 * reach + 1, points)
    first = np.clip(np.arange(points) - reach, 0, points - width)
    sources = first[:, None] + np.arange(width)
    centre, difference = after.mean(axis=0), before - after
    windows = np.moveaxis((after - centre)[:, sources], 1, 0)  # (points, n, width)
    wanted = (difference - difference.mean(axis=0)).T[:, :, None]  # (points, n, 1)
    weights = _ridge(windows, wanted, ridge, vector)[:, :, 0]
    offset = difference.mean(axis=0) - np.einsum("pw,pw->p", weights, centre[sources])
    weights = weights + (sources == np.arange(points)[:, None])
    return banded_map(sources, weights, offset)


def _ridge(predictors: FloatArray, wanted: FloatArray, ridge: float | None, vector: FloatArray | None) -> FloatArray:
    """Ridge regressions, one a leading index: (k, n, p) and (k, n, q) centred give (k, p, q).

    One strength serves all, so that it is chosen by many left-out residuals: e/(1 - h), the mean's 1/n in h included.
    """
    left, sizes, right = np.linalg.svd(predictors, full_matrices=False)
    unit = float(np.mean(sizes**2)) or 1.0
    sizes = np.where(sizes > 1e-12 * sizes.max(initial=0.0), sizes, 0.0)
    projected = np.swapaxes(left, 1, 2) @ wanted
    strength = _chosen(left, sizes, wanted, projected, vector, unit) if ridge is None else ridge * unit
    inverse = np.divide(_share(sizes, strength), sizes, out=np.zeros_like(sizes), where=sizes > 0)
    return np.asarray(np.swapaxes(right, 1, 2) @ (inverse[:, :, None] * projected))


def _chosen(
    left: FloatArray,
    sizes: FloatArray,
    wanted: FloatArray,
    projected: FloatArray,
    vector: FloatArray | None,
    unit: float,
) -> float:
    """The strongest ridge within one standard error of the one with the least left-out error."""
    n = left.shape[1]
    squares = np.full((len(RIDGES), n), np.inf)
    for i, strength in enumerate(RIDGES):
        shrunk = _share(sizes, strength * unit)
        leverage = 1 / n + np.einsum("knr,kr->kn", left**2, shrunk)
        if leverage.max() > 1 - 1e-9:  # nothing is left to judge by
            continue
        rest = (wanted - left @ (shrunk[:, :, None] * projected)) / (1 - leverage)[:, :, None]
        spectra = np.moveaxis(rest, 1, 0).reshape(n, -1)  # one left-out residual spectrum a standard
        squares[i] = np.sum(spectra**2, axis=1) if vector is None else (spectra @ vector) ** 2
    press = squares.mean(axis=1)
    best = int(np.argmin(press))
    if not np.isfinite(press[best]):
        return RIDGES[-1] * unit
    bound = float(press[best] + squares[best].std(ddof=1) / np.sqrt(n))
    return RIDGES[int(np.flatnonzero(press <= bound)[-1])] * unit


def _share(sizes: FloatArray, strength: float) -> FloatArray:
    squares = sizes**2
    return np.divide(squares, squares + strength, out=np.zeros_like(squares), where=squares > 0)


def _vector(model: Calibration) -> FloatArray | None:
    coefficients = getattr(model.method, "coefficients_", None)
    return None if coefficients is None else np.asarray(coefficients[-1])


def _pair(standards: Standards, rows: IntArray) -> tuple[FloatArray, FloatArray]:
    if rows.size < FEWEST:
        raise NotEnoughDataError(f"{rows.size} standards; a map of the spectra needs {FEWEST} or more.")
    return standards.before_processed[rows], standards.after_processed[rows]


def _levelled(standards: Standards, rows: IntArray, step: SpectralMap) -> Calibration:
    """The model with the map as its last step, and its values on the mean of the target: that is known better."""
    mapped = replace(standards.model, steps=(*standards.model.steps, step))
    if not isinstance(mapped.method, FactorRegression):
        return mapped
    return with_line(mapped, float((standards.target[rows] - standards.evaluated(mapped, rows).value).mean()), 1.0)
