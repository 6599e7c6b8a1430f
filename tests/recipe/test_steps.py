"""Options of a step are the parameters of its class, strictly."""

import numpy as np
import pytest

from quant.errors import RecipeError
from quant.preprocessing.registry import STEPS
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.recipe.steps import file_options, make_step, options_model, steps_schema

PLACE = "a.toml, [[preprocessing]] number 1"


def no_file(file):
    raise AssertionError(f"{file} is read, though the table names no file")


@pytest.mark.parametrize("name", STEPS)
def test_options_are_the_parameters_but_for_the_axis_and_files_for_spectra(name):
    given = {"keep_ranges": {"ranges": [[1, 2]]}, "leave_out_ranges": {"ranges": [[1, 2]]}}
    given["orthogonal_removal"] = {"difference_file": "d.csv"}
    step = make_step({"step": name, **given.get(name, {})}, PLACE, lambda _: np.ones((1, 3)))
    assert type(step) is STEPS[name]
    options = {file_options(name).get(key, key) for key in step.parameter_names()}
    assert set(options_model(name).model_fields) == options - {"axis"}


def test_the_files_there_are():
    files = {name: file_options(name) for name in STEPS if file_options(name)}
    assert files == {
        "emsc": {"interferents": "interferent_file", "analytes": "analyte_file"},
        "orthogonal_removal": {"differences": "difference_file"},
    }


def test_spectra_of_a_file_arrive():
    asked = []

    def read(file):
        asked.append(file)
        return np.ones((2, 3))

    step = make_step({"step": "emsc", "polynomial": 1, "interferent_file": "water.csv"}, PLACE, read)
    assert asked == ["water.csv"]
    assert step.interferents.shape == (2, 3)
    assert step.analytes is None
    assert step.polynomial == 1


def test_options_arrive():
    step = make_step({"step": "savitzky_golay", "window": 9, "polynomial": 3, "derivative": 1}, PLACE, no_file)
    assert isinstance(step, SavitzkyGolay)
    assert (step.window, step.polynomial, step.derivative) == (9, 3, 1)
    kept = make_step({"step": "keep_ranges", "ranges": [[1800, 1600.5]]}, PLACE, no_file)
    assert [tuple(pair) for pair in kept.ranges] == [(1800, 1600.5)]


@pytest.mark.parametrize(
    ("table", "message"),
    [
        ({"step": "snvv"}, "unknown step 'snvv'. Did you mean 'snv'? Steps there are: absorbance, "),
        ({"step": ["snv"]}, "unknown step ['snv']."),
        ({"step": "keep_ranges"}, "step 'keep_ranges': the key 'ranges' is missing; expected it, since the step does"),
        ({"step": "leave_out_ranges"}, "the key 'ranges' is missing"),
        ({"step": "orthogonal_removal"}, "the key 'difference_file' is missing"),
        ({}, "no key 'step'. Steps there are: "),
        ({"step": "savitzky_golay", "windw": 9}, "step 'savitzky_golay': unknown key 'windw'. Did you mean 'window'?"),
        ({"step": "savitzky_golay", "axis": [1, 2]}, "unknown key 'axis'"),
        ({"step": "savitzky_golay", "window": "9"}, "window = '9'; expected a valid integer."),
        ({"step": "savitzky_golay", "window": True}, "window = True; expected a valid integer."),
        ({"step": "savitzky_golay", "window": 9.5}, "window = 9.5; expected a valid integer."),
        ({"step": "emsc", "interferents": [[1, 2]]}, "unknown key 'interferents'. Did you mean 'interferent_file'?"),
        ({"step": "emsc", "interferent_file": 3}, "interferent_file = 3; expected a valid string."),
        ({"step": "emsc", "interferent_file": ""}, "interferent_file = ''; expected"),
        ({"step": "gap_derivative", "derivative": 3}, "derivative = 3; expected 1 or 2."),
        ({"step": "normalise_band", "signal": "hight"}, "signal = 'hight'; expected 'area', 'height' or 'height_at'."),
        ({"step": "normalise_band", "range": [1800]}, "range, entry 2"),
        ({"step": "keep_ranges", "ranges": [1800, 1600]}, "ranges, entry 1 = 1800; expected a valid array."),
        ({"step": "keep_ranges", "ranges": [[1800, "x"]]}, "ranges, entry 1, entry 2 = 'x'; expected a valid number."),
    ],
)
def test_what_is_refused(table, message):
    with pytest.raises(RecipeError) as caught:
        make_step(table, PLACE, no_file)
    assert str(caught.value).startswith(PLACE)
    assert message in str(caught.value)


def test_the_schema_explains_every_option_of_every_step():
    schema = steps_schema()["oneOf"]
    assert [entry["title"] for entry in schema] == list(STEPS)
    for entry in schema:
        assert entry["properties"]["step"]["const"] == entry["title"]
        assert all(value["description"] for value in entry["properties"].values())
