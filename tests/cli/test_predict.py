"""``quant predict``: the table, its files, the exit code."""

import csv
import json

import numpy as np
import pytest

from quant.prediction.result import Prediction
from quant.readers.matrix import write_matrix
from quant.result import field_docs
from quant.spectra.spectra_set import SpectraSet


@pytest.fixture
def calibrated(project):
    """Return a project whose model is made."""
    project.make_model()
    return project


def test_the_table(calibrated, make_spectra) -> None:
    new = make_spectra(np.array([3.0, 5.0]), 3)
    result = calibrated.run(
        "predict", calibrated.folder / "out" / "acid.model", calibrated.write_spectra(new, "new.csv")
    )
    lines = result.stdout.splitlines()
    assert result.exit_code == 0
    assert lines[0] == "acid: PLS, 2 factors, 12 samples, 1 to 9 % m/m, state: draft"
    assert lines[1].split() == ["sample", "value", "unit", "std", "error", "95", "%", "from", "to", "applies?"]
    assert [line.split()[0] for line in lines[2:4]] == ["S01", "S02"]
    assert lines[2].endswith("applicable")


def test_csv_and_json_hold_the_same(calibrated) -> None:
    model, spectra = calibrated.folder / "out" / "acid.model", calibrated.folder / "spectra.csv"
    for suffix in ("csv", "JSON"):
        table = calibrated.folder / f"table.{suffix}"
        result = calibrated.run("predict", model, spectra, "--out", table)
        assert result.exit_code == 0
        assert result.stdout.endswith(f"table   {table}\n")
    with (calibrated.folder / "table.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    record = json.loads((calibrated.folder / "table.JSON").read_text(encoding="utf-8"))
    assert list(rows[0]) == list(record["predictions"][0]) == list(field_docs(Prediction))
    assert [row["sample"] for row in rows] == [f"S{number:02d}" for number in range(1, 13)]
    for row, entry in zip(rows, record["predictions"], strict=True):
        for key in ("value", "standard_error", "low", "high", "residual", "leverage"):
            assert float(row[key]) == entry[key]  # no digit is lost
        assert row["true_low"] == ""
        assert entry["true_low"] is None
        assert row["true_note"] == entry["true_note"] == "no laboratory error stated"


def test_samples_by_ranges(calibrated) -> None:
    model, spectra = calibrated.folder / "out" / "acid.model", calibrated.folder / "spectra.csv"
    table = calibrated.folder / "table.json"
    result = calibrated.run("predict", model, spectra, "--samples", "S02..S04, S11", "--out", table)
    assert result.exit_code == 0
    record = json.loads(table.read_text(encoding="utf-8"))
    assert [row["sample"] for row in record["predictions"]] == ["S02", "S03", "S04", "S11"]
    refused = calibrated.run("predict", model, spectra, "--samples", "S11..S14")
    assert refused.exit_code == 3
    assert "No spectrum of S13, S14; the set holds S01, S02, S03, S04, S05 and 7 more." in refused.stderr
    backwards = calibrated.run("predict", model, spectra, "--samples", "S04..S02")
    assert backwards.exit_code == 2
    assert (
        "Sample range 'S04..S02' runs from 4 to 2; expected a rising range of at most 100000 samples."
        in backwards.stderr
    )


def test_a_sample_the_model_does_not_apply_to(calibrated, make_spectra) -> None:
    good = make_spectra(np.array([3.0, 5.0]), 3)
    values = good.values.copy()
    values[1] += 0.1 * np.exp(-(((good.axis.values - 1640) / 10) ** 2))  # a band no standard has
    file = calibrated.write_spectra(SpectraSet(values, good.axis, ["good", "strange"]), "new.csv")
    table = calibrated.folder / "table.json"
    result = calibrated.run("predict", calibrated.folder / "out" / "acid.model", file, "--out", table)
    assert result.exit_code == 1
    assert "not applicable" in result.stdout
    assert "strange: residual spectrum" in result.stdout
    assert "times its warning limit" in result.stdout
    record = json.loads(table.read_text(encoding="utf-8"))  # the table is written all the same
    assert [row["applicability"] for row in record["predictions"]] == ["applicable", "not applicable"]


def test_a_value_outside_the_calibrated_range(calibrated, make_spectra) -> None:
    far = calibrated.write_spectra(make_spectra(np.array([20.0]), 3), "far.csv")
    result = calibrated.run("predict", calibrated.folder / "out" / "acid.model", far)
    assert result.exit_code == 1
    assert "value outside the calibrated range 1 to 9" in result.stdout


@pytest.mark.parametrize("name", ["table.xls", "table", "table.csv.bak"])
def test_a_wrong_suffix_is_refused_before_anything_is_read(project, name: str) -> None:
    result = project.run("predict", project.folder / "no.model", "no.csv", "--out", name)
    assert result.exit_code == 2
    assert f"--out {name}: expected a name that ends in .csv or .json." in result.stderr


def test_spectra_are_asked_for(calibrated) -> None:
    result = calibrated.run("predict", calibrated.folder / "out" / "acid.model")
    assert result.exit_code == 2
    assert "Missing argument 'FILES...'" in result.stderr


def test_new_files_are_read_as_the_calibrations_own(project, make_spectra) -> None:
    for file, spectra in (
        ("spectra.csv", make_spectra(np.linspace(1.0, 9.0, 12).round(3), 1)),
        ("new.csv", make_spectra(np.array([4.0]), 5)),
    ):
        write_matrix(spectra, project.folder / file, separator=";", decimal=",")
    project.replace(
        "recipe.toml", '["spectra.csv"]', '["spectra.csv"]\nseparator = ";"\ndecimal = ","\naxis_unit = "cm-1"'
    )
    project.make_model()
    table = project.folder / "table.json"
    assert (
        project.run(
            "predict", project.folder / "out" / "acid.model", project.folder / "new.csv", "--out", table
        ).exit_code
        == 0
    )
    [row] = json.loads(table.read_text(encoding="utf-8"))["predictions"]
    assert row["value"] == pytest.approx(4.0, abs=0.05)


def test_files_named_otherwise_than_the_calibrations(calibrated, make_spectra) -> None:
    new = calibrated.write_spectra(make_spectra(np.array([3.0]), 3), "other.csv")
    text = new.read_text(encoding="utf-8").replace("sample,", "vial,", 1)
    new.write_text(text, encoding="utf-8")
    model = calibrated.folder / "out" / "acid.model"
    refused = calibrated.run("predict", model, new)
    assert refused.exit_code == 3
    assert "sample" in refused.stderr
    result = calibrated.run("predict", model, new, "--sample-column", "vial")
    assert result.exit_code == 0
    assert result.stdout.splitlines()[2].startswith("S01")


def test_a_note_is_compared_with_the_calibrations_and_has_a_value(calibrated) -> None:
    model, spectra = calibrated.folder / "out" / "acid.model", calibrated.folder / "spectra.csv"
    result = calibrated.run("predict", model, spectra, "--note", "technique")
    assert result.exit_code == 2
    assert "--note technique: expected a name, =, and a value, such as technique=ATR." in result.stderr
    assert calibrated.run("predict", model, spectra, "--note", "operator=K").exit_code == 0


def test_a_limit_given_with_the_samples(calibrated, make_spectra) -> None:
    new = calibrated.write_spectra(make_spectra(np.array([3.0, 5.0]), 3), "new.csv")
    model, table = calibrated.folder / "out" / "acid.model", calibrated.folder / "table.json"
    both = calibrated.run("predict", model, new, "--limit", "8.5", "--risk", "0.01", "--out", table)
    assert both.exit_code == 0
    assert both.stdout.splitlines()[1] == "upper limit 8.5 % m/m (given with the samples), risk 1 %"
    assert [row["decision"] for row in json.loads(table.read_text("utf-8"))["predictions"]] == ["accept", "accept"]
    one = calibrated.run("predict", model, new, "--lower-limit", "4.0", "--out", table)
    assert one.exit_code == 1
    rows = json.loads(table.read_text("utf-8"))["predictions"]
    assert [(row["decision"], row["limit"]) for row in rows] == [("reject", 4.0), ("accept", 4.0)]
    refused = calibrated.run("predict", model, new, "--limit", "4", "--lower-limit", "2")
    assert refused.exit_code == 2
    assert "--limit and --lower-limit were both given; expected one of them." in refused.stderr
    assert calibrated.run("predict", model, new, "--limit", "4", "--risk", "0.7").exit_code == 2


def test_the_models_own_limit(project, make_spectra) -> None:
    project.replace("recipe.toml", "[regression]", '[decision]\nlimit = 4.0\nname = "IPC 2"\n\n[regression]')
    model = project.make_model()
    new = project.write_spectra(make_spectra(np.array([3.0, 5.0]), 3), "new.csv")
    result = project.run("predict", model, new)
    assert result.exit_code == 1
    assert result.stdout.splitlines()[1] == "IPC 2: upper limit 4 % m/m (stated in the recipe), risk 5 %"


def test_a_risk_without_a_limit_and_no_samples_are_refused(calibrated) -> None:
    model, spectra = calibrated.folder / "out" / "acid.model", calibrated.folder / "spectra.csv"
    alone = calibrated.run("predict", model, spectra, "--risk", "0.01")
    assert alone.exit_code == 2
    assert "--risk belongs to --limit or --lower-limit; expected one of them beside it." in alone.stderr
    nothing = calibrated.run("predict", model, spectra, "--samples", " ")
    assert nothing.exit_code == 2
    assert "--samples is empty" in nothing.stderr


def test_a_range_with_a_dash_is_told_how_it_is_written(calibrated) -> None:
    model, spectra = calibrated.folder / "out" / "acid.model", calibrated.folder / "spectra.csv"
    result = calibrated.run("predict", model, spectra, "--samples", "S02-S04")
    assert result.exit_code == 3
    assert "A range of samples is written 'S02..S04'." in result.stderr


def test_the_table_is_not_written_over_the_spectra(calibrated) -> None:
    model, spectra = calibrated.folder / "out" / "acid.model", calibrated.folder / "spectra.csv"
    before = spectra.read_bytes()
    result = calibrated.run("predict", model, spectra, "--out", spectra.parent / "out" / ".." / "spectra.csv")
    assert result.exit_code == 2
    assert "spectra.csv: this file is read by the command and would be lost. Name another file." in result.stderr
    assert spectra.read_bytes() == before


def test_missing_points_are_told_with_their_sample(calibrated) -> None:
    lines = (calibrated.folder / "spectra.csv").read_text("utf-8").splitlines()
    cells = lines[3].split(",")
    lines[3] = ",".join([*cells[:9], "", *cells[10:]])
    (calibrated.folder / "new.csv").write_text("\n".join(lines) + "\n", "utf-8")
    result = calibrated.run("predict", calibrated.folder / "out" / "acid.model", calibrated.folder / "new.csv")
    assert result.exit_code == 3
    assert "S03: 1 of 12 spectra have missing points" in result.stderr
