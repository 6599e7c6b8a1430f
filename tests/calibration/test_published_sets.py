"""The way a user goes, on data whose results are published or were computed by independent programs."""

import csv
import json
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.cross_validation import cross_validate
from quant.calibration.result import CalibrationResult
from quant.prediction.predict import predict
from quant.recipe.load import load_recipe, load_samples, recipe_from_text
from quant.recipe.schema import Recipe
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import SampleSet, pair_samples
from quant.spectra.spectra_set import SpectraSet

ROOT = Path(__file__).resolve().parents[2]
VALUES = ROOT / "tests" / "reference_values"


@cache
def expected(name):
    return json.loads((VALUES / f"{name}.json").read_text(encoding="utf-8"))


@cache
def result_of(name) -> CalibrationResult:
    return calibrate(load_recipe(ROOT / "configs" / f"{name}.toml"))


@cache
def samples_of(name) -> SampleSet:
    return load_samples(load_recipe(ROOT / "configs" / f"{name}.toml"))


def with_factors(name: str, factors: int, analyte: str = "") -> Recipe:
    """Return a recipe of configs with the number of factors fixed, and one analyte where named."""
    text = (ROOT / "configs" / f"{name}.toml").read_text(encoding="utf-8")
    head, _, tail = text.partition("[[analyte]]")
    _, mark, tail = tail.partition("[[preprocessing]]" if "[[preprocessing]]" in tail else "[regression]")
    if analyte:
        tail = f'[[analyte]]\nname = "{analyte}"\nunit = "% m/m"\n\n{mark}{tail}'
    else:
        tail = f'[[analyte]]\nname = "octane"\nunit = "octane number"\n\n{mark}{tail}'
    before, _, after = tail.partition("max_factors = ")
    return recipe_from_text(f"{head}{before}factors = {factors}\nmax_factors = {after}", name=f"{name}.toml")


def leaving_the_mean(result: CalibrationResult) -> float:
    """RMSEP of the mean of the calibration samples, what zero factors predict."""
    first = result.analytes[0]
    return float(np.sqrt(np.mean((first.reference.mean() - first.validation.reference) ** 2)))


def test_gasoline_cross_validation():
    # Computed with R 4.2.2, package pls 2.8-1.
    found = result_of("gasoline")["octane"].cross_validation
    assert found.factor_counts == tuple(range(11))
    assert found.rmsecv == pytest.approx(expected("gasoline")["rmsecv_loo_CV"], abs=1e-9)
    assert found.rmsecv[2:4].round(4).tolist() == [
        0.2966,
        0.2524,
    ]  # Mevik & Wehrens, J. Stat. Softw. 18(2), 2007 [found]
    printed = expected("gasoline")["published"]["rmsecv_loo_CV"]
    assert [float(f"{value:.4g}") for value in found.rmsecv] == printed


def test_gasoline_calibration():
    shown = result_of("gasoline")["octane"].picture
    assert shown.rmsec == pytest.approx(expected("gasoline")["rmsec"], abs=1e-9)
    percent = expected("gasoline")["explained_x_percent_per_component_1_to_10"]
    assert 100 * shown.explained_x == pytest.approx(percent, abs=1e-9)


@pytest.mark.parametrize("factors", range(1, 11))
def test_gasoline_test_samples(factors):
    result = calibrate(with_factors("gasoline", factors), samples_of("gasoline"))
    found = result["octane"].validation.figures
    assert result["octane"].factors == result.model.factors == factors
    assert found.n_samples == 10
    assert found.rmse == pytest.approx(expected("gasoline")["rmsep_test"][factors], abs=1e-9)
    assert float(f"{found.rmse:.4f}") == expected("gasoline")["published"]["rmsep_test"][factors]


def test_gasoline_test_samples_by_the_mean():
    assert leaving_the_mean(result_of("gasoline")) == pytest.approx(expected("gasoline")["rmsep_test"][0], abs=1e-9)


@pytest.mark.parametrize("factors", [2, 3])
def test_gasoline_predictions(factors):
    result = calibrate(with_factors("gasoline", factors), samples_of("gasoline"))
    found = result["octane"].validation
    assert found.sample_ids == tuple(str(number) for number in range(51, 61))
    assert found.predicted == pytest.approx(expected("gasoline")[f"test_predictions_{factors}_components"], abs=1e-9)


@pytest.mark.parametrize("analyte", ["fat", "moisture", "protein"])
def test_tecator_cross_validation(analyte):
    # Computed with NumPy (SIMPLS), checked there against R and scikit-learn.
    found = result_of("tecator")[analyte].cross_validation
    figures = expected("tecator")["results"][analyte]["sg_d2_w9p2__snv"]
    assert found.rmsecv == pytest.approx(figures["rmsecv_interleaved"], abs=1e-8)


@pytest.mark.parametrize("analyte", ["fat", "moisture", "protein"])
def test_tecator_with_duplicates_kept_together(analyte):
    # Computed with NumPy (SIMPLS): distinct spectra numbered in order of first appearance, that number mod 10 the fold.
    recipe = load_recipe(ROOT / "configs" / "tecator.toml")
    text = recipe.text.replace("[cross_validation]", "[cross_validation]\nduplicates_together = true")
    training = samples_of("tecator").subset(np.array(samples_of("tecator").groups("subset")) != "T")
    found = cross_validate(training, recipe_from_text(text, folder=recipe.folder), analyte)
    figures = expected("tecator")["results"][analyte]["sg_d2_w9p2__snv"]
    assert found.scheme == "10 interleaved folds, duplicate spectra together"
    assert found.n_units == 172 - 14  # of 22 pairs, 14 lie within the calibration samples
    assert found.rmsecv == pytest.approx(figures["rmsecv_duplicate_grouped"], abs=1e-8)


def test_tecator_duplicates_across_the_validation_are_told():
    twins = expected("tecator")["test_samples_with_an_exact_duplicate_in_calibration"]
    (remark,) = result_of("tecator")["fat"].remarks
    assert remark.startswith("7 of 43 validation samples have a spectrum that is also among the calibration's")
    assert all(f"{number}" in remark for number in twins[:5])


@pytest.mark.parametrize("analyte", ["fat", "moisture", "protein"])
def test_tecator_test_samples(analyte):
    # One calibration predicts with every number of factors: its largest model holds all smaller ones.
    result = calibrate(with_factors("tecator", 20, analyte), samples_of("tecator"))[analyte]
    figures = expected("tecator")["results"][analyte]["sg_d2_w9p2__snv"]
    test = samples_of("tecator").subset(np.array(samples_of("tecator").groups("subset")) == "T")
    model = result.model
    every = model.method.predict_each(model.process(test.spectra.values))
    rmsep = np.sqrt(np.mean((every - test.analyte(analyte)[1]) ** 2, axis=1))
    assert rmsep == pytest.approx(figures["rmsep_T"], abs=1e-8)
    assert result.validation.figures.rmse == pytest.approx(figures["rmsep_T"][20], abs=1e-8)


@pytest.mark.parametrize("factors", [1, 8])
def test_tecator_fat_with_factors_fixed(factors):
    found = calibrate(with_factors("tecator", factors, "fat"), samples_of("tecator"))["fat"]
    figures = expected("tecator")["results"]["fat"]["sg_d2_w9p2__snv"]
    assert found.factors == factors
    assert found.validation.figures.rmse == pytest.approx(figures["rmsep_T"][factors], abs=1e-8)


def test_tecator_fat_by_the_one_standard_error_rule():
    found = result_of("tecator")["fat"]
    assert found.rule == "one standard error"
    assert found.factors <= 9
    assert found.validation.figures.rmse <= 0.80


@pytest.mark.parametrize("analyte", ["fat", "moisture", "protein"])
def test_tecator_with_exact_twins_held_together(analyte):
    everything = samples_of("tecator")
    samples = everything.subset(np.array(everything.groups("subset")) != "T")
    _, first, spectrum = np.unique(samples.spectra.values, axis=0, return_index=True, return_inverse=True)
    twins = [f"spectrum {first[number]}" for number in spectrum.ravel()]
    notes = [{"twins": twin} for twin in twins]
    table = ReferenceTable(samples.sample_ids, samples.analytes, samples.values, notes)
    grouped = pair_samples(samples.spectra, table)
    text = with_factors("tecator", 20, analyte).text.replace("folds = 10", 'folds = 10\ngroup = "twins"')
    found = cross_validate(grouped, recipe_from_text(text), analyte)
    figures = expected("tecator")["results"][analyte]["sg_d2_w9p2__snv"]
    assert len(set(twins)) < len(samples)
    assert found.rmsecv == pytest.approx(figures["rmsecv_duplicate_grouped"], abs=1e-8)


def table_of(name: str, value_column: str) -> SampleSet:
    """Return a published table as samples whose spectra are the other columns, at points 1, 2 ..."""
    with (VALUES / f"{name}.csv").open(encoding="utf-8") as file:
        rows = [{key: float(cell) for key, cell in row.items() if key != "sample"} for row in csv.DictReader(file)]
    others = [key for key in rows[0] if key != value_column]
    return set_of([[row[key] for key in others] for row in rows], [row[value_column] for row in rows])


def set_of(spectra, values) -> SampleSet:
    matrix = np.array(spectra, dtype=float)
    ids = [str(number) for number in range(len(matrix))]
    axis = SpectralAxis(np.arange(1, matrix.shape[1] + 1))
    table = ReferenceTable(ids, [Analyte("y", "units")], np.array(values, dtype=float)[:, None])
    return pair_samples(SpectraSet(matrix, axis, ids, "arbitrary"), table)


def calibrated(samples: SampleSet, tables: str) -> CalibrationResult:
    text = f'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "y"\n{tables}'
    return calibrate(recipe_from_text(text), samples)


def test_longley_with_all_factors_is_ordinary_least_squares():
    # NIST/ITL Statistical Reference Datasets, Longley, certified values [from memory, reproduced].
    samples = table_of("longley", "y")
    result = calibrated(samples, '[regression]\nfactors = 6\n[cross_validation]\nscheme = "leave_one_out"')
    method, found = result.model.method, result["y"]
    certified = expected("longley")
    assert method.coefficients_[-1] == pytest.approx(certified["coefficients"], rel=1e-6)
    assert method.intercepts_[-1] == pytest.approx(certified["intercept"], rel=1e-6)
    assert found.calibration.sec == pytest.approx(certified["residual_sd"], rel=1e-7)  # divided by n - 6 - 1
    assert found.uncertainty.degrees_of_freedom == 9


def test_hald_leave_one_out():
    # Woods, Steinour & Starke 1932 as in textbooks of regression [from memory, reproduced].
    samples = table_of("hald", "y")
    found = calibrated(samples, '[regression]\nfactors = 4\n[cross_validation]\nscheme = "leave_one_out"')["y"]
    crossed, published = found.cross_validation, expected("hald")
    press = crossed.rmsecv[4] ** 2 * len(samples)
    assert press == pytest.approx(published["press_loo"], abs=1e-4)
    assert found.model.method.coefficients_[-1] == pytest.approx(published["coefficients"], abs=1e-4)
    assert found.picture.leverage == pytest.approx(published["leverages_with_mean"], abs=1e-5)
    assert crossed.q2[4] == pytest.approx(1 - press / np.sum((found.reference - found.reference.mean()) ** 2))


ONE_HEIGHT = """
[regression]
method = "band_area"
bands = [{ signal = "height_at", position = 1 }]
[cross_validation]
scheme = "leave_one_out"
"""


def test_norris_straight_line():
    # NIST/ITL Statistical Reference Datasets, Norris, certified values; y is the signal, x the content.
    with (VALUES / "norris.csv").open(encoding="utf-8") as file:
        pairs = [(float(row["x"]), float(row["y"])) for row in csv.DictReader(file)]
    result = calibrated(set_of([[y] for _, y in pairs], [x for x, _ in pairs]), ONE_HEIGHT)
    line, certified = result.model.method.line_, expected("norris")
    assert line.slope == pytest.approx(certified["B1"], rel=1e-12)
    assert line.intercept == pytest.approx(certified["B0"], rel=1e-10)
    assert line.residual_sd == pytest.approx(certified["residual_sd"], rel=1e-11)
    assert (result["y"].factors, result["y"].rule) == (1, "a straight line")
    assert result["y"].uncertainty.degrees_of_freedom == 34


def test_fluorescein_interval():
    # Miller & Miller, Statistics and Chemometrics for Analytical Chemistry [from memory, reproduced].
    content, signal = [0, 2, 4, 6, 8, 10, 12], [2.1, 5.0, 9.0, 12.6, 17.3, 21.0, 24.7]
    samples = set_of([[value] for value in signal], content)
    model = calibrated(samples, ONE_HEIGHT).model
    new = SpectraSet([[2.9], [13.5], [23.0]], samples.spectra.axis, ["low", "middle", "high"], "arbitrary")
    found = predict(model, new).predictions
    assert [row.value for row in found] == pytest.approx([0.71600, 6.20722, 11.12858], abs=1e-5)
    assert [row.standard_error for row in found] == pytest.approx([0.26457, 0.23975, 0.26319], abs=1e-5)
    assert [row.high - row.value for row in found] == pytest.approx([0.68010, 0.61631, 0.67656], abs=1e-5)
    assert [row.value - row.low for row in found] == pytest.approx([0.68010, 0.61631, 0.67656], abs=1e-5)
