"""The expected error of prediction is what PLS calibrations on the planned standards make in simulation."""

import numpy as np
import pytest

from quant.planning.expected_error import expected_errors
from quant.planning.load import plan_from_text
from quant.planning.plan import plan
from quant.regression.pls import PLS
from quant.spectra.simulate import mixture_spectra, pure_spectra
from quant.spectra.simulate_substances import ACETONE, ACETONITRILE, ETHYL_ACETATE, TOLUENE, WATER

SEED = 20261201  # fixed before the first run
SUBSTANCES = [component.scaled(0.01) for component in (ACETONE, ACETONITRILE, ETHYL_ACETATE, TOLUENE, WATER)]
AXIS = np.arange(1800.0, 650.0, -2.0)
HEAD = 'title = "t"\nunit = "% m/m"\nstandards = 24\n'
MIXTURE = '[mixture]\ntotal = 100\nbalance = "water"\n'
SETS = 60


def planned(closed):
    """Return components, standards and validation samples of four solvents; closed: water is the balance."""
    used = SUBSTANCES if closed else SUBSTANCES[:4]
    tables = "".join(f'[[component]]\nname = "{part.name}"\nlow = 0.5\nhigh = 5\n' for part in SUBSTANCES[:4])
    result = plan(plan_from_text(HEAD + tables + (MIXTURE if closed else "")))
    assert list(result.components) == [part.name for part in used]
    return used, result.standards, result.validation


def simulated(used, standards, samples, noise, laboratory):
    """Return the root mean square errors against truth and against reference values, over many calibrations."""
    rng = np.random.default_rng([SEED, len(used)])
    clean, new = (mixture_spectra(used, amounts, AXIS) for amounts in (standards, samples))
    squares = np.zeros((2, len(used)))
    for _ in range(SETS):
        X, X_new = (spectra + rng.normal(0, noise, spectra.shape) for spectra in (clean, new))
        y, y_new = (amounts + rng.normal(0, laboratory, amounts.shape) for amounts in (standards, samples))
        for c in range(len(used)):
            found = PLS(n_factors=4).fit(X, y[:, c]).predict(X_new)
            squares[:, c] += [((found - truth[:, c]) ** 2).mean() / SETS for truth in (samples, y_new)]
    return np.sqrt(squares)


@pytest.mark.parametrize("closed", [False, True], ids=["free totals", "fixed total"])
@pytest.mark.parametrize(
    ("noise", "laboratory"), [(0.0005, 0.05), (0.002, 0.05)], ids=["laboratory error rules", "noise rules"]
)
def test_expected_errors_agree_with_simulation_within_15_percent(closed, noise, laboratory):
    used, standards, samples = planned(closed)
    expected = expected_errors(
        pure_spectra(used, AXIS),
        [part.name for part in used],
        standards,
        samples,
        noise,
        [(laboratory, "as simulated")] * len(used),
        closed=closed,
    )
    truth, reference = simulated(used, standards, samples, noise, laboratory)
    assert [entry.against_truth for entry in expected] == pytest.approx(truth.tolist(), rel=0.15)
    assert [entry.against_reference for entry in expected] == pytest.approx(reference.tolist(), rel=0.15)
    if noise > 0.001:
        # Known-bad control: without the pull to the mean the textbook formula is off by more than that.
        h = expected[0].leverage
        textbook = [np.sqrt(e.noise_part**2 * (1 + h) + laboratory**2 * h) for e in expected[:4]]
        assert all(short < 0.85 * found for short, found in zip(textbook, truth[:4], strict=False))
