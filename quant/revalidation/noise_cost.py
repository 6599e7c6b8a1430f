"""What a change of noise costs: the scatter that it adds to predictions."""

import numpy as np

from quant.model.calibration import Calibration
from quant.revalidation.change_pairs import used_points
from quant.revalidation.point_noise import noise_of
from quant.revalidation.standards import Standards
from quant.spectra.sample_set import mean_by_sample

DRAWS = 100  # of noise: the standard deviation they give is good to 7 %
SEED = 20260302


def added_by_noise(standards: Standards, model: Calibration) -> float:
    """Return the variance that noise adds to predictions since before the visit; below zero where it fell.

    A dozen of differences shows a doubled scatter badly; the noise of their spectra is known to a few per cent, and
    what it does to predictions follows from the model.

    Parameters
    ----------
    standards : Standards
        With spectra from before.
    model : Calibration
        The standards' own, or one corrected.

    Returns
    -------
    float
        [(unit of the analyte)²]
    """
    if standards.before_spectra is None or standards.before_index is None:
        return 0.0
    axis, used = model.axis.values, used_points(standards.model)
    levels = []
    for spectra, index in (
        (standards.before_spectra.values, standards.before_index),
        (standards.after_spectra.values, standards.after_index),
    ):
        variance = mean_by_sample(noise_of(spectra, axis, used)[:, None] ** 2, index, len(standards))[:, 0]
        levels.append(float(np.mean(variance / np.bincount(index, minlength=len(standards)))))
    size = np.sqrt(max(levels))
    if size == 0:
        return 0.0
    draws = np.random.default_rng(SEED).standard_normal((DRAWS, axis.size))
    predicted = model.predict_values(standards.after_raw.mean(axis=0) + size * draws)
    return float(predicted.var(ddof=1) / size**2 * (levels[1] - levels[0]))
