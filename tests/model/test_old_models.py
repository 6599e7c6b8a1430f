"""Models of every format that was ever written are read, and report what they reported, for ever."""

import json
from pathlib import Path

import pytest

from quant.model.manifest import FORMAT_VERSION
from quant.model.storage import load_model
from quant.prediction.predict import predict
from quant.readers.options import ReadingOptions
from quant.readers.read import read_spectra

TESTS = Path(__file__).resolve().parents[1]
OLD = sorted((TESTS / "old_models").glob("*.model"))


def test_there_is_a_model_of_every_format():
    assert {int(path.name.split("_")[1]) for path in OLD} == set(range(1, FORMAT_VERSION + 1))


@pytest.mark.parametrize("path", OLD, ids=lambda path: path.stem)
def test_an_old_model_reports_what_it_reported(path: Path):
    expected = json.loads(path.with_suffix(".json").read_text(encoding="utf-8"))
    model = load_model(path)
    options = ReadingOptions.from_dict(model.reading)
    spectra = read_spectra(TESTS / "reference_values" / "gasoline.csv", options)
    found = predict(model, spectra.select(row["sample"] for row in expected["predictions"])).to_dict()["predictions"]
    assert str(model) == expected["model"]
    assert len(found) == len(expected["predictions"]) == 10
    span = model.limits.highest - model.limits.lowest
    for row, old in zip(found, expected["predictions"], strict=True):
        assert (row["sample"], row["applicability"]) == (old["sample"], old["applicability"])
        for key in ("value", "standard_error", "low", "high"):
            assert row[key] == pytest.approx(old[key], abs=1e-9 * span)  # the tolerance of loading
        for key in ("residual", "leverage"):
            assert row[key] == pytest.approx(old[key], rel=1e-7)
        assert row["reasons"] == old["reasons"]


def test_the_old_model_holds_the_published_calibration():
    # Three factors: Mevik & Wehrens, J. Stat. Softw. 18(2), 2007 [found].
    model = load_model(TESTS / "old_models" / "format_1_gasoline.model")
    assert model.factors == 3
    assert round(model.figures["RMSECV"], 4) == 0.2524
