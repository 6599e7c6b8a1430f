"""Spread against rounding."""

import numpy as np

from quant.preprocessing.rounding import vanishes


def test_rounding_of_equal_numbers_vanishes_and_a_signal_does_not():
    equal = np.full(1001, 0.1)
    assert vanishes(equal.std(), 0.1)
    assert not vanishes(np.float64(1e-11), 1.0)
    assert vanishes(np.float64(0.0), 0.0)
