"""Cross-validation: against scikit-learn, by hand, and what it refuses."""

from dataclasses import replace

import numpy as np
import pytest
from sklearn.cross_decomposition import PLSRegression
from sklearn.model_selection import PredefinedSplit, cross_val_predict
from sklearn.pipeline import make_pipeline

from quant.calibration.cross_validation import check_calibration_values, cross_validate, factor_counts
from quant.calibration.folds import make_folds
from quant.calibration.leave_out import fit_pipeline
from quant.errors import NotEnoughDataError, ParameterError
from quant.preprocessing.msc import MSC
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.recipe.pipeline import build_method, build_steps
from quant.statistics.factor_rules import RULES

MSC_AND_SG = """
[[preprocessing]]
step = "msc"
[[preprocessing]]
step = "savitzky_golay"
window = 7
derivative = 1
[regression]
max_factors = 4
"""


@pytest.mark.parametrize("scheme", ["interleaved", "contiguous_blocks", "random_folds", "leave_one_out"])
def test_equals_scikit_learn(make_samples, make_recipe, scheme):
    samples = make_samples(n=18, seed=5)
    recipe = make_recipe(f'{MSC_AND_SG}[cross_validation]\nscheme = "{scheme}"\nfolds = 6\nrepeats = 2')
    found = cross_validate(samples, recipe)
    folds = make_folds(samples, recipe.cross_validation).repeats
    assert found.predicted.shape == (len(folds), 5, 18)
    for repeat, labels in enumerate(folds):
        for factors in range(1, 5):
            steps = MSC(), SavitzkyGolay(window=7, derivative=1, axis=samples.spectra.axis.values)
            pipeline = make_pipeline(*steps, PLSRegression(factors, scale=False))
            expected = cross_val_predict(pipeline, samples.spectra.values, found.reference, cv=PredefinedSplit(labels))
            assert found.predicted[repeat, factors] == pytest.approx(expected.ravel(), abs=1e-8)


def test_steps_that_learn_are_fitted_without_the_samples_left_out(make_samples, make_recipe):
    # The control of the test above: an MSC that has seen all spectra gives other predictions.
    samples = make_samples(n=18, seed=5)
    recipe = make_recipe(f'{MSC_AND_SG}[cross_validation]\nscheme = "interleaved"\nfolds = 6')
    found = cross_validate(samples, recipe)
    labels = make_folds(samples, recipe.cross_validation).repeats[0]
    seen = SavitzkyGolay(window=7, derivative=1, axis=samples.spectra.axis.values).fit_transform(
        MSC().fit_transform(samples.spectra.values)
    )
    leaking = cross_val_predict(PLSRegression(2, scale=False), seen, found.reference, cv=PredefinedSplit(labels))
    assert np.abs(found.predicted[0, 2] - leaking.ravel()).max() > 1e-5


def test_zero_factors_predict_the_mean_of_the_others(make_samples, make_recipe):
    samples = make_samples(n=6)
    found = cross_validate(samples, make_recipe("[regression]\nmax_factors = 2"))
    y = found.reference
    assert found.scheme == "leave one sample out"
    assert found.predicted[0, 0] == pytest.approx((y.sum() - y) / 5)
    assert found.leverage[0, 0] == pytest.approx(np.full(6, 1 / 5))


def test_figures_by_hand(make_samples, make_recipe):
    samples = make_samples(n=12)
    found = cross_validate(samples, make_recipe('[cross_validation]\nscheme = "random_folds"\nfolds = 4\nrepeats = 3'))
    error = found.predicted - found.reference
    mean_square = (error**2).mean(axis=0)
    assert found.n_folds == 12
    assert found.rmsecv == pytest.approx(np.sqrt(mean_square.mean(axis=1)))
    spread = mean_square.std(axis=1, ddof=1) / np.sqrt(12)
    assert found.rmsecv_se == pytest.approx(spread / (2 * found.rmsecv))
    total = np.sum((found.reference - found.reference.mean()) ** 2)
    assert found.q2 == pytest.approx(1 - mean_square.sum(axis=1) / total)
    assert found.squared_errors() == pytest.approx(mean_square)
    assert found.left_out_predictions(2) == pytest.approx(found.predicted[:, 2].mean(axis=0))
    assert found.at(2)[2] == pytest.approx(found.residual[:, 2])


def test_replicates_use_the_mean_and_their_scatter_is_kept(make_samples, make_recipe):
    samples = make_samples(n=8, replicates=3)
    recipe = make_recipe("[regression]\nmax_factors = 2")
    found = cross_validate(samples, recipe)
    steps = build_steps(recipe, samples.spectra.axis, "absorbance")
    within = 0.0
    for out in range(8):
        others, left = samples.subset(np.arange(8) != out), samples.subset([out])
        _, method, _ = fit_pipeline(
            others, others.values[:, 0], steps, build_method(recipe, samples.spectra.axis.values, 2)
        )
        mean = left.spectra.values.mean(axis=0, keepdims=True)
        assert found.predicted[0, 2, out] == pytest.approx(method.predict(mean)[0])
        assert found.leverage[0, 2, out] == pytest.approx(method.leverage_each(mean)[2, 0])
        assert found.residual[0, 2, out] == pytest.approx(method.residual_each(left.spectra.values)[2].mean())
        within += np.sum((method.predict(left.spectra.values) - method.predict(mean)) ** 2)
    assert found.replicate_variance[2] == pytest.approx(within / (24 - 8))


def test_without_replicates_their_scatter_is_not_known(make_samples, make_recipe):
    found = cross_validate(make_samples(n=8), make_recipe("[regression]\nmax_factors = 2"))
    assert np.isnan(found.replicate_variance).all()


def test_band_area_leaves_one_straight_line_out(make_samples, make_recipe):
    samples = make_samples(n=10)
    band = '[regression]\nmethod = "band_area"\nbands = [{ signal = "height_at", position = 1730 }]\n'
    found = cross_validate(samples, make_recipe(band))
    signal = samples.spectra.values[:, samples.spectra.axis.values == 1730].ravel()
    expected = []
    for out in range(10):
        others = np.arange(10) != out
        slope, intercept = np.polyfit(found.reference[others], signal[others], 1)
        expected.append((signal[out] - intercept) / slope)
    assert found.factor_counts == (1,)
    assert found.choices == {}
    assert found.predicted[0, 0] == pytest.approx(expected)
    through = cross_validate(samples, make_recipe(f"{band}through_origin = true"))
    assert through.factor_counts == (0,)


def test_rules_choose_from_the_squared_errors(make_samples, make_recipe):
    found = cross_validate(make_samples(n=20), make_recipe("[regression]\nmax_factors = 6"))
    assert set(found.choices) == set(RULES)
    assert found.choices["minimum"] == 1 + int(np.argmin(found.rmsecv[1:]))
    assert found.choices["one_standard_error"] == 2  # acid and matrix
    text = str(found)
    assert text.startswith("Cross-validation of acid [% m/m]: 20 samples, leave one sample out\nfactors")
    assert "one standard error" in text


def test_how_many_factors_are_looked_at(make_samples, make_recipe):
    recipe = make_recipe()
    assert factor_counts(recipe, 3) == (0, 1, 2, 3)
    assert cross_validate(make_samples(n=12), recipe).factor_counts[-1] == 11 // 2
    assert cross_validate(make_samples(n=40), recipe).factor_counts[-1] == 15
    fixed = make_recipe("[regression]\nfactors = 8")
    assert cross_validate(make_samples(n=12), fixed).factor_counts[-1] == 8


def test_numerical_noise_is_reported(make_samples, make_recipe):
    samples = make_samples(n=12)
    flat = np.outer(samples.values[:, 0], np.linspace(1, 2, 41))  # one factor is all there is
    exact = replace(samples, spectra=replace(samples.spectra, values=flat))
    found = cross_validate(exact, make_recipe("[regression]\nmax_factors = 3"))
    assert len(found.guard_notes) == 1
    assert found.guard_notes[0].startswith(
        "12 of 12 folds ended with 1 factor(s); the first of them: factor 2 would be"
    )
    assert found.predicted[0, 3] == pytest.approx(found.predicted[0, 1])
    assert found.guard_notes[0] in str(found)


@pytest.mark.parametrize("factors", ["max_factors = 8", "factors = 8"])
def test_more_factors_than_the_training_sets_carry(make_samples, make_recipe, factors):
    with pytest.raises(
        ParameterError, match=r"8 factors asked for .* smallest training set has 5 samples of 41 points; at most 4"
    ):
        cross_validate(make_samples(n=6), make_recipe(f"[regression]\n{factors}"))


def test_too_little_to_learn_from(make_samples, make_recipe):
    with pytest.raises(NotEnoughDataError, match="3 samples with a value of acid; at least 4 are needed"):
        cross_validate(make_samples(n=3), make_recipe())
    with pytest.raises(NotEnoughDataError, match=r"values of acid span 4e-300; expected 1e-100 or more"):
        check_calibration_values("acid", np.arange(5) * 1e-300)
    with pytest.raises(NotEnoughDataError, match="All 5 reference values of acid are 2; expected values that span"):
        cross_validate(make_samples(n=5, values=np.full(5, 2.0)), make_recipe())


def test_a_training_set_of_one_sample_is_refused(make_samples, make_recipe):
    notes = [{"batch": "large"}] * 5 + [{"batch": "small"}]
    recipe = make_recipe('[cross_validation]\nscheme = "leave_one_group_out"\ngroup = "batch"')
    with pytest.raises(NotEnoughDataError, match=r"smallest training set of the cross-validation has 1 sample\(s\)"):
        cross_validate(make_samples(n=6, notes=notes), recipe)
