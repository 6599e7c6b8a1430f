"""What repeated determinations say of a laboratory's error.

The formulas are those of repeatability in ISO 5725-2 (from memory): variances within samples are pooled by their
degrees of freedom.
"""

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import IntArray
from quant.checks import as_vector, paired_vectors
from quant.errors import NotEnoughDataError, ParameterError


def pooled_standard_deviation(values: ArrayLike, samples: IntArray) -> tuple[float, int]:
    """Return the standard deviation within samples and its degrees of freedom.

    s² = Σᵢ Σⱼ (xᵢⱼ - x̄ᵢ)² / Σᵢ (mᵢ - 1) for mᵢ determinations of sample i.

    Parameters
    ----------
    values : array of shape (n,)
        Single determinations. [unit]
    samples : array of int, shape (n,)
        The sample that each belongs to.

    Returns
    -------
    standard_deviation : float
        NaN where no sample was determined twice. [unit]
    degrees_of_freedom : int

    Raises
    ------
    SampleMismatchError
        Not one sample a value.
    """
    each, numbers = paired_vectors("values", values, "samples", samples, least=0)
    unique, index = np.unique(numbers, return_inverse=True)
    freedom = int(each.size - unique.size)
    if freedom == 0:
        return float("nan"), 0
    means = np.bincount(index, weights=each) / np.bincount(index)
    return float(np.sqrt(np.sum((each - means[index]) ** 2) / freedom)), freedom


def standard_error_of_means(standard_deviation: float, determinations: ArrayLike) -> float:
    """Return the root mean square of the standard errors s/√mᵢ of means of mᵢ determinations.

    A single number for means of unequal weight: its square is their mean variance, which is the part of a mean squared
    prediction error that comes from the laboratory.

    Parameters
    ----------
    standard_deviation : float
        Of single determinations. [unit]
    determinations : array of shape (n_samples,)
        mᵢ, at least 1.

    Raises
    ------
    NotEnoughDataError
        No sample.
    ParameterError
        A sample without a determination.
    """
    count = as_vector("determinations", determinations)
    if count.size == 0:
        raise NotEnoughDataError("No sample; the standard error of means needs one at least.")
    if (count < 1).any():
        raise ParameterError(f"A mean of {count.min():g} determinations; expected at least 1 for every sample.")
    return float(standard_deviation * np.sqrt(np.mean(1 / count)))
