import numpy as np
import pytest

from quant.errors import ParameterError
from quant.revalidation.multiple_tests import holm_adjusted


def test_holm_by_hand() -> None:
    # Rising: 0.005·4, 0.01·3, 0.03·2, 0.04·1; then never falling.
    assert holm_adjusted([0.01, 0.04, 0.03, 0.005]) == pytest.approx([0.03, 0.06, 0.06, 0.02])
    assert holm_adjusted([0.6, 0.7]) == pytest.approx([1.0, 1.0])


def test_one_test_stays_as_it_is() -> None:
    assert holm_adjusted([0.2]) == pytest.approx([0.2])
    assert holm_adjusted([]).size == 0


def test_the_family_wise_rate_is_held_where_single_tests_exceed_it() -> None:
    p = np.random.default_rng(1).uniform(size=(4000, 8))
    held = np.mean([(holm_adjusted(row) <= 0.05).any() for row in p])
    assert 0.035 < held < 0.065  # 5 %, 99.9 % bounds of 4000 draws are about ±1.2 %
    assert np.mean((p <= 0.05).any(axis=1)) > 0.25  # the control: without Holm 34 %


def test_a_number_that_is_no_probability_is_refused() -> None:
    with pytest.raises(ParameterError, match="from 0 to 1"):
        holm_adjusted([0.1, 1.2])
