"""Models without each sample or fold, kept as differences to the whole one for intervals without a distribution."""

from collections.abc import Sequence

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.calibration.companions import with_companions
from quant.calibration.cross_validation_result import CrossValidationResult
from quant.calibration.folds import make_folds
from quant.errors import NotEnoughDataError
from quant.estimator.base import Step, unfitted_copy
from quant.model.left_out_models import LeftOutModels, linear_features
from quant.preprocessing.chain import chain_learns
from quant.recipe.schema import Recipe
from quant.regression.band_area import BandArea
from quant.regression.method import Method
from quant.spectra.sample_set import SampleSet
from quant.statistics.conformal import fit_level_function

REPRODUCES = 1e-5  # share of the range within which the stored models repeat the left-out predictions
SWITCHED_OFF = "switched off in the recipe"
LEARNS = "a preprocessing step learns from the standards, so that every left-out model would need its own"
NOT_LINEAR = "the regression is not linear in the spectrum, so that left-out models cannot be stored in short"
NO_ERRORS = "all left-out samples are predicted exactly"


def left_out_models(
    recipe: Recipe,
    training: SampleSet,
    values: FloatArray,
    crossed: CrossValidationResult,
    steps: Sequence[Step],
    method: Method,
    processed: FloatArray,
) -> tuple[LeftOutModels | None, str]:
    """Return what jackknife+ or CV+ needs, or None and the reason.

    The folds are those of the cross-validation, of its first repeat. Where it leaves groups out, groups and not samples
    are what is exchangeable.

    Parameters
    ----------
    recipe : Recipe
    training : SampleSet
    values : array of shape (n_samples,)
        Reference values. [unit of the analyte]
    crossed : CrossValidationResult
    steps : sequence of Step
        The preprocessing, fitted or not.
    method : Method
        The fitted regression with the number of factors chosen.
    processed : array of shape (n_spectra, n_points_after)
        Processed calibration spectra, which are the same in every fold since no step learns.
    """
    if not recipe.uncertainty.distribution_free:
        return None, SWITCHED_OFF
    if chain_learns(steps):
        return None, LEARNS
    fold = np.unique(make_folds(training, recipe.cross_validation).repeats[0], return_inverse=True)[1].astype(np.intp)
    left_out = crossed.predicted[0, crossed.factor_counts.index(method.factor_counts_[-1])]
    mean = training.mean_by_sample(processed)
    features, whole = linear_features(method, mean), method.predict(mean)
    targets = with_companions(training, values, method.companions)
    rows = [_difference(training, targets, processed, fold != number, method) for number in range(int(fold.max()) + 1)]
    if None in rows:
        return None, NOT_LINEAR
    vectors, offsets = (np.array(part) for part in zip(*(row for row in rows if row), strict=True))
    short = vectors.astype(np.float32)
    repeated = whole + offsets[fold] + np.einsum("nk,nk->n", short[fold].astype(np.float64), features)
    if not np.allclose(repeated, left_out, rtol=0, atol=REPRODUCES * float(np.ptp(values))):
        return None, NOT_LINEAR
    errors = left_out - values
    try:
        level = fit_level_function(left_out, errors)
    except NotEnoughDataError:
        return None, NO_ERRORS
    return (
        LeftOutModels(
            way="jackknife+" if fold.max() + 1 == len(training) else "CV+",
            probability=recipe.uncertainty.probability,
            vectors=short,
            offsets=offsets,
            fold=fold,
            residuals=errors,
            left_out=left_out,
            level=np.array([level.intercept, level.slope, level.least]),
        ),
        "",
    )


def regression_vectors(models: LeftOutModels | None, vector: FloatArray) -> FloatArray | None:
    """Return the regression vectors without each fold, shape (n_folds, n_points), given the whole model's."""
    if models is None or models.vectors.shape[1] != vector.size:
        return None
    each: FloatArray = vector + models.vectors.astype(np.float64)
    return each


def _difference(
    training: SampleSet, targets: FloatArray, processed: FloatArray, kept: BoolArray, method: Method
) -> tuple[FloatArray, float] | None:
    """Difference of the regression vector, and of the prediction at features zero, of a model without some samples."""
    found, rows = unfitted_copy(method), kept[training.sample_index]
    if method.averages_replicates:
        found.fit(training.mean_by_sample(processed)[kept], targets[kept])
    else:
        found.fit(processed[rows], targets[training.sample_index[rows]], sample_weight=training.weights[rows])
    if isinstance(method, BandArea) and isinstance(found, BandArea):
        if method.curve_ is not None:
            return None
        line, own = method.line_, found.line_
        offset = line.intercept / line.slope - own.intercept / own.slope
        return np.array([1 / own.slope - 1 / line.slope]), offset
    whole, other = getattr(method, "coefficients_", None), getattr(found, "coefficients_", None)
    if whole is None or other is None:
        return None
    middle = np.broadcast_to(getattr(method, "x_mean_", 0.0), whole[-1].shape)[None, :]
    return other[-1] - whole[-1], float(found.predict(middle)[0] - method.predict(middle)[0])
