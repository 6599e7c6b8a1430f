"""When a spread is nothing but rounding."""

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import BoolArray, FloatArray

ROUNDING = 1e-13  # about 450 units in the last place


def vanishes(spread: FloatArray, size: ArrayLike) -> BoolArray:
    """Tell where a spread cannot be told from zero, given the largest size of the numbers it came from.

    A mean of n equal numbers may differ from them in the last place, so that an exact test for zero would miss them.
    """
    return np.asarray(spread <= ROUNDING * np.asarray(size))
