import csv
import io
import json

import numpy as np
import pytest

from quant.planning.plan import plan
from quant.planning.result import PlanResult
from quant.readers.reference_csv import ColumnOf, read_reference
from quant.result import field_docs
from quant.spectra.reference_table import Analyte

REST = '[mixture]\ntotal = 100\nbalance = "rest"\n[weighing]\nbatch = 10\nmass_uncertainty = 0.0002\n'


@pytest.fixture
def result(make_plan, short_search) -> PlanResult:
    return plan(make_plan(2, standards=8, rest=f"{REST}[validation]\nsamples = 4\n"))


def test_the_design_is_read_back_as_reference_values(result, tmp_path):
    for which, amounts, ids in (
        ("standards", result.standards, result.sample_ids),
        ("validation", result.validation, result.validation_ids),
    ):
        (tmp_path / "design.csv").write_text(result.to_csv(which), encoding="utf-8")
        table = read_reference(tmp_path / "design.csv", [ColumnOf(Analyte(name)) for name in result.components])
        assert table.sample_ids == ids
        assert np.array_equal(table.values, amounts)
        assert {note["origin"] for note in table.notes} == {"blended"}


def test_masses_and_uncertainties_stand_beside(result):
    row = next(csv.DictReader(io.StringIO(result.to_csv())))
    assert float(row["a [g]"]) == pytest.approx(result.weighings.masses[0, 0], rel=1e-5)
    assert float(row["u(rest)"]) == pytest.approx(result.weighings.uncertainties[0, 2], rel=5e-3)


def test_every_table_is_printed(result):
    text = str(result)
    for heading in (
        "Standards [% m/m], in the order of preparation",
        "Validation samples [% m/m]",
        "Judgement of the standards",
        "Weighings [g]: 10 g of each sample",
        "How well n validation samples tell RMSEP",
        "Expected error of prediction",
        "Cautions",
        "unavoidable with a fixed total",
    ):
        assert heading in text
    assert text.count("S08") == 2  # composition and masses
    assert "total               100 % m/m, made up by rest" in text


def test_json_has_the_documented_keys(result):
    record = json.loads(result.to_json())
    assert list(record) == list(field_docs(PlanResult))
    assert len(record["standards"]) == 8
    assert record["judgement"]["balance"] == "rest"
