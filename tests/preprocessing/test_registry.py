"""What every registered step has to keep: names, scikit-learn's contract, the saved state."""

import json
import re

import numpy as np
import pytest
from sklearn.base import clone
from sklearn.cross_decomposition import PLSRegression
from sklearn.model_selection import GridSearchCV
from sklearn.pipeline import Pipeline
from sklearn.utils.estimator_checks import check_estimator

from quant.preprocessing.absorbance import Absorbance
from quant.preprocessing.asymmetric_baseline import AsymmetricBaseline
from quant.preprocessing.baseline import StraightBaseline
from quant.preprocessing.centre import MeanCentre
from quant.preprocessing.detrend import Detrend
from quant.preprocessing.emsc import EMSC
from quant.preprocessing.gap_derivative import GapDerivative
from quant.preprocessing.msc import MSC
from quant.preprocessing.normalise import NormaliseBand, UnitArea, UnitLength
from quant.preprocessing.orthogonal_removal import OrthogonalRemoval
from quant.preprocessing.ranges import KeepRanges, LeaveOutRanges
from quant.preprocessing.registry import STEPS
from quant.preprocessing.resample import Resample
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.preprocessing.scale import ScaleColumns
from quant.preprocessing.snv import SNV

AXIS = np.arange(1800.0, 1600.0, -4.0)
SPECTRA = 0.5 + 0.4 * np.random.default_rng(6).random((12, AXIS.size))  # fit for Absorbance, too
BANDS = np.stack([np.exp(-(((AXIS - centre) / 12) ** 2)) for centre in (1760.0, 1700.0, 1640.0)])
CONFIGURED = [
    Absorbance(AXIS),
    KeepRanges([[1800, 1700], [1650, 1620]], AXIS),
    LeaveOutRanges([(1750, 1700)], AXIS),
    Resample(1790, 1610, 2.5, AXIS),
    SNV(),
    MSC(),
    EMSC(3, BANDS[:2], BANDS[2:], AXIS),
    UnitLength(),
    UnitArea(AXIS),
    NormaliseBand("height", (1780, 1720), axis=AXIS),
    SavitzkyGolay(9, 3, 2, AXIS),
    GapDerivative(3, 5, 2, AXIS),
    StraightBaseline(1790, 1622, AXIS),
    Detrend(3, AXIS),
    AsymmetricBaseline(1e3, 0.05, 8, AXIS),
    OrthogonalRemoval(BANDS, 2),
    MeanCentre(),
    ScaleColumns(),
]

# Checks that scikit-learn runs on a step with these parameters, and that meet a refusal we intend:
# - Absorbance: the checks' spectra are random numbers from zero or below to above 1.5, which is no transmittance.
# - SavitzkyGolay with its default window of 11: the checks' spectra have 1 to 10 points.
# - SNV, MSC, EMSC, UnitLength, UnitArea: `check_estimators_dtypes` cuts random numbers down to integers, which makes
#   one spectrum all zero: flat.
# - NormaliseBand: the checks' spectra are random numbers about zero; in some of them no band stands above zero.
# - EMSC and Detrend of degree 2, GapDerivative, AsymmetricBaseline: the checks' spectra have 2 or 3 points, too few to
#   bend.
# - OrthogonalRemoval: nobody gives it the spectra that it is to remove.
TOO_WIDE = {
    "check_fit_score_takes_y",
    "check_estimators_overwrite_params",
    "check_dont_overwrite_parameters",
    "check_estimators_fit_returns_self",
    "check_readonly_memmap_input",
    "check_n_features_in_after_fitting",
    "check_positive_only_tag_during_fit",
    "check_estimators_dtypes",
    "check_dtype_object",
    "check_pipeline_consistency",
    "check_estimators_nan_inf",
    "check_estimators_pickle",
    "check_f_contiguous_array_estimator",
    "check_transformer_data_not_an_array",
    "check_transformer_general",
    "check_transformer_preserve_dtypes",
    "check_methods_sample_order_invariance",
    "check_methods_subset_invariance",
    "check_fit2d_1sample",
    "check_fit2d_1feature",
    "check_dict_unchanged",
    "check_fit_idempotent",
    "check_fit_check_is_fitted",
    "check_n_features_in",
    "check_fit2d_predict1d",
}
OF_TWO_POINTS = {
    "check_estimators_overwrite_params",
    "check_estimators_fit_returns_self",
    "check_readonly_memmap_input",
    "check_fit_idempotent",
    "check_fit_check_is_fitted",
    "check_n_features_in",
}
OF_TWO_OR_THREE_POINTS = TOO_WIDE - {
    "check_n_features_in_after_fitting",
    "check_positive_only_tag_during_fit",
    "check_estimators_dtypes",
    "check_dtype_object",
    "check_fit2d_1sample",
    "check_fit2d_1feature",
}
WITH_WEIGHTS = {
    "check_sample_weights_pandas_series",
    "check_sample_weights_not_an_array",
    "check_sample_weights_list",
    "check_sample_weights_shape",
    "check_sample_weights_not_overwritten",
}
ABOUT_ZERO = {
    "check_estimators_dtypes",
    "check_pipeline_consistency",
    "check_estimators_pickle",
    "check_transformer_data_not_an_array",
    "check_transformer_general",
    "check_transformer_preserve_dtypes",
}
INTENDED = [
    (Absorbance(), TOO_WIDE, "Transmittance"),
    (KeepRanges(), set(), ""),
    (LeaveOutRanges(), set(), ""),
    (Resample(), set(), ""),
    (SNV(), {"check_estimators_dtypes"}, "1 spectra are flat"),
    (MSC(), {"check_estimators_dtypes"}, "1 spectra have nothing in common with the reference"),
    (
        EMSC(),
        OF_TWO_OR_THREE_POINTS | WITH_WEIGHTS | {"check_estimators_dtypes"},
        "emsc fits 4 terms, .* n_features = [23]|1 spectra have nothing in common",
    ),
    (EMSC(polynomial=0), {"check_estimators_dtypes"}, "1 spectra have nothing in common with the reference"),
    (UnitLength(), {"check_estimators_dtypes"}, "1 spectra have no length"),
    (UnitArea(), {"check_estimators_dtypes"}, "1 spectra have no area"),
    (NormaliseBand(), ABOUT_ZERO, "spectra have no signal above zero in the band"),
    (SavitzkyGolay(), TOO_WIDE, "window = 11 is longer than the segment"),
    (SavitzkyGolay(window=1, polynomial=0), set(), ""),
    (GapDerivative(), TOO_WIDE, "gap = 5 and segment = 5 reach over 15 points"),
    (GapDerivative(1, 1), {*OF_TWO_POINTS, "check_fit2d_1feature"}, "gap = 1 and segment = 1 reach over 3 points"),
    (StraightBaseline(), set(), ""),
    (Detrend(), OF_TWO_OR_THREE_POINTS, "A polynomial of degree 2 fits any 3 points"),
    (Detrend(polynomial=0), set(), ""),
    (AsymmetricBaseline(), OF_TWO_POINTS, "at least three points in each segment; found n_features = 2"),
    (OrthogonalRemoval(), TOO_WIDE, "no difference spectra for 1 component"),
    (OrthogonalRemoval(components=0), set(), ""),
    (MeanCentre(), set(), ""),
    (ScaleColumns(), set(), ""),
]


def named(step):
    return step.name


@pytest.mark.parametrize(("step", "refused", "reason"), INTENDED, ids=lambda value: getattr(value, "name", ""))
def test_scikit_learn_checks(step, refused, reason):
    """All of scikit-learn's checks pass, but for those listed, which fail by the refusal stated and by nothing else."""
    results = check_estimator(step, on_skip=None, on_fail=None)
    failed = {result["check_name"]: result["exception"] for result in results if result["status"] == "failed"}
    skipped = {result["check_name"] for result in results if result["status"] == "skipped"}
    assert failed.keys() == refused
    for exception in failed.values():
        causes = f"{exception} {exception.__cause__} {exception.__context__}"
        assert re.search(reason, causes)
    assert skipped <= {"check_array_api_input"}  # runs only where SCIPY_ARRAY_API is set
    assert len(results) > 40


def test_every_step_is_registered_under_its_name_and_configured_here():
    assert {name: step.name for name, step in STEPS.items()} == {name: name for name in STEPS}
    assert [type(step) for step in CONFIGURED] == list(STEPS.values())
    assert {type(step) for step, _, _ in INTENDED} == set(STEPS.values())


@pytest.mark.parametrize("step", CONFIGURED, ids=named)
def test_state_round_trip(step):
    fitted = clone(step).fit(SPECTRA)
    parameters, arrays = fitted.state()
    assert all(array.dtype.kind in "fi" for array in arrays.values())  # plain numbers: no pickle
    back = type(step).from_state(
        json.loads(json.dumps(parameters)), {name: array.copy() for name, array in arrays.items()}
    )
    np.testing.assert_array_equal(back.transform(SPECTRA[:5]), fitted.transform(SPECTRA[:5]))
    assert repr(back) == repr(type(step)(**{**step.get_params(), **json.loads(json.dumps(plain_parameters(step)))}))


def plain_parameters(step):
    return {name: value for name, value in step.get_params().items() if not isinstance(value, np.ndarray)}


@pytest.mark.parametrize("step", CONFIGURED, ids=named)
def test_clone_keeps_parameters_and_forgets_what_was_learnt(step):
    copy = clone(clone(step).fit(SPECTRA))
    assert repr(copy) == repr(step)
    assert not any(hasattr(copy, name) for name in (*step.fitted, "n_features_in_"))


@pytest.mark.parametrize("step", CONFIGURED, ids=named)
def test_the_output_has_the_points_of_its_axis(step):
    assert clone(step).fit_transform(SPECTRA).shape == (12, step.axis_after(AXIS).size)


@pytest.mark.parametrize("step", CONFIGURED, ids=named)
def test_the_input_is_left_as_it_was(step):
    before = SPECTRA.copy()
    clone(step).fit_transform(SPECTRA)
    np.testing.assert_array_equal(SPECTRA, before)


def test_in_a_pipeline_with_a_grid_search():
    rng = np.random.default_rng(7)
    amount = rng.uniform(1, 5, 40)
    band = np.exp(-(((AXIS - 1700) / 15) ** 2))
    spectra = np.outer(amount, band) + rng.normal(scale=0.02, size=(40, AXIS.size)) + rng.normal(size=(40, 1))
    pipeline = Pipeline(
        [
            ("keep_ranges", KeepRanges([[1780, 1620]], AXIS)),
            ("savitzky_golay", SavitzkyGolay(derivative=1)),
            ("mean_centre", MeanCentre()),
            ("pls", PLSRegression(2, scale=False)),
        ]
    )
    search = GridSearchCV(pipeline, {"savitzky_golay__window": [5, 9, 15]}, cv=4).fit(spectra, amount)
    assert search.best_params_["savitzky_golay__window"] in {5, 9, 15}
    assert search.score(spectra, amount) > 0.99
    direct = clone(pipeline).set_params(**search.best_params_).fit(spectra, amount)
    np.testing.assert_array_equal(search.predict(spectra), direct.predict(spectra))
