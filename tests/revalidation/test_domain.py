"""Inside the domain or not."""

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.errors import QuantityError
from quant.model.calibration import Calibration
from quant.prediction.predict import predict
from quant.recipe.load import recipe_from_text
from quant.revalidation.domain import domain_evidence
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

RECIPE = 'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\nunit = "% m/m"\n'
CALIBRATED = np.concatenate([np.linspace(1.0, 3.0, 12), np.linspace(7.0, 9.0, 12)])  # with a gap in the middle


def spectra_of(values: np.ndarray, seed: int, resolution: str = "4", extra: float = 0.0) -> SpectraSet:
    rng = np.random.default_rng(seed)
    axis = np.linspace(1800.0, 1600.0, 41)
    bands = np.stack([np.exp(-(((axis - centre) / 15) ** 2)) for centre in (1730.0, 1670.0, 1700.0)])
    content = np.stack([values, rng.uniform(4.5, 5.5, values.size), np.full(values.size, extra)], axis=1)
    spectra = 0.1 * content @ bands + rng.normal(0, 2e-3, (values.size, 41))
    ids = [f"S{i + 1:02d}" for i in range(values.size)]
    return SpectraSet(spectra, SpectralAxis(axis, "cm-1"), ids, notes=[{"resolution": resolution}] * values.size)


@pytest.fixture(scope="module")
def standards() -> SpectraSet:
    return spectra_of(CALIBRATED, 1)


@pytest.fixture(scope="module")
def model(standards: SpectraSet) -> Calibration:
    table = ReferenceTable(list(standards.sample_ids), [Analyte("acid", "% m/m")], CALIBRATED[:, None])
    return calibrate(recipe_from_text(RECIPE + "[regression]\nfactors = 2"), pair_samples(standards, table)).model


def test_ordinary_samples_are_inside(model: Calibration, standards: SpectraSet) -> None:
    spectra = spectra_of(np.array([1.5, 2.5, 7.5, 8.5]), 2)
    found = domain_evidence(model, spectra, standards)
    assert found.inside
    assert found.acquisition == ""
    assert found.n_outside == 0
    assert all(row.nearest_ratio is not None for row in found.rows)
    assert "4 check samples" in str(found)


def test_verdict_and_ratios_are_those_of_prediction(model: Calibration) -> None:
    spectra = spectra_of(np.array([1.5, 8.5, 20.0]), 2, extra=0.3)
    for row, predicted in zip(domain_evidence(model, spectra).rows, predict(model, spectra).predictions, strict=True):
        assert row.verdict == predicted.applicability
        assert row.leverage_ratio == pytest.approx(predicted.leverage)
        assert row.residual_ratio == pytest.approx(predicted.residual)
        leverage = row.leverage_ratio * model.limits.leverage_warn
        assert row.t_squared == pytest.approx((model.n_samples - 1) * (leverage - 1 / model.n_samples))
        assert row.nearest_ratio is None


def test_a_new_band_lies_outside_by_the_residual(model: Calibration) -> None:
    found = domain_evidence(model, spectra_of(np.array([2.0, 8.0]), 3, extra=2.0))
    assert not found.inside
    assert found.n_outside == 2
    assert found.median_residual_ratio > 3
    assert "residual" in found.words[0]


def test_a_gap_between_the_standards_is_seen_by_the_nearest_neighbour(
    model: Calibration, standards: SpectraSet
) -> None:
    middle = spectra_of(np.array([5.0]), 4)
    seen, unseen = domain_evidence(model, middle, standards).rows[0], domain_evidence(model, middle).rows[0]
    assert seen.verdict == "warning"
    assert seen.nearest_ratio is not None
    assert seen.nearest_ratio > 1.0
    assert "in a gap between the calibration standards" in seen.reasons
    assert unseen.verdict == "applicable"  # leverage is least in the middle


def test_another_resolution_is_reported_not_refused(model: Calibration) -> None:
    found = domain_evidence(model, spectra_of(np.array([2.0, 8.0]), 2, resolution="8"))
    assert not found.inside
    assert "resolution is 8" in found.acquisition
    assert found.words[0] == found.acquisition


def test_another_quantity_is_refused(model: Calibration) -> None:
    spectra = spectra_of(np.array([2.0]), 2)
    with pytest.raises(QuantityError):
        domain_evidence(model, SpectraSet(10.0**-spectra.values, spectra.axis, spectra.sample_ids, "transmittance"))
