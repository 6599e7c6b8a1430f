"""Rules for the number of factors, by hand and on published spectra."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest
from scipy.signal import savgol_filter

from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.factor_rules import RULES, f_ratio, minimum, one_standard_error
from quant.statistics.quantiles import f_quantile

FOLDER = Path(__file__).parent.parent / "reference_values"
ROWS = json.loads((FOLDER / "figures.json").read_text(encoding="utf-8"))["tecator_factors"]

# Haaland & Thomas 1988 (from memory): F(0.75; m, m), computed.
F_TABLE = {
    8: 1.640,
    10: 1.551,
    12: 1.490,
    15: 1.426,
    20: 1.358,
    24: 1.321,
    25: 1.314,
    30: 1.282,
    40: 1.240,
    50: 1.212,
    60: 1.191,
    100: 1.145,
}


@pytest.mark.parametrize(("m", "value"), F_TABLE.items())
def test_the_f_table(m, value):
    assert f_quantile(0.75, m, m) == pytest.approx(value, abs=5e-4)


def _with_press(*press, n_samples=24):
    """Squared errors whose sums over the samples are `press`, all samples alike."""
    return np.repeat(np.array(press)[:, np.newaxis] / n_samples, n_samples, axis=1)


def test_the_f_ratio_case():
    # PRESS 40, 12, 8.1, 6.9, 6.6 for 1-5 factors, 24 samples: ratios 6.06, 1.818, 1.227, 1.045, 1; three (computed).
    squares = _with_press(60.0, 40.0, 12.0, 8.1, 6.9, 6.6)
    assert f_ratio(squares) == 3
    assert minimum(squares) == 5
    assert f_ratio(squares, alpha=0.05) == 2  # F(0.95; 24, 24) = 1.984
    assert f_ratio(squares[:, :8] * 3) == 3  # of eight samples F is 1.640
    assert f_ratio(_with_press(1.0, 0.5, 0.0)) == 2  # no ratio to a PRESS of zero


def test_one_standard_error_by_hand():
    # At the minimum, two factors: mean 2, SD (n - 1) sqrt(8/3), standard error sqrt(8/3)/2 = 0.8165.
    best = [0.0, 2.0, 2.0, 4.0]
    assert one_standard_error([[9.0] * 4, [2.81] * 4, best]) == 1
    assert one_standard_error([[9.0] * 4, [2.82] * 4, best]) == 2
    # Divided by n the standard error would be 0.7071, and 2.81 beyond it.
    assert one_standard_error(_with_press(60.0, 40.0, 12.0, 6.0)) == 3  # samples all alike: no standard error


def test_no_rule_answers_with_the_mean():
    squares = np.array([[1.0, 1.0, 1.0], [2.0, 2.0, 3.0], [3.0, 3.0, 3.0]])
    assert {name: rule(squares) for name, rule in RULES.items()} == {
        "one_standard_error": 1,
        "minimum": 1,
        "f_ratio": 1,
        "randomisation": 1,
    }


def test_ties_go_to_fewer_factors():
    assert minimum(_with_press(9.0, 2.0, 1.0, 1.0)) == 2


@pytest.mark.parametrize("rule", RULES.values(), ids=RULES)
def test_impossible_questions_are_refused(rule):
    with pytest.raises(NotEnoughDataError, match=r"1 factor count"):
        rule(np.ones((1, 5)))
    with pytest.raises(NotEnoughDataError, match=r"1 sample"):
        rule(np.ones((3, 1)))
    with pytest.raises(ParameterError, match="negative"):
        rule([[1.0, 1.0], [-1.0, 1.0]])
    with pytest.raises(ParameterError, match="not finite"):
        rule([[1.0, 1.0], [np.nan, 1.0]])


def test_an_alpha_outside_its_bounds_is_refused():
    with pytest.raises(ParameterError, match="probability"):
        f_ratio(np.ones((2, 4)), alpha=0.0)


def _tecator():
    """Spectra, shape (172, 100), and reference values of the calibration samples; source in figures.json."""
    with (FOLDER / "tecator.csv").open(encoding="utf-8") as file:
        rows = [row for row in csv.DictReader(file) if row["subset"] in ("C", "M")]
    analytes = ("moisture", "fat", "protein")
    points = [name for name in rows[0] if name not in ("sample", "subset", *analytes)]
    spectra = np.array([[float(row[point]) for point in points] for row in rows])
    return spectra, {name: np.array([float(row[name]) for row in rows]) for name in analytes}


def _pretreated(pipeline, spectra):
    for step in pipeline.split("+"):
        if step == "SNV":
            centred = spectra - spectra.mean(axis=1, keepdims=True)
            spectra = centred / centred.std(axis=1, ddof=1, keepdims=True)
        elif step != "raw":  # SG(w9,p2,d2): window, polynomial, derivative
            window, order, derivative = (int(part[1:]) for part in step[3:-1].split(","))
            spectra = savgol_filter(spectra, window, order, deriv=derivative, axis=1)
    return spectra


def _simpls(X, y, n_factors):
    """Coefficients for 1 ... n_factors (de Jong 1993, one response): an independent yardstick, not the program's."""
    covariance, basis, rows = X.T @ y, np.zeros((X.shape[1], 0)), [np.zeros(X.shape[1])]
    for _ in range(n_factors):
        score = X @ covariance
        length = np.linalg.norm(score)
        rows.append(rows[-1] + covariance / length * (y @ score) / length)
        loading = X.T @ score
        for _ in range(2):
            loading -= basis @ (basis.T @ loading)
        basis = np.column_stack([basis, loading / np.linalg.norm(loading)])
        covariance = covariance - basis @ (basis.T @ covariance)
    return np.array(rows)


def test_the_published_data_give_the_factor_counts_other_programs_found():
    # Tecator samples 1-172, interleaved 10-fold, 1-20 factors; computed by other programs, see figures.json. Dividing
    # the standard deviation by n instead of n - 1 gives the same counts here: these data cannot tell the two apart.
    spectra, values = _tecator()
    folds = np.arange(172) % 10
    for row in ROWS:
        X, y = _pretreated(row["pipeline"], spectra), values[row["analyte"]]
        squares = np.zeros((21, 172))
        for fold in range(10):
            out = folds == fold
            centre, mean = X[~out].mean(axis=0), y[~out].mean()
            coefficients = _simpls(X[~out] - centre, y[~out] - mean, 20)
            squares[:, out] = (mean + coefficients @ (X[out] - centre).T - y[out]) ** 2
        case = f"{row['analyte']}, {row['pipeline']}"
        assert np.sqrt(squares.mean(axis=1))[row["ncomp_min"]] == pytest.approx(row["rmsecv_min"], rel=1e-7), case
        assert minimum(squares) == row["ncomp_min"], case
        assert one_standard_error(squares) == row["ncomp_one_se"], case
