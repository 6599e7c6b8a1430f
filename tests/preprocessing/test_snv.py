"""Standard normal variate."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, QuantityError
from quant.preprocessing.snv import SNV, snv


def test_worked_example():
    # R. J. Barnes, M. S. Dhanoa, S. J. Lister, Applied Spectroscopy 43 (1989) 772; this example computed
    z = [-1.143726, -0.623850, -0.103975, 0.415900, 1.455651]
    np.testing.assert_allclose(snv([[1, 2, 3, 4, 6]])[0], z, atol=5e-7)
    np.testing.assert_array_equal(SNV().fit_transform([[1, 2, 3, 4, 6]]), snv([[1, 2, 3, 4, 6]]))


@pytest.mark.parametrize("level", [0.0, 1.0, 0.1, 1e-8, -3.3])
def test_refuses_flat_spectra(level):
    spectra = np.random.default_rng(2).normal(size=(4, 7))
    spectra[[1, 3]] = level  # the mean of seven times 0.1 is not 0.1: the test must not hang on exact zeros
    with pytest.raises(QuantityError, match=r"2 spectra are flat .*row\(s\) 1, 3 .*measure them again"):
        snv(spectra)


def test_a_small_signal_on_a_large_offset_is_not_flat():
    assert np.isfinite(snv([[1e4, 1e4 + 1e-6, 1e4 - 1e-6]])).all()


def test_refuses_single_points():
    with pytest.raises(NotEnoughDataError, match="at least two points"):
        SNV().fit([[1.0], [2.0]]).transform([[1.0]])
