"""Files of spectra that a preprocessing step names."""

import numpy as np
import pytest

from quant.errors import AxisMismatchError, FileFormatError, QuantityError, RecipeError
from quant.preprocessing.savitzky_golay import savitzky_golay
from quant.recipe.load import recipe_from_text
from quant.recipe.pipeline import build_steps
from quant.recipe.step_files import step_sources
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import source_of

RECIPE = (
    'title = "t"\n[spectra]\nfiles = ["x"]\n{spectra}\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\n{steps}'
)
AXIS = SpectralAxis(np.linspace(1800.0, 1600.0, 41), "cm-1")  # every 5 cm⁻¹
KEEP = 'step = "keep_ranges"\nranges = [[1750, 1650]]'
EMSC = 'step = "emsc"\ninterferent_file = "water.csv"'


def curve(axis):
    return 0.5 + ((axis - 1700) / 100) ** 3  # local cubics put it on another axis without error


def build(folder, *steps, spectra="", quantity="absorbance"):
    tables = "".join(f"[[preprocessing]]\n{step}\n" for step in steps)
    recipe = recipe_from_text(RECIPE.format(spectra=spectra, steps=tables), name="a.toml", folder=folder)
    return build_steps(recipe, AXIS, quantity)


def write(folder, head, axis, values, name="water.csv"):
    rows = "".join(f"{x:g},{float(value)!r}\n" for x, value in zip(axis, values, strict=True))
    (folder / name).write_text(f"{head}\n{rows}")


def test_spectra_are_put_on_the_axis_and_go_through_the_steps_before(tmp_path):
    fine = np.arange(1640.0, 1762, 2)  # rising, and no wider than needed
    write(tmp_path, "cm-1,absorbance", fine, curve(fine))
    kept = AXIS.values[10:31]
    np.testing.assert_allclose(build(tmp_path, KEEP, EMSC)[1].interferents, [curve(kept)], rtol=1e-12)
    smooth = 'step = "savitzky_golay"\nwindow = 5\nderivative = 1'
    expected = savitzky_golay([curve(kept)], 5, 2, 1, kept)
    step = build(tmp_path, KEEP, smooth, EMSC)[2]
    np.testing.assert_allclose(step.interferents, expected, rtol=1e-9, atol=1e-12)
    np.testing.assert_array_equal(step.axis, kept)


def test_several_spectra_of_a_table(tmp_path):
    header = ",".join(f"{x:g}" for x in AXIS.values)
    rows = [",".join(["a", *["1"] * 41]), ",".join(["b", *["0.5", "-0.5"] * 20, "1"])]
    (tmp_path / "d.csv").write_text("\n".join([f"sample,{header}", *rows, ""]))
    step = build(
        tmp_path,
        'step = "orthogonal_removal"\ndifference_file = "d.csv"\ncomponents = 2',
        spectra='axis_unit = "cm-1"',
    )[0]
    assert step.differences.shape == (2, 41)
    assert step.components == 2


def test_transmittance_becomes_absorbance_where_the_recipe_does_so(tmp_path):
    write(tmp_path, "cm-1,percent transmittance", AXIS.values, 100 * 10 ** -curve(AXIS.values))
    absorbance = 'step = "absorbance"'
    percent = 'quantity = "percent_transmittance"'
    for steps, spectra, quantity in (((absorbance, EMSC), percent, "transmittance"), ((EMSC,), "", "absorbance")):
        step = build(tmp_path, *steps, spectra=spectra, quantity=quantity)[-1]
        np.testing.assert_allclose(step.interferents, [curve(AXIS.values)], rtol=1e-12)
    write(tmp_path, "cm-1,absorbance", AXIS.values, curve(AXIS.values))  # says what it is: believed
    step = build(tmp_path, absorbance, EMSC, spectra=percent, quantity="transmittance")[-1]
    np.testing.assert_allclose(step.interferents, [curve(AXIS.values)], rtol=1e-12)


def test_steps_that_are_not_linear_go_behind(tmp_path):
    write(tmp_path, "cm-1,absorbance", AXIS.values, curve(AXIS.values))
    assert len(build(tmp_path, EMSC, 'step = "snv"')) == 2
    with pytest.raises(RecipeError) as caught:
        build(tmp_path, KEEP, 'step = "snv"', 'step = "mean_centre"', EMSC)
    assert str(caught.value) == (
        "a.toml, [[preprocessing]] number 4: the spectra of water.csv go through the steps before; expected linear "
        "ones, but found snv, mean_centre, without meaning for spectra of single substances or differences. Put it "
        "behind this step."
    )


def test_what_does_not_fit(tmp_path):
    with pytest.raises(FileFormatError, match=r"water\.csv"):
        build(tmp_path, EMSC)
    short = AXIS.values[5:]
    write(tmp_path, "cm-1,absorbance", short, curve(short))
    with pytest.raises(AxisMismatchError, match=r"number 1: water\.csv does not cover the points .*keep_ranges"):
        build(tmp_path, EMSC)
    write(tmp_path, "nm,absorbance", AXIS.values, curve(AXIS.values))
    with pytest.raises(AxisMismatchError, match=r"water\.csv has its axis in nm; expected cm⁻¹"):
        build(tmp_path, EMSC)
    write(tmp_path, "cm-1,reflectance", AXIS.values, 0.1 + 0.1 * curve(AXIS.values))
    with pytest.raises(QuantityError, match=r"water\.csv holds reflectance; expected absorbance"):
        build(tmp_path, EMSC)


def test_the_files_are_known_by_their_fingerprints(tmp_path):
    write(tmp_path, "cm-1,absorbance", AXIS.values, curve(AXIS.values))
    tables = "".join(f"[[preprocessing]]\n{step}\n" for step in (KEEP, EMSC))
    recipe = recipe_from_text(RECIPE.format(spectra="", steps=tables), name="a.toml", folder=tmp_path)
    assert step_sources(recipe) == (source_of(tmp_path / "water.csv"),)
    assert step_sources(recipe_from_text(RECIPE.format(spectra="", steps=""), folder=tmp_path)) == ()
