"""Tables per standard: numbers of published-values 2.1 and 2.2, and verdicts on sets that meet or fail."""

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.requirement import FROM_MEMORY, MET, NOT_MET, NOT_TOLD

PLS = "[regression]\nfactors = 2\n"


@pytest.fixture
def tables(make_recipe):
    def make(samples, text=""):
        found = calibrate(make_recipe(PLS + text), samples).analytes[0]
        return {
            table.standard.split()[0]: {row.criterion: row for row in table.rows} for table in found.audit.standards
        }, found

    return make


def test_a_good_set_meets_them(tables, make_samples):
    samples = make_samples(60, values=np.tile(np.linspace(1.0, 9.0, 30), 2))
    found, result = tables(samples, '[validation]\nsamples = ["S31..S60"]')
    verdicts = {name: row.verdict for table in found.values() for name, row in table.items()}
    by_chance = {"specificity: validation spectra the calibration does not apply to"}  # 1 % of good samples
    by_chance |= {"share of samples within t·SEC·√(1 + h)"}  # 5 % of good samples
    by_chance |= {name for name in verdicts if name.startswith("accuracy, ")}  # 5 % of good levels
    assert {name for name, verdict in verdicts.items() if verdict == NOT_MET} <= by_chance
    # Two things cannot be told of single spectra without conditions.
    untold = {name for name, verdict in verdicts.items() if verdict == NOT_TOLD}
    assert untold == {"repeatability, one spectrum", "intermediate precision"}
    assert {table.note for table in result.audit.standards} == {FROM_MEMORY}


def test_counts_of_e1655(tables, make_samples):
    # 6(k + 1) and never fewer than 24; 4k and never fewer than 20: from memory of E1655, table of published-values 2.1
    found, _ = tables(make_samples(30), '[validation]\nsamples = ["S01..S05"]')
    rows = found["ASTM"]
    assert (rows["calibration samples"].required, rows["calibration samples"].verdict) == ("at least 24", MET)
    assert (rows["validation samples"].required, rows["validation samples"].verdict) == ("at least 20", NOT_MET)
    assert rows["span over the calibrated range"].verdict == NOT_MET


def test_limits_of_iso_12099(tables, make_samples):
    found, result = tables(make_samples(40), '[validation]\nsamples = ["S01..S20"]')
    rows, figures = found["ISO"], result.validation.figures
    # T_b/SEP at n = 20 and α = 0.05: 0.468 [computed], published-values 2.2
    limit = float(rows["bias"].required.split("±")[1].split()[0])
    assert limit / figures.sep == pytest.approx(0.468, abs=5e-4)
    # T_UE/SEC at ν = 20, M = 17: sqrt F(0.95; 20, 17) = 1.494 [computed with SciPy]
    unexplained = rows["SEP against the unexplained-error limit SEC·√F"]
    sec = result.calibration.sec
    assert float(unexplained.required.split()[1]) / sec == pytest.approx(1.494, abs=2e-3)


def test_a_bias_is_not_met(tables, make_samples):
    samples = make_samples(40)
    samples.values.flags.writeable = True
    samples.values[:20] += 0.5
    found, _ = tables(samples, '[validation]\nsamples = ["S01..S20"]')
    assert found["ISO"]["bias"].verdict == found["ASTM"]["bias"].verdict == NOT_MET
    levels = [row.verdict for name, row in found["ICH"].items() if name.startswith("accuracy, ")]
    assert levels == [NOT_MET] * 3


def test_without_validation_most_cannot_be_told(tables, make_samples):
    found, _ = tables(make_samples(30))
    assert found["ISO"]["independent test set"].verdict == NOT_TOLD
    assert found["ASTM"]["validation"].verdict == NOT_TOLD


def test_an_internal_test_is_no_separate_material(tables, make_samples):
    found, _ = tables(make_samples(40), '[validation]\nsplit = "random"\nfraction = 0.5')
    assert found["ASTM"]["validation samples are separate material"].verdict == NOT_MET


def test_intermediate_precision_by_a_note(tables, make_samples):
    notes = [{"day": f"d{i % 5}"} for i in range(40)]
    found, _ = tables(make_samples(40, notes=notes), '[uncertainty]\ncondition = "day"')
    row = found["ICH"]["intermediate precision over day"]
    assert row.found > 0
    assert row.remark.startswith("of it between values of day: ")
    missing, _ = tables(make_samples(40), '[uncertainty]\ncondition = "day"')
    assert missing["ICH"]["intermediate precision"].verdict == NOT_TOLD


def test_the_range_has_to_reach_beyond_an_upper_limit(tables, make_samples):
    for limit, verdict in ((7.4, MET), (7.6, NOT_MET)):
        found, _ = tables(make_samples(30), f"[decision]\nlimit = {limit}")
        assert found["ICH"]["range, to"].verdict == verdict


def test_accuracy_by_level_by_hand(tables, make_samples):
    found, result = tables(make_samples(40), '[validation]\nsamples = ["S01..S09"]')
    checked = result.validation
    errors = (checked.predicted - checked.reference)[:3]
    assert found["ICH"]["accuracy, low level: bias"].found == pytest.approx(np.mean(errors))
