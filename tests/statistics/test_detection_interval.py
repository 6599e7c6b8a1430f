"""The interval of detection limits against its published consistency check."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.regression.pls import PLS
from quant.statistics.detection_interval import blank_leverages, detection_interval, result_sd

Y = np.arange(0.0, 13.0, 2.0)  # mean 6, sum of squares about it 112


def test_one_variable_has_one_detection_limit():
    # Allegrini & Olivieri 2014 (formulas from memory), consistency check (computed): h0 = 36/112, + 1/7 with the mean.
    leverages = 1 / 7 + (Y - 6) ** 2 / 112
    assert blank_leverages(Y, leverages, mean_term=False) == pytest.approx([0.32143, 0.32143], abs=5e-6)
    assert blank_leverages(Y, leverages) == pytest.approx([0.46429, 0.46429], abs=5e-6)
    # Fluorescein (from memory, reproduced): s = 0.432848 at a slope of 1.930357; 0.8954 computed.
    found = detection_interval(Y, leverages, sensitivity=1.930357, signal_sd=0.432848, reference_sd=0.0)
    assert found.low == pytest.approx(0.8954, abs=5e-5)
    assert found.high == pytest.approx(found.low, rel=1e-12)
    assert found.quantification_high == pytest.approx(found.high * 10 / 3.3)
    assert "LOD_max" in str(found)


def test_the_published_maximum():
    rng = np.random.default_rng(1)
    spectra = rng.normal(size=(12, 6))
    y = 3 + spectra @ [1.0, 0.5, 0.0, 0.0, 0.2, 0.0] + 0.1 * rng.normal(size=12)
    leverages = PLS(n_factors=3).fit(spectra, y).leverage_each(spectra)[-1]
    own = y - y.mean()
    low = y.mean() ** 2 / np.sum(own**2)
    high = np.max(leverages - 1 / 12 + low * (1 - (own / y.mean()) ** 2))
    assert blank_leverages(y, leverages, mean_term=False) == pytest.approx([low, high])
    assert high > 1.05 * low
    found = detection_interval(y, leverages, sensitivity=2.0, signal_sd=0.1, reference_sd=0.2, mean_term=False)
    for limit, h in ((found.low, low), (found.high, high)):
        assert limit == pytest.approx(3.3 * np.sqrt(0.05**2 + h * 0.05**2 + h * 0.2**2))


def test_the_standard_deviation_of_a_result():
    # IUPAC form (from memory): var = SEN^-2·s_x²·(1 + h) + h·s_y².
    assert result_sd([0.0, 0.5], 2.0, 0.1, 0.2) == pytest.approx([0.05, np.sqrt(0.0025 * 1.5 + 0.5 * 0.04)])


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError, match="all 3 reference values"):
        blank_leverages([1.0, 1.0, 1.0], [0.5, 0.5, 0.5])
    with pytest.raises(SampleMismatchError):
        blank_leverages([1.0, 2.0], [0.5])
    with pytest.raises(ParameterError, match="1/n included"):
        blank_leverages([1.0, 2.0, 3.0], [0.5, 0.0, 0.5])
    with pytest.raises(ParameterError, match="sensitivity"):
        result_sd(0.1, 0.0, 0.1, 0.1)
