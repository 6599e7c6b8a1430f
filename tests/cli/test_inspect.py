"""``quant inspect``: what it prints and writes."""

import json

import numpy as np


def test_what_was_read_is_printed_and_written(project) -> None:
    project.replace("reference.csv", "S03,2.455\n", "S30,2.455\n")
    written = project.folder / "found" / "inspection.json"
    result = project.run("inspect", project.folder / "recipe.toml", "--out", written.parent)
    assert result.exit_code == 1  # calibrating refuses a sample without a row
    assert "1800 → 1600 cm⁻¹, 41 points, every 5 cm⁻¹ (falling)" in result.stdout
    record = json.loads(written.read_text(encoding="utf-8"))
    assert (written.parent / "inspection.html").read_text(encoding="utf-8").startswith("<!DOCTYPE html>")
    assert record["accepted"] is False
    assert [entry["code"] for entry in record["findings"] if entry["gravity"] == "stop"] == ["spectra_without_values"]
    project.replace("recipe.toml", 'file = "reference.csv"', 'file = "reference.csv"\nunmatched = "drop"')
    assert project.run("inspect", project.folder / "recipe.toml").exit_code == 0
    [found] = record["sets"]
    assert (found["n_files"], found["n_spectra"], found["n_samples"]) == (1, 12, 11)
    assert found["spectra_without_values"] == ["S03"]
    assert found["values_without_spectra"] == ["S30"]


def test_a_stop_is_exit_code_1(project, make_spectra) -> None:
    project.write_spectra(make_spectra(np.array([2.0, 3.0]), 2, np.linspace(1800.0, 1600.0, 51)), "more.csv")
    project.replace("recipe.toml", '"spectra.csv"', '"spectra.csv", "more.csv"')
    result = project.run("inspect", project.folder / "recipe.toml")
    assert result.exit_code == 1
    assert "stop   1 file on another axis than most spectra\n       more.csv (S01, S02)." in result.stdout


def test_a_wrong_recipe(project) -> None:
    project.replace("recipe.toml", "title", "titel")
    result = project.run("inspect", project.folder / "recipe.toml")
    assert result.exit_code == 2
    assert "unknown key 'titel'. Did you mean 'title'?" in result.stderr
