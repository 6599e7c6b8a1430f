"""Options of a step are the parameters of its class, strictly."""

import pytest

from quant.errors import RecipeError
from quant.preprocessing.registry import STEPS
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.recipe.steps import make_step, options_model, steps_schema

PLACE = "a.toml, [[preprocessing]] number 1"


@pytest.mark.parametrize("name", STEPS)
def test_options_are_the_parameters_but_for_the_axis(name):
    step = make_step({"step": name}, PLACE)
    assert type(step) is STEPS[name]
    assert set(options_model(name).model_fields) == set(step.parameter_names()) - {"axis"}


def test_options_arrive():
    step = make_step({"step": "savitzky_golay", "window": 9, "polynomial": 3, "derivative": 1}, PLACE)
    assert isinstance(step, SavitzkyGolay)
    assert (step.window, step.polynomial, step.derivative) == (9, 3, 1)
    kept = make_step({"step": "keep_ranges", "ranges": [[1800, 1600.5]]}, PLACE)
    assert [tuple(pair) for pair in kept.ranges] == [(1800, 1600.5)]


@pytest.mark.parametrize(
    ("table", "message"),
    [
        ({"step": "snvv"}, "unknown step 'snvv'. Did you mean 'snv'? Steps there are: absorbance, "),
        ({"step": ["snv"]}, "unknown step ['snv']."),
        ({}, "no key 'step'. Steps there are: "),
        ({"step": "savitzky_golay", "windw": 9}, "step 'savitzky_golay': unknown key 'windw'. Did you mean 'window'?"),
        ({"step": "savitzky_golay", "axis": [1, 2]}, "unknown key 'axis'"),
        ({"step": "savitzky_golay", "window": "9"}, "window = '9'; expected a valid integer."),
        ({"step": "savitzky_golay", "window": True}, "window = True; expected a valid integer."),
        ({"step": "savitzky_golay", "window": 9.5}, "window = 9.5; expected a valid integer."),
        ({"step": "keep_ranges", "ranges": [1800, 1600]}, "ranges, entry 1 = 1800; expected a valid array."),
        ({"step": "keep_ranges", "ranges": [[1800, "x"]]}, "ranges, entry 1, entry 2 = 'x'; expected a valid number."),
    ],
)
def test_what_is_refused(table, message):
    with pytest.raises(RecipeError) as caught:
        make_step(table, PLACE)
    assert str(caught.value).startswith(PLACE)
    assert message in str(caught.value)


def test_the_schema_explains_every_option_of_every_step():
    schema = steps_schema()["oneOf"]
    assert [entry["title"] for entry in schema] == list(STEPS)
    for entry in schema:
        assert entry["properties"]["step"]["const"] == entry["title"]
        assert all(value["description"] for value in entry["properties"].values())
