"""Direct and piecewise standardisation."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import NotEnoughDataError
from quant.regression.pls import PLS
from quant.revalidation.remedies.standardisation import direct_map, piecewise_map, standardise_piecewise


def test_two_standards_recover_gain_and_offset_of_each_point():
    # published-values.md 5.3: window 1 and master = g_j·slave + o_j, two distinct transfer samples recover both exactly
    rng = np.random.default_rng(1)
    gain, offset = rng.uniform(0.8, 1.2, 30), rng.normal(0, 0.1, 30)
    after = rng.normal(0, 1, (2, 30))
    found = piecewise_map(gain * after + offset, after, reach=0, ridge=0.0)
    np.testing.assert_allclose(found.weights_[:, 0], gain, atol=1e-10)
    np.testing.assert_allclose(found.offset_, offset, atol=1e-10)


def test_direct_standardisation_without_ridge_maps_its_own_standards_exactly():
    rng = np.random.default_rng(2)
    after, before = rng.normal(0, 1, (6, 40)), rng.normal(0, 1, (6, 40))
    np.testing.assert_allclose(direct_map(before, after, ridge=0.0).transform(after), before, atol=1e-9)


def test_what_the_standards_do_not_span_passes_direct_standardisation_unchanged():
    rng = np.random.default_rng(3)
    after = rng.normal(0, 1, (5, 40))
    before = after * 1.1
    made = direct_map(before, after)
    strange = rng.normal(0, 1, 40)
    basis = np.linalg.svd(after - after.mean(axis=0), full_matrices=False)[2][:4]
    strange -= basis.T @ (basis @ strange)
    moved = made.transform((after[0] + strange)[None]) - made.transform(after[:1])
    np.testing.assert_allclose(moved[0], strange, atol=1e-9)


def test_nothing_but_noise_leaves_the_spectra_alone():
    rng = np.random.default_rng(4)
    truth = rng.normal(0, 1, (12, 1)) * np.exp(-((np.arange(50) - 25.0) ** 2) / 40)
    before, after = (truth + rng.normal(0, 0.01, truth.shape) for _ in range(2))
    moved = piecewise_map(before, after).transform(after) - after
    plain = piecewise_map(before, after, ridge=0.0).transform(after) - after  # known-bad control
    assert np.sqrt(np.mean(plain**2)) > 1.4 * np.sqrt(np.mean(moved**2))


def test_a_map_needs_three_standards(world):
    standards = world.standards(np.random.default_rng(5), 4)
    with pytest.raises(NotEnoughDataError, match="3 or more"):
        standardise_piecewise(standards, np.array([0, 1]))


def gasoline() -> tuple[np.ndarray, np.ndarray]:
    """Real near-infrared spectra and octane numbers; tests/reference_values says where they come from."""
    path = Path(__file__).parents[2] / "reference_values" / "gasoline.csv"
    table = np.genfromtxt(path, delimiter=",", skip_header=1)
    return table[:, 2:], table[:, 1]


def test_eight_standards_bring_real_spectra_back():
    # A documented artificial change of real spectra: axis moved by 1 nm (half a point, linear interpolation), 4 % gain.
    spectra, octane = gasoline()
    octane_first = octane[0]
    assert 80 < octane_first < 95, "the columns of the file are not what this test takes them for"
    changed = 1.04 * (0.5 * spectra + 0.5 * np.roll(spectra, 1, axis=1))
    changed[:, 0] = 1.04 * spectra[:, 0]
    order = np.random.default_rng(20260301).permutation(len(octane))
    train, rest = order[:36], order[36:]
    model = PLS(n_factors=4).fit(spectra[train], octane[train])
    chosen = train[np.argsort(octane[train], kind="stable")[np.linspace(0, 35, 8).round().astype(int)]]
    mapped = piecewise_map(spectra[chosen], changed[chosen], vector=model.coefficients_[-1])

    def rmsep(values: np.ndarray) -> float:
        return float(np.sqrt(np.mean((model.predict(values) - octane[rest]) ** 2)))

    untouched, damaged = rmsep(spectra[rest]), rmsep(changed[rest])
    assert damaged > 2 * untouched  # known-bad control: without standardisation
    assert rmsep(mapped.transform(changed[rest])) < 1.2 * untouched
