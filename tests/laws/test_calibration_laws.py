"""Laws of calibrating: what must change nothing, what must only change the unit, and who must never see whom."""

from dataclasses import dataclass, replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from quant.calibration.calibrate import calibrate
from quant.calibration.cross_validation import cross_validate
from quant.calibration.folds import make_folds
from quant.calibration.result import AnalyteResult
from quant.prediction.predict import predict
from quant.prediction.result import Prediction
from quant.recipe.load import recipe_from_text
from quant.recipe.schema import Recipe
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import SampleSet, pair_samples
from quant.spectra.spectra_set import SpectraSet

laws = settings(max_examples=6, deadline=None, derandomize=True)

HEAD = 'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\n'
STEPS = {
    "none": "",
    "msc and derivative": '[[preprocessing]]\nstep = "msc"\n'
    '[[preprocessing]]\nstep = "savitzky_golay"\nwindow = 7\nderivative = 1\n',
    "cut and snv": '[[preprocessing]]\nstep = "leave_out_ranges"\nranges = [[1690, 1710]]\n'
    '[[preprocessing]]\nstep = "snv"\n',
}
PLS = "[regression]\nfactors = 2\nmax_factors = 3\n"
BAND = '[regression]\nmethod = "band_area"\nbands = [{ range = [1700, 1760], baseline = [1700, 1760] }]\n'
RECIPES = [*(steps + PLS for steps in STEPS.values()), BAND]
SCHEMES = ["leave_one_out", "random_folds", "contiguous_blocks", "interleaved", "leave_one_group_out"]
NUMBERS = ("value", "standard_error", "low", "high", "residual", "leverage")


@dataclass(frozen=True, repr=False)
class Case:
    """Spectra and values of calibration samples, and new spectra."""

    values: np.ndarray
    spectra: SpectraSet
    groups: tuple[str, ...]
    new: SpectraSet

    def samples(self, **changed: object) -> SampleSet:
        own = replace(self, **changed)
        ids = list(dict.fromkeys(own.spectra.sample_ids))
        place = {f"S{i:02d}": i for i in range(len(own.values))}
        rows = [place[name] for name in ids]
        notes = [{"group": own.groups[i]} for i in rows]
        table = ReferenceTable(ids, [Analyte("acid", "%")], own.values[rows, None], notes)
        return pair_samples(own.spectra, table)


def recipe(tables: str) -> Recipe:
    return recipe_from_text(HEAD + tables)


def spectra_of(rng: np.random.Generator, values: np.ndarray, rows: np.ndarray) -> SpectraSet:
    axis = np.linspace(1800.0, 1600.0, 41)
    bands = np.stack([np.exp(-(((axis - centre) / 15) ** 2)) for centre in (1730.0, 1670.0)])
    content = np.stack([values, rng.uniform(4, 6, values.size)], axis=1)[rows]
    spectra = 0.1 * content @ bands + rng.normal(0, 0.003, (rows.size, axis.size)) + 0.02
    return SpectraSet(spectra, SpectralAxis(axis, "cm-1"), [f"S{i:02d}" for i in rows])


@st.composite
def cases(draw: st.DrawFn, most_replicates: int = 3) -> Case:
    rng = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))
    n = draw(st.integers(10, 16))
    values = rng.permutation(np.linspace(1.0, 9.0, n))
    rows = rng.permutation(np.repeat(np.arange(n), rng.integers(1, most_replicates + 1, n)))  # replicates lie apart
    _, first = np.unique(rows, return_index=True)
    place = np.empty(n, dtype=int)
    place[rows[np.sort(first)]] = np.arange(n)  # samples are numbered in the order in which they first come
    values = values[np.argsort(place)]
    groups = tuple(f"g{i}" for i in rng.permutation(np.arange(n) % 5))
    return Case(
        values, spectra_of(rng, values, place[rows]), groups, spectra_of(rng, rng.uniform(2, 8, 4), np.arange(4))
    )


def numbers(rows: tuple[Prediction, ...]) -> np.ndarray:
    return np.array([[getattr(row, name) for name in NUMBERS] for row in rows])


def outcome(result: AnalyteResult, new: SpectraSet) -> np.ndarray:
    return numbers(predict(result.model, new).predictions)


def close(found: object, expected: object, tolerance: float) -> bool:
    return bool(np.allclose(found, expected, rtol=tolerance, atol=tolerance))


@pytest.mark.parametrize("tables", RECIPES)
@laws
@given(cases())
def test_a_reversed_axis_gives_the_same_prediction(tables, case):
    model = calibrate(recipe(tables), case.samples())["acid"].model
    mirrored = SpectraSet(case.new.values[:, ::-1], case.new.axis.reversed(), case.new.sample_ids)
    assert (numbers(predict(model, mirrored).predictions) == numbers(predict(model, case.new).predictions)).all()
    turned = SpectraSet(case.spectra.values[:, ::-1], case.spectra.axis.reversed(), case.spectra.sample_ids)
    other = calibrate(recipe(tables), case.samples(spectra=turned))["acid"].model
    found, expected = ([row.value for row in predict(each, case.new).predictions] for each in (other, model))
    assert found == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("tables", RECIPES)
@laws
@given(cases(), st.randoms(use_true_random=False))
def test_the_order_of_files_is_irrelevant(tables, case, random):
    order = random.sample(range(len(case.spectra)), len(case.spectra))
    one = recipe(tables + '[cross_validation]\nscheme = "leave_one_out"')
    found = [calibrate(one, case.samples(spectra=spectra))["acid"] for spectra in (case.spectra, case.spectra[order])]
    assert close(found[1].cross_validation.rmsecv, found[0].cross_validation.rmsecv, 1e-9)
    assert found[1].uncertainty.s0 == pytest.approx(found[0].uncertainty.s0, rel=1e-9)
    assert close(outcome(found[1], case.new), outcome(found[0], case.new), 1e-8)


@pytest.mark.parametrize("tables", RECIPES)
@laws
@given(cases(most_replicates=1), st.integers(2, 4))
def test_exact_copies_of_spectra_change_nothing(tables, case, copies):
    one = recipe(tables + '[cross_validation]\nscheme = "leave_one_out"')
    copied = case.spectra[np.repeat(np.arange(len(case.spectra)), copies)]
    found = [calibrate(one, case.samples(spectra=spectra))["acid"] for spectra in (case.spectra, copied)]
    assert close(found[1].cross_validation.rmsecv, found[0].cross_validation.rmsecv, 1e-9)
    new = case.new[np.repeat(np.arange(4), copies)]
    assert close(outcome(found[1], new), outcome(found[0], case.new), 1e-8)
    assert found[1].uncertainty.replicate_sd == pytest.approx(0, abs=1e-10)
    # Copies of a single sample: it counts as one all the same.
    once = calibrate(one, case.samples(spectra=case.spectra[[0, 0, *range(len(case.spectra))]]))["acid"]
    assert close(once.cross_validation.rmsecv, found[0].cross_validation.rmsecv, 1e-9)


@pytest.mark.parametrize("tables", RECIPES)
@laws
@given(cases(), st.sampled_from([1000.0, 1e-3]))
def test_another_unit_of_the_values_changes_the_unit_only(tables, case, factor):
    one = recipe(tables)
    plain, scaled = (
        calibrate(one, case.samples(values=values))["acid"] for values in (case.values, factor * case.values)
    )
    assert close(scaled.cross_validation.rmsecv / factor, plain.cross_validation.rmsecv, 1e-9)
    assert scaled.factors == plain.factors
    assert scaled.cross_validation.choices == plain.cross_validation.choices
    assert close(scaled.cross_validation.q2, plain.cross_validation.q2, 1e-9)
    unit = np.array([factor] * 4 + [1, 1])  # residual and leverage have no unit of the analyte
    assert close(outcome(scaled, case.new) / unit, outcome(plain, case.new), 1e-8)
    assert [row.applicability for row in predict(scaled.model, case.new).predictions] == [
        row.applicability for row in predict(plain.model, case.new).predictions
    ]


@pytest.mark.parametrize("scheme", SCHEMES)
@laws
@given(cases(), st.integers(0, 9))
def test_a_sample_left_out_is_not_seen(scheme, case, sample):
    """Whatever value a sample has, and all of its group: its left-out predictions stay."""
    text = STEPS["msc and derivative"] + PLS
    grouped = f'[cross_validation]\nscheme = "{scheme}"\nfolds = 3\nrepeats = 2\ngroup = "group"'
    mates = np.array(case.groups) == case.groups[sample]
    wrong = np.where(mates, case.values + 100.0, case.values)
    before, after = (
        cross_validate(case.samples(values=values), recipe(text + grouped)) for values in (case.values, wrong)
    )
    assert (before.predicted[:, :, mates] == after.predicted[:, :, mates]).all()
    assert (before.predicted[:, :, ~mates] != after.predicted[:, :, ~mates]).any()


@pytest.mark.parametrize("scheme", SCHEMES)
@laws
@given(cases(), st.integers(0, 2**16))
def test_a_group_is_never_split(scheme, case, seed):
    text = f'[cross_validation]\nscheme = "{scheme}"\nfolds = 3\nrepeats = 2\ngroup = "group"\nseed = {seed}'
    for labels in make_folds(case.samples(), recipe(text).cross_validation).repeats:
        fold_of = {(group, label) for group, label in zip(case.groups, labels.tolist(), strict=True)}
        assert len(fold_of) == len(set(case.groups))


@pytest.mark.parametrize("split", ["kennard_stone", "random"])
@laws
@given(cases(), st.integers(0, 2**16))
def test_replicates_are_never_on_both_sides_of_a_split(split, case, seed):
    text = f'{PLS}[validation]\nsplit = "{split}"\nfraction = 0.3\n[cross_validation]\nseed = {seed}'
    found = calibrate(recipe(text), case.samples())["acid"]
    assert not set(found.sample_ids) & set(found.validation.sample_ids)
    assert len(found.sample_ids) + len(found.validation.sample_ids) == len(case.values)
    # What stands on the other side has no influence: whatever values it has, the model stays.
    aside = np.isin([f"S{i:02d}" for i in range(len(case.values))], found.validation.sample_ids)
    other = calibrate(recipe(text), case.samples(values=np.where(aside, -50.0 - case.values, case.values)))["acid"]
    assert other.validation.sample_ids == found.validation.sample_ids
    assert (other.validation.predicted == found.validation.predicted).all()


@laws
@given(cases(), st.integers(0, 2**16))
def test_a_seed_gives_the_same_again_and_another_seed_something_else(case, seed):
    def drawn(number: int) -> np.ndarray:
        text = f'{PLS}[cross_validation]\nscheme = "random_folds"\nfolds = 5\nrepeats = 2\nseed = {number}'
        return cross_validate(case.samples(), recipe(text)).predicted

    assert (drawn(seed) == drawn(seed)).all()
    assert (drawn(seed) != drawn(seed + 1)).any()


@laws
@given(cases())
def test_a_constant_added_to_the_values_moves_predictions_by_it(case):
    plain, moved = (
        calibrate(recipe(PLS), case.samples(values=values))["acid"] for values in (case.values, case.values + 30)
    )
    assert close(moved.cross_validation.rmsecv, plain.cross_validation.rmsecv, 1e-8)
    shift = np.array([30.0, 0, 30.0, 30.0, 0, 0])
    assert close(outcome(moved, case.new) - shift, outcome(plain, case.new), 1e-7)
