"""The error budget: shares, slopes, and what a simulated calibration really gains."""

from dataclasses import replace

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.error_budget import Situation, error_budget, expected_rmsep

CASE = Situation(
    presentation=0.04, unexplained=0.01, laboratory=0.09, n_standards=20, n_factors=3, replicates=2, laboratory_values=1
)


def test_the_formula_by_hand():
    # h = 4/20 = 0.2; V = 0.02 + 0.01 + 0.2·(0.02 + 0.01 + 0.09) = 0.054.
    found = error_budget(CASE)
    assert found.rmsep == pytest.approx(np.sqrt(0.054))
    assert list(found.shares.values()) == pytest.approx([0.02 / 0.054, 0.01 / 0.054, 0.018 / 0.054, 0.006 / 0.054])
    assert found.dominant == "presentation"
    # Each doubled: lab 0.045, replicates 0.042, standards 0.042, range h = 1.75/20: 0.0405.
    squares = {step.name: step.rmsep**2 for step in found.steps}
    assert squares == pytest.approx(
        {
            "twice the laboratory values a standard": 0.045,
            "twice the replicates": 0.042,
            "twice the standards": 0.042,
            "standards over twice the range": 0.0405,
        }
    )
    assert found.steps[0].name == "standards over twice the range"
    assert "share of presentation" in str(found)


def test_elasticities_are_the_formulas_slopes():
    names = {
        "twice the laboratory values a standard": "laboratory_values",
        "twice the replicates": "replicates",
        "twice the standards": "n_standards",
        "standards over twice the range": "relative_range",
    }
    case = replace(CASE, laboratory_values=1.5, relative_range=1.3)
    for step in error_budget(case).steps:
        field, eps = names[step.name], 1e-5
        up, down = (
            expected_rmsep(replace(case, **{field: getattr(case, field) * np.exp(change)})) for change in (eps, -eps)
        )
        assert step.elasticity == pytest.approx(np.log(up / down) / (2 * eps), rel=1e-6)


@pytest.mark.parametrize(
    "change", [{}, {"laboratory": 0.36}, {"replicates": 4}, {"n_standards": 40}, {"relative_range": 2.0}]
)
def test_the_expected_error_is_that_of_simulated_calibrations(change):
    # Truth linear in three latent variables: errors of each standard p/m + q + l; new samples spread over w = 1.
    case = replace(CASE, **change)
    rng = np.random.default_rng(9)
    n, squares = int(case.n_standards), []
    sd = np.sqrt(case.presentation / case.replicates + case.unexplained)
    for _ in range(600):
        design = np.linalg.qr(np.column_stack([np.ones(n), rng.normal(size=(n, 3))]))[0][:, 1:] * np.sqrt(n)
        design *= case.relative_range
        errors = sd * rng.normal(size=n) + np.sqrt(case.laboratory) * rng.normal(size=n)
        coefficients = np.linalg.lstsq(np.column_stack([np.ones(n), design]), errors)[0]
        new = np.column_stack([np.ones(20), rng.normal(size=(20, 3))])
        squares.append(np.mean((new @ coefficients + sd * rng.normal(size=20)) ** 2))
    error = np.std(squares) / np.sqrt(600)
    assert np.mean(squares) == pytest.approx(expected_rmsep(case) ** 2, abs=3.3 * error)


def test_impossible_questions_are_refused():
    with pytest.raises(ParameterError, match="0 or more"):
        expected_rmsep(replace(CASE, presentation=-0.1))
    with pytest.raises(ParameterError, match="range"):
        expected_rmsep(replace(CASE, relative_range=0.0))
    with pytest.raises(NotEnoughDataError, match="no error to split"):
        error_budget(replace(CASE, presentation=0.0, unexplained=0.0, laboratory=0.0))
