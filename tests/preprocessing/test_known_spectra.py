"""Spectra given to a step."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.preprocessing.known_spectra import known_spectra


def test_none_are_no_rows():
    assert known_spectra("interferents", None, 4).shape == (0, 4)
    assert known_spectra("interferents", [[1, 2, 3, 4]], 4).dtype == np.float64


@pytest.mark.parametrize(
    ("spectra", "message"),
    [
        ([1.0, 2.0], r"interferents has shape \(2,\); expected a table"),
        ([[1.0, np.nan]], r"not finite, in row\(s\) 0"),
        ([[1.0, 2.0, 3.0]], r"interferents have 3 point\(s\), the spectra 2; expected as many. Take them through"),
        ([[1.0, 2.0], [0.0, 0.0]], r"row\(s\) 1 \(counted from 0\) hold nothing but zeros"),
    ],
)
def test_what_is_refused(spectra, message):
    with pytest.raises(ParameterError, match=message):
        known_spectra("interferents", spectra, 2)
