"""Absorbance: tabulated values, and what has none."""

import numpy as np
import pytest

from quant.errors import QuantityError
from quant.preprocessing.absorbance import Absorbance, absorbance


def test_tabulated_values():
    # A = −log10 T, four decimals; computed
    T = [[1.0, 0.90, 0.7943, 0.50, 0.3679, 0.25, 0.10, 0.05, 0.01, 0.001]]
    A = [[0.0, 0.0458, 0.1000, 0.3010, 0.4343, 0.6021, 1.0, 1.3010, 2.0, 3.0]]
    np.testing.assert_allclose(absorbance(T), A, atol=5e-5)
    np.testing.assert_array_equal(Absorbance().fit_transform(T), absorbance(T))


def test_transmittance_a_little_above_one_is_noise():
    assert absorbance([[1.02, 1.0]])[0, 0] == pytest.approx(-0.0086, abs=1e-4)


@pytest.mark.parametrize("value", [0.0, -0.003, np.nan, np.inf])
def test_refuses_what_has_no_absorbance(value):
    T = np.full((3, 4), 0.5)
    T[1, 2] = T[2, 2] = value
    message = (
        r"in row\(s\) 1, 2 \(counted from 0\), 2 point\(s\), at axis position\(s\) 1050; .*keep_ranges.*measure again"
    )
    with pytest.raises(QuantityError, match=message):
        absorbance(T, [1150, 1100, 1050, 1000])


def test_the_step_refuses_when_fitted_and_when_applied():
    good, bad = np.full((2, 3), 0.5), np.array([[0.5, 0.0, 0.5]])
    step = Absorbance(axis=[3.0, 2.0, 1.0])
    with pytest.raises(QuantityError, match=r"position\(s\) 2;"):
        step.fit(bad)
    with pytest.raises(QuantityError, match=r"position\(s\) 2;"):
        step.fit(good).transform(bad)


def test_suspects_percent_even_when_some_points_are_zero():
    with pytest.raises(QuantityError, match=r"up to 98\.2 .*look like percent: divide by 100"):
        absorbance([[98.2, 0.0, 45.0]])
