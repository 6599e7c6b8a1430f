"""``quant inspect``: what it prints and writes."""

import json


def test_what_was_read_is_printed_and_written(project) -> None:
    project.replace("reference.csv", "S03,2.455\n", "S30,2.455\n")
    written = project.folder / "found" / "inspection.json"
    result = project.run("inspect", project.folder / "recipe.toml", "--out", written.parent)
    assert result.exit_code == 0
    assert "1800 → 1600 cm⁻¹, 41 points, every 5 cm⁻¹ (falling)" in result.stdout
    record = json.loads(written.read_text(encoding="utf-8"))
    assert (written.parent / "inspection.html").read_text(encoding="utf-8").startswith("<!DOCTYPE html>")
    assert record["accepted"] is True
    [found] = record["sets"]
    assert (found["n_files"], found["n_spectra"], found["n_samples"]) == (1, 12, 11)
    assert found["spectra_without_values"] == ["S03"]
    assert found["values_without_spectra"] == ["S30"]


def test_a_stop_is_exit_code_1(project) -> None:
    rows = (project.folder / "spectra.csv").read_text(encoding="utf-8").splitlines()
    cells = rows[1].split(",")
    rows[1] = ",".join([cells[0], *(f"{100 * 10 ** -float(cell):.5f}" for cell in cells[1:])])
    (project.folder / "spectra.csv").write_text("\n".join(rows) + "\n", encoding="utf-8")
    result = project.run("inspect", project.folder / "recipe.toml")
    assert result.exit_code == 1
    assert "stop   1 spectrum looks like another quantity than absorbance\n       S01." in result.stdout


def test_a_wrong_recipe(project) -> None:
    project.replace("recipe.toml", "title", "titel")
    result = project.run("inspect", project.folder / "recipe.toml")
    assert result.exit_code == 2
    assert "unknown key 'titel'. Did you mean 'title'?" in result.stderr
