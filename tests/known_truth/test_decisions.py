"""Decisions of whole calibrations on batches of known content: the risk that is stated is the one that is run."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.prediction.decisions import decide_sample, decision_rule
from quant.prediction.predict import evaluate
from quant.prediction.uncertainty import standard_uncertainty
from quant.recipe.load import recipe_from_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

SEED = 20261201  # fixed before the first run
LIMIT, RISK, LABORATORY = 5.0, 0.05, 0.01
AXIS = np.linspace(1800.0, 1600.0, 41)
BANDS = np.stack([np.exp(-(((AXIS - centre) / 15) ** 2)) for centre in (1730.0, 1715.0)])
RECIPE = recipe_from_text(
    'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\nunit = "% m/m"\n'
    '[regression]\nfactors = 2\n[cross_validation]\nscheme = "contiguous_blocks"\nfolds = 8\n'
)


def spectra_of(rng, values, noise):
    content = np.stack([values, rng.uniform(4, 6, values.size)], axis=1)
    return 0.1 * content @ BANDS + rng.normal(0, noise, (values.size, AXIS.size))


def accepted(truth, calibrations, batches, noise, narrower=1.0):
    """Batches accepted out of `calibrations` times `batches`, and the largest uncertainty met.

    `narrower` is the known-bad control: a guard band so many times too small.
    """
    count, largest = 0, 0.0
    for number in range(calibrations):
        rng = np.random.default_rng([SEED, int(10 * truth), number])
        values = rng.uniform(1, 9, 40)
        ids = [f"S{i:02d}" for i in range(40)]
        results = values + rng.normal(0, LABORATORY, 40)
        table = ReferenceTable(ids, [Analyte("acid", "% m/m", LABORATORY)], results[:, None])
        standards = SpectraSet(spectra_of(rng, values, noise), SpectralAxis(AXIS, "cm-1"), ids)
        model = replace(calibrate(RECIPE, pair_samples(standards, table)).model, smallest_decidable=None)
        rule = decision_rule(model, LIMIT, risk=RISK)
        rule = replace(rule, factor=rule.factor / narrower)
        found = evaluate(model, spectra_of(rng, np.full(batches, truth), noise), np.arange(batches), batches)
        for value, error in zip(found.value, found.standard_error, strict=True):
            u = standard_uncertainty(model, float(error))
            largest = max(largest, u)
            decided = decide_sample(model, rule, value=float(value), uncertainty=u, n_spectra=1, applicable=True)
            count += decided["decision"] == "accept"
    return count, largest


def test_at_the_limit_no_more_are_accepted_than_the_risk_allows():
    calibrations, batches = 20, 1000  # 20 000 batches
    count, _ = accepted(LIMIT, calibrations, batches, noise=0.004)
    # Batches of one calibration share its error and its own estimate of u: calibrations are the independent units, and
    # their shares scatter about the risk by up to as much.
    slack = 3 * RISK / np.sqrt(calibrations)
    assert count / (calibrations * batches) <= RISK + slack
    control, _ = accepted(LIMIT, calibrations, 100, noise=0.004, narrower=3.0)
    assert control / (calibrations * 100) > RISK + slack


@pytest.mark.parametrize("noise", [0.004, 0.012])
def test_at_half_the_limit_most_are_accepted(noise):
    count, largest = accepted(LIMIT / 2, 10, 100, noise)
    assert largest <= LIMIT / 10
    assert count >= 0.9 * 10 * 100
