"""Variance components of replicates by hand and with known truth; b'Σb for noise that is not white."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.statistics.replicate_parts import propagated_variance, replicate_components, replicate_covariance


def test_a_balanced_table_by_hand():
    # Sample a: packs (1, 3) and (5, 7), means 2, 6, 4; sample b: packs (10, 10) and (12, 16), means 10, 14, 12.
    # Scans: 2 + 2 + 0 + 8 = 12 on 4; packs: 2·(4 + 4) + 2·(4 + 4) = 32 on 2, mean square 16 = 3 + 2·σ².
    values = [1, 3, 5, 7, 10, 10, 12, 16]
    found = replicate_components(values, list("aaaabbbb"), [1, 1, 2, 2, 1, 1, 2, 2])
    assert (found.scan_variance, found.scan_degrees_of_freedom) == (3.0, 4)
    assert (found.pack_variance, found.pack_degrees_of_freedom) == (6.5, 2)
    assert found.variance_of_mean(packs=2, scans=3) == pytest.approx(6.5 / 2 + 3 / 6)


def test_re_scans_alone():
    found = replicate_components([1.0, 3.0, 5.0], ["a", "a", "b"])
    assert (found.scan_variance, found.pack_variance) == (2.0, None)
    assert found.variance_of_mean(scans=4) == 0.5


def test_known_components_come_back_from_uneven_groups():
    rng = np.random.default_rng(1)
    found = []
    for _ in range(200):
        values, samples, packs = [], [], []
        for sample in range(12):
            level = rng.uniform(0, 100)
            for pack in range(rng.integers(1, 4)):
                middle = level + 2.0 * rng.normal()
                scans = rng.integers(1, 5)
                values += list(middle + 1.0 * rng.normal(size=scans))
                samples += [sample] * scans
                packs += [pack] * scans
        components = replicate_components(values, samples, packs)
        found.append((components.scan_variance, components.pack_variance))
    mean, error = np.mean(found, axis=0), np.std(found, axis=0) / np.sqrt(200)
    assert (np.abs(mean - [1.0, 4.0]) < 3.3 * error).all()  # unbiased


def test_a_negative_component_is_told():
    found = replicate_components([1.0, 5.0, 1.0, 5.0], ["a"] * 4, [1, 1, 2, 2])
    assert found.pack_variance == pytest.approx((0 - 8) / 2)


def test_noise_after_a_derivative_is_not_white():
    # Σ of the derived spectra's points gives the variance of predictions; the points' variances alone do not.
    rng = np.random.default_rng(2)
    samples = np.repeat(np.arange(300), 4)
    spectra = rng.normal(size=(1200, 24)) + 10 * rng.normal(size=(300, 24))[samples]
    derived = SavitzkyGolay(window=7, polynomial=2, derivative=1).fit(spectra).transform(spectra)
    b = np.sin(np.arange(derived.shape[1]) / 3)
    sigma = replicate_covariance(derived, samples)
    variance = propagated_variance(b, sigma)
    assert variance == pytest.approx(replicate_components(derived @ b, samples).scan_variance, rel=1e-10)
    assert abs(np.sum(b**2 * np.diag(sigma)) / variance - 1) > 0.5


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError, match="scanned twice"):
        replicate_components([1.0, 2.0], ["a", "a"], [1, 2])
    with pytest.raises(SampleMismatchError, match="one mark"):
        replicate_components([1.0, 2.0], ["a"])
    with pytest.raises(ParameterError, match="1 or more"):
        replicate_components([1.0, 2.0], ["a", "a"]).variance_of_mean(packs=0)
    with pytest.raises(NotEnoughDataError, match="two spectra"):
        replicate_covariance(np.eye(2), ["a", "b"])
    with pytest.raises(ParameterError, match="square"):
        propagated_variance([1.0, 2.0], np.eye(3))
