"""``quant revalidate``: files in, verdict and exit code out."""

import json

import numpy as np
import pytest

from quant.model.storage import load_model

N = 16


@pytest.fixture
def visit(project, make_spectra):
    """The project's model, and standards before and after a shift of the axis by half a point."""
    model = project.make_model()
    values = np.linspace(1.5, 8.5, N).round(3)
    axis = np.linspace(1800.0, 1600.0, 41)
    project.write_spectra(make_spectra(values, seed=2, axis=axis), "before.csv")
    project.write_spectra(make_spectra(values, seed=3, axis=axis), "same.csv")
    project.write_spectra(make_spectra(values, seed=4), "moved.csv")
    moved = make_spectra(values, seed=4, axis=axis - 2.5)
    text = (project.folder / "moved.csv").read_text(encoding="utf-8").splitlines()
    rows = [f"{s},{','.join(map(str, row))}" for s, row in zip(moved.sample_ids, moved.values.tolist(), strict=True)]
    (project.folder / "moved.csv").write_text("\n".join([text[0], *rows]) + "\n", encoding="utf-8")
    table = [f"{sample},{value}" for sample, value in zip(moved.sample_ids, values.tolist(), strict=True)]
    (project.folder / "standards.csv").write_text("\n".join(["sample,acid", *table]) + "\n", encoding="utf-8")
    return model


def command(project, model, after, *more):
    files = {name: project.folder / f"{name}.csv" for name in ("before", after, "standards")}
    return project.run(
        "revalidate",
        model,
        "--before",
        files["before"],
        "--after",
        files[after],
        "--reference",
        files["standards"],
        *more,
    )


def test_an_unchanged_instrument_holds(project, visit):
    result = command(project, visit, "same", "--allowed-bias", 0.5, "--allowed-sep", 1)
    assert result.exit_code == 0, result.output
    assert "Verdict: holds" in result.output


def test_a_shift_is_found_and_a_new_model_written(project, visit):
    before, out = visit.read_bytes(), project.folder / "visit"
    options = ("--recipe", project.folder / "recipe.toml", "--apply", "proposed", "--out", out)
    result = command(project, visit, "moved", "--allowed-bias", 0.2, "--allowed-sep", 1, *options)
    assert result.exit_code == 1, result.output
    child = load_model(out / "acid-2.model")
    assert child.state.name == "provisional"
    assert {source.name for source in child.lineage.made_from} == {"before.csv", "moved.csv", "standards.csv"}
    assert visit.read_bytes() == before
    found = json.loads((out / "revalidation.json").read_text(encoding="utf-8"))
    assert found["verdict"] in ("holds after correction", "transfer needed")
    assert set(found) == {key for key in found["keys"] if "." not in key and "[" not in key}
    page = (out / "revalidation.html").read_bytes()
    again = command(project, visit, "same", *options)
    assert again.exit_code == 2
    assert "never replaced" in again.output
    assert (out / "revalidation.html").read_bytes() == page  # that tells why the model there was made


def test_apply_needs_a_folder(project, visit):
    result = command(project, visit, "moved", "--apply", "bias")
    assert result.exit_code == 2
    assert "--out" in result.output


def test_an_unknown_remedy_is_a_wrong_usage(project, visit):
    result = command(project, visit, "moved", "--apply", "luck", "--out", project.folder / "visit")
    assert result.exit_code == 2
    assert "--apply = 'luck'; expected one of 'proposed', 'limits'" in result.output
    assert not (project.folder / "visit").exists()


def test_a_certificate_needs_its_film(project, visit):
    result = command(project, visit, "moved", "--film-certificate", project.folder / "film.csv")
    assert result.exit_code == 2
    assert "expected that beside it" in result.output


def test_a_table_without_the_standards_is_bad_data(project, visit):
    (project.folder / "standards.csv").write_text("sample,acid\nX,1.0\n", encoding="utf-8")
    assert command(project, visit, "moved").exit_code == 3


def test_one_measurement_is_not_both_before_and_after(project, visit):
    result = command(project, visit, "before")
    assert result.exit_code == 3
    assert "The spectra before and after are the very same numbers for S01, S02" in result.output


@pytest.mark.parametrize("name", ["film", "blank"])
def test_a_last_record_alone_is_not_passed_over(project, visit, name):
    result = command(project, visit, "same", f"--{name}-before", project.folder / "before.csv")
    assert result.exit_code == 2
    assert f"--{name}-before is compared with --{name}; expected that beside it." in result.output
