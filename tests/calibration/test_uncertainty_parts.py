"""Parts of the error where they are known because they were put in."""

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.uncertainty_parts import NO_LABORATORY, ONE_SPECTRUM, OVERSTATED
from quant.errors import SampleMismatchError
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

RECIPE = "[regression]\nfactors = 1\n"
SCAN, PACK, LABORATORY = 0.03, 0.08, 0.05


def simulated(rng, n=40, packs=2, scans=2, laboratory=LABORATORY):
    """One band; packings differ in its height, scans in noise, values in the laboratory's error."""
    axis = np.linspace(1800.0, 1600.0, 41)
    band = np.exp(-(((axis - 1700) / 20) ** 2))
    truth = rng.uniform(1, 9, n)
    content = truth[:, None, None] + rng.normal(0, PACK, (n, packs, 1)) + np.zeros((n, packs, scans))
    noise = SCAN * np.linalg.norm(band) * rng.normal(0, 1, (n * packs * scans, 41))
    ids = [f"S{i:02d}" for i in range(n) for _ in range(packs * scans)]
    notes = [{"pack": str(p)} for _ in range(n) for p in range(packs) for _ in range(scans)]
    table = ReferenceTable(
        list(dict.fromkeys(ids)),
        [Analyte("acid", "% m/m", laboratory)],
        (truth + rng.normal(0, laboratory, n))[:, None],
    )
    spectra = content.reshape(-1, 1) * band + noise
    return pair_samples(SpectraSet(spectra, SpectralAxis(axis, "cm-1"), ids, notes=notes), table)


def test_scans_and_packs_come_apart(make_recipe):
    rng = np.random.default_rng(20261201)
    recipe = make_recipe(f'{RECIPE}[uncertainty]\npacking = "pack"')
    scans, packs = [], []
    for _ in range(20):
        found = calibrate(recipe, simulated(rng)).analytes[0].audit.uncertainty
        scans.append(found.replicates.scan_variance)
        packs.append(found.replicates.pack_variance)
        assert (found.replicates.scan_degrees_of_freedom, found.replicates.pack_degrees_of_freedom) == (80, 40)
    # SD of a variance over 20 sets: σ²·sqrt(2/ν/20); four of them.
    assert np.mean(scans) == pytest.approx(SCAN**2, rel=4 * np.sqrt(2 / 80 / 20))
    assert np.mean(packs) == pytest.approx(PACK**2, rel=4 * np.sqrt(2 / 40 / 20))


def test_parts_add_up_and_the_dominant_one_is_named(make_recipe):
    rng, recipe = np.random.default_rng(20261201), make_recipe(f'{RECIPE}[uncertainty]\npacking = "pack"')
    budgets = []
    for _ in range(20):
        result = calibrate(recipe, simulated(rng, laboratory=0.01)).analytes[0]
        found, known = result.audit.uncertainty, result.uncertainty
        assert found.parts.reference_result == pytest.approx(known.s0**2 * (1 + found.mean_leverage))
        assert found.parts.laboratory == 0.01**2
        assert found.parts.presentation == pytest.approx(found.replicates.variance_of_mean(packs=2, scans=2))
        assert (found.budget is None) == (OVERSTATED in found.remarks)
        if found.budget is not None:
            budgets.append(found.budget)
    assert len(budgets) >= 16  # overstated by more than two standard errors: 2.5 % each, 99.9 % bound of 20
    assert {budget.dominant for budget in budgets} == {"presentation"}
    assert {budget.steps[0].name for budget in budgets} == {"twice the replicates"}
    assert all(sum(budget.shares.values()) == pytest.approx(1.0) for budget in budgets)


def test_white_noise_is_told_apart(make_recipe):
    # The packings' differences have the shape of the band: their covariance makes the prediction scatter much more.
    found = calibrate(make_recipe(RECIPE), simulated(np.random.default_rng(4))).analytes[0]
    assert found.audit.uncertainty.white_noise_sd < 0.8 * found.uncertainty.replicate_sd


def test_what_is_not_known_is_said(make_recipe, make_samples):
    found = calibrate(make_recipe(RECIPE), make_samples()).analytes[0].audit.uncertainty
    assert found.remarks == (ONE_SPECTRUM, NO_LABORATORY)
    assert found.replicates is found.white_noise_sd is found.corrected_cross_validation is None
    assert {step.name for step in found.budget.steps} == {"twice the standards", "standards over twice the range"}
    over = calibrate(make_recipe(RECIPE), make_samples(laboratory_error=9.0)).analytes[0].audit.uncertainty
    assert OVERSTATED in over.remarks
    assert over.budget is None


def test_a_packing_note_has_to_be_there(make_recipe, make_samples):
    with pytest.raises(SampleMismatchError, match="packing = 'pack' under"):
        calibrate(make_recipe(f'{RECIPE}[uncertainty]\npacking = "pack"'), make_samples(replicates=2))
