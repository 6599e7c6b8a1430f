"""Diagnostics on sets in which it is known what is wrong."""

import numpy as np
import pytest
from scipy import stats

from quant.calibration.calibrate import calibrate
from quant.regression.pls import PLS
from quant.spectra.reference_table import ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

RECIPE = "[regression]\nfactors = 2\n"
BAND = '[regression]\nmethod = "band_area"\nbands = [{ signal = "height_at", position = 1730 }]\n'


@pytest.fixture
def diagnosed(make_recipe):
    return lambda samples, tables=RECIPE: calibrate(make_recipe(tables), samples).analytes[0].audit.diagnostics


def spoilt(samples, *, value=None, band=None):
    """The samples with a wrong value of S05, or a foreign band in its spectrum."""
    spectra, values = samples.spectra, samples.values.copy()
    ordinates = spectra.values.copy()
    if value is not None:
        values[4] += value
    if band is not None:
        ordinates[4] += band * np.exp(-(((spectra.axis.values - 1640) / 8) ** 2))
    table = ReferenceTable(samples.sample_ids, samples.analytes, values)
    return pair_samples(SpectraSet(ordinates, spectra.axis, spectra.sample_ids), table)


def test_a_clean_set_names_few(diagnosed, make_samples):
    named = [len(diagnosed(make_samples(30, seed=seed)).outstanding) for seed in range(10)]
    # Five looks at 1 % each, 300 samples; leverage of designed values cannot stand out: 99.9 % bound of 5 %.
    assert sum(named) <= stats.binom.ppf(0.999, 300, 0.05)


def test_a_wrong_value_and_a_foreign_band_are_named(diagnosed, make_samples):
    samples = make_samples(30)
    [wrong] = [row for row in diagnosed(spoilt(samples, value=2.0)).outstanding if row.sample == "S05"]
    assert any(reason.startswith("studentised error") for reason in wrong.reasons)
    [foreign] = [row for row in diagnosed(spoilt(samples, band=0.1)).outstanding if row.sample == "S05"]
    assert any(reason.startswith("left-out residual spectrum") for reason in foreign.reasons)


def test_nothing_is_removed(make_recipe, make_samples):
    result = calibrate(make_recipe(RECIPE), spoilt(make_samples(30), value=2.0)).analytes[0]
    assert result.n_samples == 30
    assert result.left_out == ()


def test_figures_by_definition(make_recipe, make_samples):
    samples = make_samples(20)
    result = calibrate(make_recipe(RECIPE), samples).analytes[0]
    found, X, y = result.audit.diagnostics, samples.spectra.values, samples.values[:, 0]
    model = PLS(2).fit(X, y)
    scores = (X - X.mean(axis=0)) @ model.rotations_
    spread = np.linalg.inv(np.cov(scores.T))
    assert found.t_squared == pytest.approx(np.einsum("na,ab,nb->n", scores, spread, scores))
    gaps = np.array([[(a - b) @ np.linalg.inv(scores.T @ scores) @ (a - b) for b in scores] for a in scores])
    np.fill_diagonal(gaps, np.inf)
    assert found.nearest == pytest.approx(gaps.min(axis=1))
    assert found.gap_limit == pytest.approx(gaps.min(axis=1).max())
    # VIP: mean of squares is 1; the variance that each factor explains weighs its squared weights.
    assert np.mean(found.vip**2) == pytest.approx(1.0)
    b = model.coefficients_[-1]
    centred = X - X.mean(axis=0)
    t = centred @ b / np.linalg.norm(b)
    p = centred.T @ t / (t @ t)
    explained = np.outer(t, p)
    ratio = (explained**2).sum(axis=0) / ((centred - explained) ** 2).sum(axis=0)
    assert found.selectivity_ratio == pytest.approx(ratio)
    each = np.array([PLS(2).fit(np.delete(X, i, 0), np.delete(y, i)).coefficients_[-1] for i in range(20)])
    expected = np.sqrt(19 / 20 * ((each - b) ** 2).sum(axis=0))
    assert found.vector_error == pytest.approx(expected, rel=1e-4)


def test_a_bent_line_and_repeated_levels(diagnosed, make_samples):
    values = np.repeat(np.linspace(1.0, 9.0, 6), 3)
    straight = diagnosed(make_samples(18, values=values), BAND)
    assert not straight.mandel.curved
    assert straight.lack_of_fit.n_levels == 6
    assert straight.vip is straight.selectivity_ratio is straight.vector_error is None
    bent = make_samples(18, values=values)
    ordinates = bent.spectra.values - 0.02 * bent.spectra.values**2 * 5
    table = ReferenceTable(bent.sample_ids, bent.analytes, bent.values)
    curved = diagnosed(pair_samples(SpectraSet(ordinates, bent.spectra.axis, bent.spectra.sample_ids), table), BAND)
    assert curved.mandel.curved
    assert curved.lack_of_fit.significant


def test_the_joint_test_is_that_of_left_out_and_of_validation_samples(diagnosed, make_samples):
    found = diagnosed(make_samples(24), f'{RECIPE}[validation]\nsamples = ["S01..S06"]')
    assert (found.joint.n, found.joint_validation.n) == (18, 6)
    assert found.joint.inside
