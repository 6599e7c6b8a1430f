"""Changes of each standard, estimated together from its spectra before and after."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.revalidation.change_terms import RESOLUTION, Ground, blurred, changed, largest_sizes, terms

ROUNDS = 3  # Gauss-Newton steps from nothing
ROUNDS_ON = 2  # steps from an earlier fit, or where little can have changed
SMOOTH = 15  # points over which the scatter between standards is averaged to give weights
NEW_BAND = 4.0  # robust standard errors of the mean residual beyond which a point counts less than half
ROBUST_ROUNDS = 4
LEAST_SIZE = 0.01  # of the mean spectrum
MOST_DIRECTIONS = 4  # ways in which the standards' composition may differ


@dataclass(frozen=True, eq=False)
class Fit:
    """What was found.

    Attributes
    ----------
    kinds : tuple of str
    sizes : array of shape (n_standards, n_kinds)
        Size of each change for each standard.
    composition : array of shape (n_standards, n_directions)
        Change along the directions in which the standards differ from each other.
    rest : array of shape (n_standards, n_points)
        What no change explains, zero at points not used. [absorbance]
    covariance : array of shape (n_kinds + n_directions, n_kinds + n_directions)
        Of the estimates of one standard, for noise of weight 1; mean over standards.
    """

    kinds: tuple[str, ...]
    sizes: FloatArray
    composition: FloatArray
    rest: FloatArray
    covariance: FloatArray


def fit_changes(
    ground: Ground,
    before: FloatArray,
    after: FloatArray,
    kinds: Sequence[str],
    directions: FloatArray,
    weights: FloatArray,
    start: Fit | None = None,
    rounds: int = ROUNDS,
) -> Fit:
    """Estimate all changes of each standard together, by weighted least squares, iterated.

    Terms are taken from the mean of the two spectra, so that exchanging before and after only turns the signs and noise
    in the spectra does not pull the sizes to one side.

    Parameters
    ----------
    ground : Ground
    before, after : arrays of shape (n_standards, n_points)
        Mean spectra of the same standards, row by row. [absorbance]
    kinds : sequence of str
        What may have changed, see `change_terms.terms`.
    directions : array of shape (n_directions, n_points)
        How spectra of the standards differ by composition.
    weights : array of shape (n_points,)
        Of the squared residuals.
    start : Fit, optional
        An earlier fit of the same kinds, to go on from.
    rounds : int
        Gauss-Newton steps.
    """
    n, used = len(before), ground.used
    sizes = np.zeros((n, len(kinds))) if start is None else start.sizes
    composition = np.zeros((n, len(directions))) if start is None else start.composition
    bounds = largest_sizes(ground, kinds)
    root = np.sqrt(weights[used])
    additive = np.broadcast_to(directions, (n, *directions.shape))
    covariance = np.zeros((len(kinds) + len(directions),) * 2)
    for round_number in range(rounds + 1):
        model, target = _both_sides(ground, before, after, kinds, sizes)
        model = model + composition @ directions
        rest = np.where(used, target - model, 0.0)
        if round_number == rounds:
            break
        columns = np.concatenate([terms(ground, 0.5 * (model + target), kinds), additive], axis=1)[:, :, used] * root
        step, covariance = _solve(columns, rest[:, used] * root)
        sizes = np.clip(sizes + step[:, : len(kinds)], -bounds, bounds)
        composition = composition + step[:, len(kinds) :]
    return Fit(kinds=tuple(kinds), sizes=sizes, composition=composition, rest=rest, covariance=covariance)


def _both_sides(
    ground: Ground, before: FloatArray, after: FloatArray, kinds: Sequence[str], sizes: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Spectra before as they should look by now, and spectra after; where lines got narrower those are blurred."""
    each = dict(zip(kinds, sizes.T, strict=True))
    return changed(ground, before, each), blurred(ground, after, -each.get(RESOLUTION, np.zeros(len(after))))


def _solve(columns: FloatArray, rest: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Least squares for every standard, shape (n, n_terms), and the mean covariance for unit noise."""
    scale = np.linalg.norm(columns, axis=2, keepdims=True)
    scaled = columns / np.where(scale > 0, scale, 1.0)
    inverse = np.linalg.pinv(scaled @ scaled.transpose(0, 2, 1), rcond=1e-12, hermitian=True)
    step = (inverse @ (scaled @ rest[:, :, None]))[:, :, 0] / scale[:, :, 0]
    return step, np.asarray((inverse / scale / scale.transpose(0, 2, 1)).mean(axis=0))


def composition_directions(ground: Ground, rows: FloatArray, most: int, weights: FloatArray) -> FloatArray:
    """Return how the standards' spectra differ from each other by composition, shape (n_directions, n_points).

    Leading principal directions of the spectra after each is brought to one size, baseline and vapour (all against
    their mean): what evaporation, or any other change of the standards themselves, can do to them.

    Parameters
    ----------
    ground : Ground
    rows : array of shape (n_standards, n_points)
        One spectrum a standard. [absorbance]
    most : int
        Not more than this.
    weights : array of shape (n_points,)
        Of the squares.
    """
    n, used = len(rows), ground.used
    count = min(most, MOST_DIRECTIONS, (n - 1) // 2)
    u = ground.u
    design = np.stack([rows.mean(axis=0), np.ones_like(u), u, 0.5 * (3.0 * u * u - 1.0), ground.vapour])
    root = np.sqrt(weights[used])
    found = np.linalg.lstsq((design[:, used] * root).T, (rows[:, used] * root).T, rcond=None)[0]
    size_of = np.where(np.abs(found[0]) > LEAST_SIZE, found[0], 1.0)  # an empty beam has no size to be brought to
    alike = (rows - found[1:].T @ design[1:]) / size_of[:, None]
    alike = alike - alike.mean(axis=0)
    left, size, _ = np.linalg.svd(alike[:, used] * root, full_matrices=False)
    kept = size[:count] > 1e-9 * max(float(size[0]), 1e-300)
    return np.asarray(left[:, :count][:, kept].T @ alike)


def scatter_weights(ground: Ground, rest: FloatArray) -> FloatArray:
    """Return weights 1/variance from the scatter of residuals between standards, averaged over neighbours.

    Parameters
    ----------
    ground : Ground
    rest : array of shape (n_standards, n_points)
        Residuals of a first fit.

    Returns
    -------
    array of shape (n_points,)
        Mean 1 over the points used, 0 elsewhere.
    """
    used = ground.used
    variance = (rest[:, used] - rest[:, used].mean(axis=0)).var(axis=0)
    window = min(SMOOTH, variance.size)
    kernel = np.ones(window)
    smooth = np.convolve(variance, kernel, "same") / np.convolve(np.ones_like(variance), kernel, "same")
    smooth = np.maximum(smooth, 1e-2 * float(np.median(smooth)))
    weights = np.zeros(ground.axis.size)
    weights[used] = 1.0 / smooth if smooth.min() > 0 else 1.0
    return np.asarray(weights / weights[used].mean())


def robust_weights(ground: Ground, rest: FloatArray, weights: FloatArray) -> FloatArray:
    """Return weights that leave out where all standards show something new, so that it does not pull at the terms.

    Parameters
    ----------
    ground : Ground
    rest : array of shape (n_standards, n_points)
        Residuals of the last fit.
    weights : array of shape (n_points,)
        Weights from the scatter between standards.

    Returns
    -------
    array of shape (n_points,)
        Cauchy's: down by half where the mean residual is `NEW_BAND` standard errors.
    """
    z = rest.mean(axis=0) * np.sqrt(weights)
    scale = 1.4826 * float(np.median(np.abs(z[ground.used])))
    return np.asarray(weights / (1.0 + (z / (NEW_BAND * scale)) ** 2)) if scale > 0 else weights
