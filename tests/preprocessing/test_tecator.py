"""Real spectra, with results computed by independent programs (tests/reference_values/tecator.md)."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest
from sklearn.cross_decomposition import PLSRegression
from sklearn.pipeline import make_pipeline

from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.preprocessing.snv import SNV

REFERENCE_VALUES = Path(__file__).parents[1] / "reference_values"
TREATMENTS = {
    "raw": (),
    "snv": (SNV(),),
    "sg_d2_w9p2__snv": (SavitzkyGolay(9, 2, 2), SNV()),
    "sg_d1_w9p2__snv": (SavitzkyGolay(9, 2, 1), SNV()),
    "snv__sg_d2_w9p2": (SNV(), SavitzkyGolay(9, 2, 2)),
}


@pytest.fixture(scope="module")
def tecator():
    with (REFERENCE_VALUES / "tecator.csv").open(newline="") as file:
        rows = list(csv.reader(file))[1:]
    numbers = np.array([row[2:] for row in rows], dtype=float)
    return numbers[:, 3:], numbers[:, 1]  # absorbances; fat, percent by mass


@pytest.fixture(scope="module")
def published():
    return json.loads((REFERENCE_VALUES / "tecator.json").read_text())["results"]["fat"]


@pytest.mark.parametrize("treatment", TREATMENTS)
def test_errors_of_calibration_and_prediction(tecator, published, treatment):
    spectra, fat = tecator
    train, test = slice(0, 172), slice(172, 215)  # subsets C and M; subset T
    expected = published[treatment]
    for factors in range(1, 21):
        model = make_pipeline(*TREATMENTS[treatment], PLSRegression(factors, scale=False, tol=1e-12, max_iter=2000))
        model.fit(spectra[train], fat[train])
        rmsec, rmsep = (np.sqrt(np.mean((model.predict(spectra[s]) - fat[s]) ** 2)) for s in (train, test))
        assert rmsec == pytest.approx(expected["rmsec"][factors], abs=1e-8)
        assert rmsep == pytest.approx(expected["rmsep_T"][factors], abs=1e-8)
