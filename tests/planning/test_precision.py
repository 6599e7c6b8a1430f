import numpy as np
import pytest
from scipy import stats

from quant.errors import ParameterError
from quant.planning.precision import rmsep_precision, validation_size


@pytest.mark.parametrize("n", [5, 20, 36, 100])
def test_limits_are_those_of_chi_square(n):
    found = rmsep_precision(n)
    assert found.low == pytest.approx(100 * (np.sqrt(n / stats.chi2.ppf(0.975, n)) - 1))
    assert found.high == pytest.approx(100 * (np.sqrt(n / stats.chi2.ppf(0.025, n)) - 1))


def test_limits_hold_rmsep_95_times_in_100():
    """σ lies inside RMSEP·(1 + limits) in 95 % of simulated validation sets of normal errors."""
    found = rmsep_precision(20)
    rmsep = np.sqrt((np.random.default_rng(20261201).normal(size=(4000, 20)) ** 2).mean(axis=1))
    held = int(((rmsep * (1 + found.low / 100) <= 1) & (rmsep * (1 + found.high / 100) >= 1)).sum())
    low, high = stats.binom.ppf([0.0005, 0.9995], 4000, 0.95)
    assert low <= held <= high
    halved = int((np.abs(rmsep - 1) <= 0.11).sum())  # known-bad control: ±11 %, half of what 20 samples tell
    assert halved < low


@pytest.mark.parametrize("within", [5.0, 10.0, 20.0, 30.0, 50.0])
def test_the_number_needed_is_the_smallest(within):
    needed = validation_size(20, within).needed
    assert rmsep_precision(needed).high <= within < rmsep_precision(needed - 1).high


def test_the_table_marks_planned_and_needed():
    found = validation_size(24, 30.0)
    counts = [row.n_samples for row in found.table]
    assert counts == sorted({*counts, 24, found.needed})
    lines = str(found).splitlines()
    assert sum("planned" in line for line in lines) == 1
    assert sum("needed for ±30 %" in line for line in lines) == 1
    assert "planned, needed for ±30 %" in str(validation_size(found.needed, 30.0))
    assert "planned" not in str(validation_size(0, 30.0))


def test_too_narrow_a_wish():
    with pytest.raises(ParameterError, match=r"within 0\.1 % takes more than 100000 samples"):
        validation_size(20, 0.1)
