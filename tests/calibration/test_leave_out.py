"""Both ways to leave samples out agree where both apply."""

import numpy as np
import pytest

from quant.calibration.cross_validation import cross_validate
from quant.calibration.folds import make_folds
from quant.calibration.leave_out import all_folds_at_once, refit_every_fold
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.preprocessing.snv import SNV
from quant.recipe.load import recipe_from_text
from quant.recipe.schema import CrossValidationTable
from quant.regression.pls import PLS
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

SCHEMES = [
    CrossValidationTable(scheme="leave_one_out"),
    CrossValidationTable(scheme="random_folds", folds=5, repeats=2),
    CrossValidationTable(scheme="contiguous_blocks", folds=4),
    CrossValidationTable(scheme="interleaved", folds=3),
    CrossValidationTable(scheme="leave_one_group_out", group="batch"),
]


@pytest.fixture
def samples():
    """Return 14 samples, one to three spectra each, with a batch."""
    rng = np.random.default_rng(8)
    count, factors = rng.integers(1, 4, 14), rng.normal(size=(14, 3))
    values = factors @ [1.0, 0.5, -0.2] + rng.normal(0, 0.02, 14)
    rows = np.repeat(factors @ rng.normal(size=(3, 40)), count, axis=0)
    spectra = 5 + rows + rng.normal(0, 0.05, rows.shape)
    ids = [f"S{i}" for i in range(14)]
    table = ReferenceTable(ids, [Analyte("acid")], values[:, None], [{"batch": f"B{i // 4}"} for i in range(14)])
    return pair_samples(SpectraSet(spectra, SpectralAxis(np.arange(40.0)), np.repeat(ids, count).tolist()), table)


@pytest.mark.parametrize("scheme", SCHEMES, ids=lambda scheme: scheme.scheme)
def test_all_folds_at_once_equal_refitting_every_fold(samples, scheme):
    folds, steps = make_folds(samples, scheme), [SNV(), SavitzkyGolay(5, 2, 1)]
    arguments = (samples, samples.values[:, 0], folds, steps, PLS(6), 7)
    fast, slow = all_folds_at_once(*arguments), refit_every_fold(*arguments)
    for name in ("predicted", "leverage", "residual", "replicate_variance"):
        np.testing.assert_allclose(getattr(fast, name), getattr(slow, name), rtol=1e-8, atol=1e-10)
    assert (fast.stopped, fast.notes) == (slow.stopped, slow.notes)


@pytest.mark.parametrize(("step", "way"), [("snv", "all_folds_at_once"), ("msc", "refit_every_fold")])
def test_a_step_that_learns_takes_the_refitting_way(samples, monkeypatch, step, way):
    taken = []
    for name in ("all_folds_at_once", "refit_every_fold"):
        plain = {"all_folds_at_once": all_folds_at_once, "refit_every_fold": refit_every_fold}[name]

        def noted(*arguments, name=name, plain=plain):
            taken.append(name)
            return plain(*arguments)

        monkeypatch.setattr(f"quant.calibration.cross_validation.{name}", noted)
    recipe = recipe_from_text(
        f'title = "t"\n[spectra]\nfiles = ["a.csv"]\n[reference]\nfile = "a.csv"\n[[analyte]]\nname = "acid"\n'
        f'[[preprocessing]]\nstep = "{step}"'
    )
    cross_validate(samples, recipe)
    assert taken == [way]
