"""Criteria of acceptance: each met on its bound, none beyond; what they make of a validation and of the exit code."""

import numpy as np
import pytest

from quant.calibration.acceptance import check_acceptance
from quant.calibration.calibrate import calibrate
from quant.calibration.requirement import MET, NOT_MET, NOT_TOLD
from quant.recipe.audit_schema import AcceptanceTable
from quant.statistics.figures import figures_of_merit

# published-values 2.2 [computed]: bias -0.325, SEP 0.310530, RMSEP 0.435890, slope of y on ŷ 1.039286; bias significant
PREDICTED = np.array([2.0, 4, 6, 8, 10, 12, 14, 16])
REFERENCE = np.array([2.3, 3.9, 6.2, 8.4, 10.1, 12.6, 14.2, 16.9])
INSIDE = np.array([True] * 7 + [False])


def verdicts(predicted=PREDICTED, **criteria):
    figures = figures_of_merit(predicted, REFERENCE, unit="% m/m", kind="RMSEP")
    return [row.verdict for row in check_acceptance(AcceptanceTable(**criteria), figures, INSIDE)]


@pytest.mark.parametrize(
    ("criterion", "met", "beyond"),
    [
        ("max_rmsep", 0.43590, 0.43588),
        ("max_bias", 0.3251, 0.3249),
        ("max_sep", 0.31054, 0.31052),
        ("slope_within", 0.03929, 0.03928),
        ("min_r2", 0.99, 0.9999),
        ("min_rpd", 10.0, 20.0),
        ("min_samples", 8, 9),
        ("min_inside", 0.875, 0.876),
    ],
)
def test_each_bound(criterion, met, beyond):
    assert verdicts(**{criterion: met}) == [MET]
    assert verdicts(**{criterion: beyond}) == [NOT_MET]


def test_a_bias_that_may_not_be():
    assert verdicts(bias_not_significant=True) == [NOT_MET]
    assert verdicts(REFERENCE + np.tile([0.1, -0.1], 4), bias_not_significant=True) == [MET]


def test_what_cannot_be_told_is_not_met():
    figures = figures_of_merit([1.0], [1.1], unit="", kind="RMSEP")
    rows = check_acceptance(AcceptanceTable(max_sep=1.0), figures, np.array([True]))
    assert [row.verdict for row in rows] == [NOT_TOLD]


def test_it_decides_on_the_calibration(make_recipe, make_samples):
    samples, independent = make_samples(24), '[validation]\nsamples = ["S01..S06"]\n'
    pls = "[regression]\nfactors = 2\n"
    good = calibrate(make_recipe(f"{pls}{independent}[acceptance]\nmax_rmsep = 0.5"), samples)
    assert good.accepted
    assert good.analytes[0].validation.accepted
    assert "RMSEP: " in str(good.analytes[0].validation)
    bad = calibrate(make_recipe(f"{pls}{independent}[acceptance]\nmax_rmsep = 1e-6"), samples)
    assert not bad.accepted
    internal = calibrate(make_recipe(f'{pls}[validation]\nsplit = "random"\n[acceptance]\nmax_rmsep = 0.5'), samples)
    assert not internal.accepted  # an internal test proves nothing about separate material
    assert not calibrate(make_recipe(f"{pls}[acceptance]\nmax_rmsep = 0.5"), samples).accepted
    assert calibrate(make_recipe(pls), samples).accepted
