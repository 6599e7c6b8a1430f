"""Orthogonal removal.

External parameter orthogonalisation of J.-M. Roger et al., Chemometrics and Intelligent Laboratory Systems 66 (2003)
191, from memory.
"""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.preprocessing.orthogonal_removal import OrthogonalRemoval, orthogonal_directions, remove_directions


def test_worked_example():
    # One difference along (3, 4, 0): its direction is (0.6, 0.8, 0), of which (1, 2, 5) holds 2.2.
    step = OrthogonalRemoval([[3.0, 4.0, 0.0]]).fit([[0.0, 0.0, 1.0]])
    np.testing.assert_allclose(np.abs(step.directions_), [[0.6, 0.8, 0]], rtol=1e-14)
    np.testing.assert_allclose(step.transform([[1.0, 2.0, 5.0]]), [[1 - 1.32, 2 - 1.76, 5]], rtol=1e-13)


def test_the_largest_differences_go_first():
    differences = np.array([[10.0, 0, 0, 0], [0, 1.0, 0, 0], [9.0, 0, 0, 0]])
    np.testing.assert_allclose(np.abs(orthogonal_directions(differences, 1)), [[1, 0, 0, 0]], atol=1e-15)
    left = remove_directions([[1.0, 2, 3, 4]], orthogonal_directions(differences, 2))
    np.testing.assert_allclose(left, [[0, 0, 3, 4]], atol=1e-14)


def test_differences_are_not_centred():
    np.testing.assert_allclose(np.abs(orthogonal_directions([[1.0, 0], [1.0, 0]])), [[1, 0]], atol=1e-15)


def test_a_temperature_effect_of_any_size_no_longer_reaches_the_spectra():
    rng = np.random.default_rng(3)
    x = np.linspace(0, 1, 80)
    analyte, shift = np.exp(-(((x - 0.4) / 0.05) ** 2)), np.sin(7 * x)
    differences = np.outer([1.0, 2.0, -1.5], shift) + rng.normal(scale=1e-4, size=(3, 80))
    cold = np.outer([1.0, 2.0], analyte)
    hot = cold + np.outer([0.5, -0.3], shift)
    step = OrthogonalRemoval(differences).fit(cold)
    assert np.abs(step.transform(hot) - step.transform(cold)).max() < 1e-3 < np.abs(hot - cold).max()


@pytest.mark.parametrize(
    ("step", "message"),
    [
        (OrthogonalRemoval(), "no difference spectra for 1 component.*difference_file"),
        (OrthogonalRemoval([[1.0, 2, 3], [2.0, 4, 6]], 2), "components = 2, but 2 difference spectra span 1 direction"),
        (OrthogonalRemoval([[1.0, 2, 3]], -1), "components = -1, but"),
        (OrthogonalRemoval([[1.0, 2, 3]], 0.5), r"components = 0\.5, but"),
        (OrthogonalRemoval([[1.0, 2]]), r"differences have 2 point\(s\), the spectra 3"),
    ],
)
def test_what_is_refused(step, message):
    with pytest.raises(ParameterError, match=message):
        step.fit([[1.0, 2.0, 4.0]])
