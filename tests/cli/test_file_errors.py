"""Files that are missing, damaged, or do not fit each other: each with its exit code and the whole of its message."""

import shutil
from collections.abc import Callable

import numpy as np
import pytest

from quant.readers.jcamp_dx.writer import write_jcamp_dx
from quant.spectra.spectra_set import SpectraSet

DATA = 3


def test_no_recipe(project) -> None:
    result = project.calibrate("other.toml")
    assert result.exit_code == DATA
    assert result.stderr == (
        f"Error: {project.folder}/other.toml: no such file. "
        "Check the path (recipes count paths from their own folder).\n"
    )


def reference_without_a_value(project) -> None:
    project.replace("reference.csv", "S03,2.455", "S03,")


def one_value_for_all(project) -> None:
    rows = [f"S{number:02d},5\n" for number in range(1, 13)]
    (project.folder / "reference.csv").write_text("sample,acid\n" + "".join(rows), encoding="utf-8")


def reference_of_other_samples(project) -> None:
    text = (project.folder / "reference.csv").read_text(encoding="utf-8")
    (project.folder / "reference.csv").write_text(text.replace("S", "T"), encoding="utf-8")


def reference_with_two_rows_less(project) -> None:
    rows = (project.folder / "reference.csv").read_text(encoding="utf-8").splitlines(keepends=True)
    (project.folder / "reference.csv").write_text("".join(rows[:-2]), encoding="utf-8")


def standards_for_validation(project) -> None:
    shutil.copy(project.folder / "spectra.csv", project.folder / "validation.csv")
    project.replace("recipe.toml", "[regression]", '[validation]\nfiles = ["validation.csv"]\n\n[regression]')


FILES = {
    reference_without_a_value: "reference.csv, line 4: 1 of 12 samples have no reference value of acid: S03. Supply "
    'the values, or set missing = "drop" under [reference].',
    one_value_for_all: "All 12 reference values of acid are 5; expected values that span the range to predict. Check "
    "the column, or add standards.",
    reference_of_other_samples: "Not one of 12 samples with spectra (S01, S02, S03 and 9 more) is in the reference "
    "table (T01, T02, T03 and 9 more). Check how the sample ID is found: sample_column, sample_label or "
    "sample_pattern under [spectra], sample_column under [reference].",
    reference_with_two_rows_less: "2 of 12 samples with spectra have no row in the reference table: S11, S12. Add the "
    'rows, or set unmatched = "drop" under [reference].',
    standards_for_validation: "Both among the calibration samples and the validation samples: S01, S02, S03, S04, "
    "S05 and 7 more; expected different ones. Give separately prepared material its own sample IDs.",
}


@pytest.mark.parametrize("spoil", FILES, ids=lambda spoil: spoil.__name__)
def test_files_that_do_not_fit(project, spoil: Callable[..., None]) -> None:
    spoil(project)
    result = project.calibrate()
    assert result.stderr == f"Error: {FILES[spoil]}\n"
    assert result.exit_code == DATA


def test_two_axes(project, make_spectra) -> None:
    project.write_spectra(make_spectra(np.array([5.0]), 2, np.linspace(1800.0, 1602.0, 41)), "twelfth.csv")
    project.replace("recipe.toml", '["spectra.csv"]', '["spectra.csv", "twelfth.csv"]')
    result = project.calibrate()
    assert result.exit_code == DATA
    assert result.stderr == (
        f"Error: {project.folder}/twelfth.csv: The spectra of S01 lie on 1800 → 1602 cm⁻¹, 41 points, every 4.95 "
        "cm⁻¹; expected 1800 → 1600 cm⁻¹, 41 points, every 5 cm⁻¹. Measure on the same axis, or set resample = true "
        f"under [spectra]. The first file is {project.folder}/spectra.csv.\n"
    )


def test_transmittance_of_zero_or_less(project, make_spectra) -> None:
    spectra = make_spectra(np.linspace(1.0, 9.0, 12), 1)
    values = 10.0**-spectra.values
    values[2, 5], values[3, 5] = 0.0, -0.01
    project.write_spectra(SpectraSet(values, spectra.axis, spectra.sample_ids, "transmittance"), "spectra.csv")
    result = project.calibrate()
    assert result.exit_code == DATA
    assert result.stderr == (
        "Error: The spectra are transmittance, which is not proportional to concentration; expected absorbance. Add "
        '[[preprocessing]] with step = "absorbance" before the other steps that need it.\n'
    )
    project.replace("recipe.toml", "[regression]", '[[preprocessing]]\nstep = "absorbance"\n\n[regression]')
    result = project.calibrate()
    assert result.exit_code == DATA
    assert "2 point(s), at axis position(s) 1775; expected T > 0" in result.stderr
    assert "keep_ranges or leave_out_ranges before this step" in result.stderr
    project.replace(
        "recipe.toml",
        "[[preprocessing]]",
        '[[preprocessing]]\nstep = "keep_ranges"\nranges = [[1770, 1600]]\n\n[[preprocessing]]',
    )
    assert project.calibrate().exit_code == 0  # what the message advises helps


def test_truncated_jcamp_dx(project, make_spectra) -> None:
    spectra = make_spectra(np.linspace(1.0, 9.0, 12), 1)
    for i, sample in enumerate(spectra.sample_ids):
        write_jcamp_dx(spectra[[i]], project.folder / f"{sample}.dx")
    project.replace("recipe.toml", '"spectra.csv"', '"*.dx"')
    assert project.calibrate().exit_code == 0
    damaged = project.folder / "S05.dx"
    damaged.write_text(damaged.read_text(encoding="utf-8")[:-20], encoding="utf-8")
    result = project.calibrate()
    assert result.exit_code == DATA
    assert result.stderr.startswith(f"Error: {damaged}, line ")
    assert result.stderr.endswith("the file ends within a line; expected ##END=. Copy or export it again.\n")
