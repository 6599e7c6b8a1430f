"""Van der Voet's randomisation test: does one model predict better than another on the same samples?"""

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import paired_vectors
from quant.errors import ParameterError

EXACT_UP_TO = 16  # samples: 2^16 sign patterns are all looked at in a moment
N_RANDOM = 1999  # beyond; p is then a multiple of 1/2000
SEED = 1994


class RandomisationTest(NamedTuple):
    """What the test found.

    Attributes
    ----------
    statistic : float
        Mean of squared error - squared error of the other model. [unit of the analyte, squared]
    p : float
        Probability of a mean at least this large where both models predict equally well; one-sided.
    exact : bool
        Whether all 2^n sign patterns were looked at, or random ones.
    """

    statistic: float
    p: float
    exact: bool


def randomisation_test(
    squared_errors: ArrayLike, other_squared_errors: ArrayLike, n_random: int = N_RANDOM, seed: int = SEED
) -> RandomisationTest:
    """Test whether the errors of one model are larger than those of another on the same samples.

    Where both models predict equally well, each difference d of squared errors could as well have the other sign. p is
    the share of sign patterns whose mean is at least that observed: of all 2^n patterns (the observed one among them)
    up to 16 samples, else (1 + random patterns as large)/(n_random + 1).

    Parameters
    ----------
    squared_errors, other_squared_errors : array of shape (n_samples,)
        Squared errors of left-out or new samples by the two models, one pair a sample.
        [unit of the analyte, squared]
    n_random : int
        Random sign patterns beyond 16 samples, 1 at least.
    seed : int
        Of the random sign patterns: the same input gives the same p.

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        There is no pair.
    ParameterError
        A value that is not finite or negative, or fewer than one random pattern.

    References
    ----------
    .. [1] H. van der Voet, Chemom. Intell. Lab. Syst. 25 (1994) 313-323 (from memory).
    """
    one, other = paired_vectors(
        "squared errors", squared_errors, "squared errors of the other model", other_squared_errors
    )
    if (one < 0).any() or (other < 0).any():
        raise ParameterError("squared errors hold negative numbers; pass the squares of predicted - reference.")
    if n_random < 1:
        raise ParameterError(f"n_random = {n_random}; expected 1 or more.")
    difference = one - other
    observed = float(difference.sum())
    # Patterns that equal the observed one but for the order of summation count as equal.
    least = observed - 4 * difference.size * np.finfo(np.float64).eps * float(np.abs(difference).sum())
    exact = difference.size <= EXACT_UP_TO
    if exact:
        p = float(np.mean(_all_sums(difference) >= least))
    else:
        signs = np.random.default_rng(seed).integers(0, 2, (n_random, difference.size), dtype=np.int8) * 2 - 1
        p = (1 + int(np.count_nonzero(signs @ difference >= least))) / (n_random + 1)
    return RandomisationTest(observed / difference.size, p, exact)


def _all_sums(difference: FloatArray) -> FloatArray:
    """Sums of ±d over all sign patterns, shape (2^n,)."""
    sums = np.zeros(1)
    for d in difference:
        sums = np.concatenate([sums + d, sums - d])
    return sums
