"""The ready recipes of the demo sets give what their first lines promise."""

import re
from functools import cache
from pathlib import Path

import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.result import AnalyteResult
from quant.prediction.predict import predict
from quant.readers.options import ReadingOptions
from quant.readers.read import read_spectra
from quant.recipe.load import load_recipe

ROOT = Path(__file__).resolve().parents[2]
NEW = {"dryer_solvent": "new/*.dx", "starting_material": "new.csv"}


@cache
def result_of(name: str) -> AnalyteResult:
    return calibrate(load_recipe(ROOT / "configs" / f"{name}.toml")).analytes[0]


def promised(name: str) -> str:
    """Return the comment at the top of a recipe as one line."""
    text = (ROOT / "configs" / f"{name}.toml").read_text(encoding="utf-8")
    return " ".join(line.lstrip("# ") for line in text.partition("\n\n")[0].splitlines())


@pytest.mark.parametrize("name", NEW)
def test_figures(name: str) -> None:
    found, text = result_of(name), promised(name)
    figures = found.validation.figures
    rmsecv = found.cross_validation.rmsecv[found.cross_validation.factor_counts.index(found.factors)]
    told = re.search(r"RMSECV ([\d.]+) .*RMSEP ([\d.]+) .*bias ([+-][\d.]+) .* on (\d+) separately", text)
    assert told, "the recipe promises no figures in these words"
    assert f"{rmsecv:.3f}" == told[1]
    assert f"{figures.rmse:.3f}" == told[2]
    assert f"{figures.bias:+.3f}" == told[3]
    assert figures.n_samples == int(told[4])
    if factors := re.search(r"(\d+) factors", text):
        assert found.factors == int(factors[1])


@pytest.mark.parametrize("name", NEW)
def test_the_new_sample_it_does_not_apply_to(name: str) -> None:
    model = result_of(name).model
    files = ROOT / "demo_sets" / name / NEW[name]
    found = predict(model, read_spectra(files, ReadingOptions.from_dict(model.reading)))
    told = re.search(r"new samples, (\S+) holds another", promised(name))
    assert told
    assert [row.sample for row in found.predictions if row.applicability == "not applicable"] == [told[1]]
