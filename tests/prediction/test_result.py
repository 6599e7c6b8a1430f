"""The table that predicting leaves: its text, CSV and JSON."""

import csv
import io
import json
from dataclasses import replace

import numpy as np
import pytest

from quant.prediction.predict import predict
from quant.prediction.result import PredictionResult


def test_text(make_model, new_spectra):
    found = predict(make_model(), new_spectra(np.array([3.0, 30.0]), 2))
    lines = str(found).splitlines()
    assert lines[0] == "acid: PLS, 2 factors, 15 samples, 1 to 9 % m/m, state: draft"
    assert [line.split()[0] for line in lines[2:4]] == ["S01", "S02"]
    assert lines[3].endswith("not applicable")
    assert lines[4].startswith("S02: residual spectrum ")
    assert "; leverage " in lines[4]
    assert lines[4].endswith("value outside the calibrated range 1 to 9")
    assert len(lines) == 5


@pytest.mark.parametrize(
    ("error", "shown"), [(0.0123, "3.142"), (0.123, "3.14"), (1.23, "3.1"), (12.3, "3"), (123.0, "3"), (0.0, "3.142")]
)
def test_digits_follow_the_standard_error(make_model, new_spectra, error, shown):
    row = predict(make_model(), new_spectra(np.array([3.0]), 2)).predictions[0]
    row = replace(row, value=3.14159, standard_error=error, low=3.0, high=3.3)
    text = str(PredictionResult(model="m", predictions=(row,)))
    assert text.splitlines()[2].split()[1] == shown


def test_csv_keeps_every_digit_and_hostile_names(make_model, new_spectra):
    new = new_spectra(np.array([3.0, 30.0]), 2)
    named = type(new)(new.values, new.axis, ['a,"b"\n;', "=1+1"])
    found = predict(make_model(), named)
    rows = list(csv.DictReader(io.StringIO(found.to_csv())))
    assert [row["sample"] for row in rows] == ['a,"b"\n;', "=1+1"]
    assert [float(row["value"]) for row in rows] == [row.value for row in found.predictions]
    assert rows[1]["reasons"] == "; ".join(found.predictions[1].reasons)


def test_json(make_model, new_spectra):
    found = predict(make_model(), new_spectra(np.array([3.0]), 2))
    [row] = json.loads(found.to_json())["predictions"]
    assert row["value"] == found.predictions[0].value
    assert (row["spread"], row["true_low"], row["reasons"]) == (None, None, [])


def test_an_unknown_sample(make_model, new_spectra):
    found = predict(make_model(), new_spectra(np.array([3.0, 4.0]), 2))
    with pytest.raises(KeyError, match=r"No sample 'S09'; there are S01, S02\."):
        found["S09"]
