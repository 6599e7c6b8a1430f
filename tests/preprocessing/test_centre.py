"""Mean-centring."""

import numpy as np

from quant.preprocessing.centre import MeanCentre

SPECTRA = np.array([[1.0, 10.0], [3.0, 30.0], [8.0, 20.0]])


def test_subtracts_the_mean_of_the_training_spectra():
    step = MeanCentre().fit(SPECTRA)
    np.testing.assert_allclose(step.transform([[5.0, 0.0]]), [[1.0, -20.0]])
    np.testing.assert_allclose(step.transform(SPECTRA).mean(axis=0), 0.0, atol=1e-15)


def test_replicates_with_weight_one_over_m_count_once():
    replicated = np.vstack([SPECTRA, SPECTRA[2:], SPECTRA[2:]])
    weighted = MeanCentre().fit(replicated, sample_weight=[1, 1, 1 / 3, 1 / 3, 1 / 3])
    np.testing.assert_allclose(weighted.mean_, MeanCentre().fit(SPECTRA).mean_)
