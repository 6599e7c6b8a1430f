"""Pooled standard deviation of repeated determinations, by hand."""

import math

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.repeatability import pooled_standard_deviation, standard_error_of_means


def test_by_hand():
    # Sample 0: 1, 3 (mean 2, squares 1 + 1); sample 5: 4, 5, 9 (mean 6, squares 4 + 1 + 9); sample 2: 7 alone.
    spread, freedom = pooled_standard_deviation([1, 4, 3, 7, 5, 9], np.array([0, 5, 0, 2, 5, 5]))
    assert freedom == 3
    assert spread == pytest.approx(math.sqrt((2 + 14) / 3))


def test_duplicates_agree_with_the_formula_of_differences():
    # For pairs, s² = Σd²/(2n), the form of laboratory handbooks (from memory).
    first, second = np.array([5.1, 7.9, 3.3, 6.0]), np.array([5.3, 7.6, 3.4, 6.0])
    spread, freedom = pooled_standard_deviation(np.concatenate([first, second]), np.tile(np.arange(4), 2))
    assert freedom == 4
    assert spread == pytest.approx(math.sqrt(np.sum((first - second) ** 2) / 8))


def test_nothing_repeated():
    spread, freedom = pooled_standard_deviation([1.0, 2.0], np.array([0, 1]))
    assert math.isnan(spread)
    assert freedom == 0
    assert pooled_standard_deviation([], np.array([], dtype=int))[1] == 0


def test_means_of_unequal_numbers():
    # One sample of 1, one of 4 determinations: mean variance s²(1 + 1/4)/2.
    assert standard_error_of_means(0.8, [1, 4]) == pytest.approx(0.8 * math.sqrt(1.25 / 2))
    assert standard_error_of_means(0.8, [2, 2, 2]) == pytest.approx(0.8 / math.sqrt(2))


def test_what_is_refused():
    with pytest.raises(SampleMismatchError, match="2 values of values but 1 of samples"):
        pooled_standard_deviation([1.0, 2.0], np.array([0]))
    with pytest.raises(NotEnoughDataError, match="No sample"):
        standard_error_of_means(1.0, [])
    with pytest.raises(ParameterError, match="A mean of 0 determinations"):
        standard_error_of_means(1.0, [2, 0])
