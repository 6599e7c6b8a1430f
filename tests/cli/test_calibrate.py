"""``quant calibrate``: what it prints, what it leaves, and that the published sets come out of it."""

import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from quant.cli.calibrate import file_name, model_files
from quant.errors import RecipeError
from quant.model.calibration import ModelState
from quant.model.storage import load_model, save_model

ROOT = Path(__file__).resolve().parents[2]
VALUES = ROOT / "tests" / "reference_values"


def test_tecator(project) -> None:
    out = project.folder / "made" / "here"
    result = project.run("calibrate", ROOT / "configs" / "tecator.toml", "--out", out)
    assert result.exit_code == 0
    assert result.stderr == ""
    models = ["fat.model", "moisture.model", "protein.model"]
    names = [*models, "report.html", "calibration.json", "validation-looks.json"]
    assert sorted(path.name for path in out.iterdir()) == sorted(names)
    for name in names:
        assert str(out / name) in result.stdout
    written = json.loads((out / "calibration.json").read_text(encoding="utf-8"))
    expected = json.loads((VALUES / "tecator.json").read_text(encoding="utf-8"))["results"]
    for entry in written["analytes"]:
        figures = expected[entry["analyte"]]["sg_d2_w9p2__snv"]
        assert entry["cross_validation"]["rmsecv"] == pytest.approx(figures["rmsecv_interleaved"], abs=1e-8)
        model = load_model(out / f"{entry['analyte']}.model")
        assert model.factors == entry["factors"]
        assert model.figures["RMSECV"] == entry["cross_validation"]["rmsecv"][entry["factors"]]
    assert [entry["analyte"] for entry in written["analytes"]] == ["fat", "moisture", "protein"]


def test_the_model_knows_where_it_came_from(project) -> None:
    assert project.calibrate().exit_code == 0
    model = load_model(project.folder / "out" / "acid.model")
    assert model.recipe == (project.folder / "recipe.toml").read_text(encoding="utf-8")
    assert model.training[0].name == "spectra.csv"
    assert dict(model.domain) == {"technique": ("ATR",), "resolution": ("4",)}
    assert str(model.state) == "draft"
    assert set(model.versions) == {"quant", "numpy", "python"}


def test_samples_left_out_are_told(project) -> None:
    project.replace("recipe.toml", "[regression]", '[[exclude]]\nsamples = ["S03"]\nreason = "spilt"\n\n[regression]')
    result = project.calibrate()
    assert result.exit_code == 0
    assert "left out: S03 (spilt)" in result.stdout
    assert "no validation samples: how it does on new material is not proven" in result.stdout


def test_a_folder_is_asked_for(project) -> None:
    result = project.run("calibrate", project.folder / "recipe.toml")
    assert result.exit_code == 2
    assert "Missing option '--out'" in result.stderr


def test_a_file_that_a_step_names_is_among_the_training_files(project) -> None:
    axis = np.linspace(1800.0, 1600.0, 41)
    rows = "".join(f"{x:g},{0.5 + ((x - 1700) / 100) ** 3!r}\n" for x in axis.tolist())
    (project.folder / "water.csv").write_text(f"cm-1,absorbance\n{rows}", encoding="utf-8")
    step = '[[preprocessing]]\nstep = "emsc"\ninterferent_file = "water.csv"\n\n[regression]'
    project.replace("recipe.toml", "[regression]", step)
    names = [source.name for source in load_model(project.make_model()).training]
    assert names == ["spectra.csv", "reference.csv", "water.csv"]


def test_a_place_that_cannot_be_written(project) -> None:
    (project.folder / "file").write_text("in the way", encoding="utf-8")
    result = project.run("calibrate", project.folder / "recipe.toml", "--out", project.folder / "file" / "out")
    assert result.exit_code == 2
    assert result.stderr == (
        f"Error: {project.folder}/file/out cannot be written to (Not a directory); expected a folder that may be. "
        "Choose another place.\n"
    )


@pytest.mark.parametrize(
    ("analyte", "expected"),
    [
        ("ethyl acetate", "ethyl-acetate"),
        ("../../etc", "etc"),
        ("a/b\\c", "a-b-c"),
        ("Säure 1,2", "Säure-1-2"),
        ("%", "analyte"),
    ],
)
def test_file_names(analyte: str, expected: str) -> None:
    assert file_name(analyte) == expected


def test_names_that_differ_in_capitals_only_are_refused() -> None:
    assert model_files(["acid", "ester"]) == {"acid": "acid.model", "ester": "ester.model"}
    with pytest.raises(RecipeError, match=r"'acid', 'ACID' would have one file name \(acid\.model\)"):
        model_files(["acid", "ester", "ACID"])


@pytest.mark.parametrize(("largest", "code"), [("0.5", 0), ("1e-6", 1)])
def test_criteria_decide_on_the_exit_code_and_looks_are_counted(project, largest: str, code: int) -> None:
    text = f'[validation]\nsamples = ["S03", "S06", "S09"]\n\n[acceptance]\nmax_rmsep = {largest}\n\n[regression]'
    project.replace("recipe.toml", "[regression]", text)
    result = project.calibrate()
    assert result.exit_code == code
    ledger = project.folder / "out" / "validation-looks.json"
    assert f"looks   {ledger}\n" in result.stdout
    first = ledger.read_bytes(), (project.folder / "out" / "calibration.json").read_bytes()
    assert project.calibrate().exit_code == code
    assert (ledger.read_bytes(), (project.folder / "out" / "calibration.json").read_bytes()) == first
    seal = json.loads(first[1])["analytes"][0]["audit"]["seal"]
    assert (seal["look"], seal["fixed_beforehand"]) == (1, True)
    assert seal["statement"].startswith("first look at this validation set; the criteria of acceptance were fixed")


def test_a_model_that_is_more_than_a_draft_is_not_replaced(project) -> None:
    path = project.make_model()
    save_model(replace(load_model(path), state=ModelState(name="approved", by="QA")), path)
    before = path.read_bytes()
    result = project.calibrate()
    assert result.exit_code == 2
    assert "acid.model holds a model that is approved by QA" in result.stderr
    assert path.read_bytes() == before


def test_an_interruption_leaves_no_model_without_its_report(project, monkeypatch) -> None:
    def interrupted(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("quant.reports.write.render_page", interrupted)
    assert project.calibrate().exit_code == 130
    assert not list((project.folder / "out").glob("*.model"))
