"""Non-negative least squares against SciPy and its own optimality."""

import numpy as np
import pytest
from scipy.optimize import nnls

from quant.regression.non_negative import non_negative_least_squares


@pytest.mark.parametrize("seed", range(40))
def test_equals_scipy(seed):
    rng = np.random.default_rng(seed)
    p = int(rng.integers(1, 8))
    A = rng.standard_normal((p + int(rng.integers(0, 5)), p)) + rng.uniform(0, 2)  # columns alike, as spectra are
    b = A @ rng.standard_normal(p) + rng.standard_normal(len(A))
    found = non_negative_least_squares(A, b)
    assert found == pytest.approx(nnls(A, b)[0], abs=1e-10)
    gradient = A.T @ (b - A @ found)  # Karush-Kuhn-Tucker: zero where free, not positive where held
    assert np.abs(gradient[found > 0]).max(initial=0) < 1e-9
    assert gradient[found == 0].max(initial=0) < 1e-9


def test_a_solution_inside_is_that_of_least_squares():
    A = np.array([[1.0, 0.2], [0.1, 1.0], [0.5, 0.5]])
    assert non_negative_least_squares(A, A @ [2.0, 3.0]) == pytest.approx([2.0, 3.0], rel=1e-13)


def test_nothing_fits_with_negative_signal():
    assert non_negative_least_squares(np.eye(3), np.array([-1.0, -2, 0])).tolist() == [0, 0, 0]


def test_rescaling_changes_nothing():
    rng = np.random.default_rng(5)
    A, b = rng.uniform(0, 1, (9, 4)), rng.standard_normal(9)
    scale = np.array([1e-6, 1, 1e6, 10])
    assert non_negative_least_squares(A * scale, b * 1e-8) * scale * 1e8 == pytest.approx(
        non_negative_least_squares(A, b), rel=1e-8
    )
