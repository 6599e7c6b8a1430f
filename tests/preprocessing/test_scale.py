"""Scaling of columns."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, QuantityError
from quant.preprocessing.scale import ScaleColumns

SPECTRA = np.array([[1.0, 10.0], [3.0, 30.0], [8.0, 20.0]])  # sums of squares about the mean: 26, 200


def test_divides_by_the_standard_deviation_and_keeps_the_mean():
    step = ScaleColumns().fit(SPECTRA)
    np.testing.assert_allclose(step.scale_, np.sqrt([13.0, 100.0]))
    np.testing.assert_allclose(step.transform([[26.0, 5.0]]), [[26.0 / np.sqrt(13.0), 0.5]])


def test_replicates_with_weight_one_over_m_count_once():
    replicated = np.vstack([SPECTRA, SPECTRA[2:], SPECTRA[2:]])
    weighted = ScaleColumns().fit(replicated, sample_weight=[1, 1, 1 / 3, 1 / 3, 1 / 3])
    np.testing.assert_allclose(weighted.scale_, ScaleColumns().fit(SPECTRA).scale_)


def test_refuses_constant_columns():
    spectra = np.column_stack([np.full(7, 0.1), np.arange(7.0), np.zeros(7)])
    with pytest.raises(QuantityError, match=r"2 column\(s\) .*position\(s\) 0, 2 .*Leave those points out"):
        ScaleColumns().fit(spectra)


@pytest.mark.parametrize("weight", [[1, 0, 0], [0.4, 0.3, 0.3]])
def test_refuses_fewer_than_two_samples(weight):
    with pytest.raises(NotEnoughDataError, match="more than one sample"):
        ScaleColumns().fit(SPECTRA, sample_weight=weight)
