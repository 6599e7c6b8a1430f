"""Apparent and corrected RMSEP, and the parts of one prediction's variance."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.statistics.error_parts import corrected_rmsep, error_parts
from quant.statistics.intervals import NOT_RESOLVABLE, standard_error
from quant.statistics.quantiles import rmse_confidence_interval


def test_the_laboratory_comes_out_by_squares():
    found = corrected_rmsep(0.5, 0.3, 40)
    assert found.corrected == pytest.approx(0.4)
    low, high = rmse_confidence_interval(0.5, 40)
    assert [found.low, found.high] == pytest.approx([np.sqrt(low**2 - 0.09), np.sqrt(high**2 - 0.09)])
    assert found.note == ""
    assert corrected_rmsep(0.5, 0.0, 40).corrected == 0.5


def test_mostly_laboratory_error_is_not_resolvable():
    found = corrected_rmsep(0.4, 0.29, 40)
    assert (found.corrected, found.low, found.high, found.note) == (None, None, None, NOT_RESOLVABLE)
    assert NOT_RESOLVABLE in str(found)
    few = corrected_rmsep(0.4, 0.28, 5)  # resolvable, but its interval reaches down to nothing
    assert few.corrected is not None
    assert few.low is None


def test_the_corrected_figure_is_that_against_true_values():
    # Faber & Kowalski 1997 (from memory): predictions look worse than they are, by the reference values' errors.
    rng = np.random.default_rng(1)
    truth = rng.uniform(0, 10, 20_000)
    predicted, reference = truth + 0.4 * rng.normal(size=20_000), truth + 0.3 * rng.normal(size=20_000)
    apparent = np.sqrt(np.mean((predicted - reference) ** 2))
    found = corrected_rmsep(apparent, 0.3, 20_000)
    assert found.low < np.sqrt(np.mean((predicted - truth) ** 2)) < found.high
    assert not found.low < apparent < found.high


def test_the_parts_add_up_to_the_variance_of_the_prediction():
    s0, h = 0.5, 0.2
    one = error_parts(s0**2, h, presentation=0.06, presentation_calibration=0.02, laboratory=0.04)
    assert one.unexplained == pytest.approx(0.25 - 0.02 - 0.04)
    assert one.calibration == pytest.approx(0.05)
    assert one.reference_result == pytest.approx(standard_error(s0, h, added=0.06 - 0.02) ** 2)
    assert one.true_value == pytest.approx(one.reference_result - 0.04)
    overstated = error_parts(0.05, h, presentation=0.02, presentation_calibration=0.02, laboratory=0.04)
    assert overstated.unexplained == pytest.approx(-0.01)  # told, not clipped


def test_impossible_questions_are_refused():
    with pytest.raises(ParameterError, match="reference_sd"):
        corrected_rmsep(0.5, -0.1, 10)
    with pytest.raises(ParameterError, match="0 or more"):
        error_parts(0.1, -0.2, presentation=0, presentation_calibration=0, laboratory=0)
