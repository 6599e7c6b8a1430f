"""What a change of noise costs: the scatter that it adds to predictions."""

import numpy as np

from quant.model.calibration import Calibration
from quant.revalidation.standards import Standards

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
    if not standards.paired:
        return 0.0
    before, after = standards.noise_variances
    size = np.sqrt(max(before, after))
    if size == 0:
        return 0.0
    draws = np.random.default_rng(SEED).standard_normal((DRAWS, len(model.axis)))
    predicted = model.predict_values(standards.after_raw.mean(axis=0) + size * draws)
    return float(predicted.var(ddof=1) / size**2 * (after - before))
