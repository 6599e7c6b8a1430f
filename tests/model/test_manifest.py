"""A calibration as plain values and named arrays, and back."""

import json

import numpy as np

from quant.model.calibration import STATES, ModelState
from quant.model.manifest import from_manifest, to_manifest
from quant.model.versions import own_version, program_versions


def test_there_and_back(model):
    manifest, arrays = to_manifest(model)
    again, same = to_manifest(from_manifest(json.loads(json.dumps(manifest)), dict(arrays)))
    assert json.dumps(again) == json.dumps(manifest)
    assert list(same) == list(arrays)
    assert all(same[name].tobytes() == array.tobytes() for name, array in arrays.items())


def test_arrays_are_named_by_where_they_belong(model):
    manifest, arrays = to_manifest(model)
    assert {"axis", "test_spectra", "test_predictions"} <= set(arrays)
    heads = {name.partition("/")[0] for name in arrays}
    assert heads <= {"axis", "test_spectra", "test_predictions", "steps", "method", "left_out"}
    assert [step["name"] for step in manifest["steps"]] in (
        [],
        ["leave_out_ranges", "msc", "savitzky_golay", "scale_columns"],
    )


def test_each_step_and_method_comes_back_by_its_state(model):
    spectra = model.test_spectra
    for step in model.steps:
        again = type(step).from_state(*step.state())
        assert again.transform(spectra).tobytes() == step.transform(spectra).tobytes()
        spectra = step.transform(spectra)
    method = type(model.method).from_state(*model.method.state())
    assert method.predict(spectra).tobytes() == model.method.predict(spectra).tobytes()
    assert method.leverage_each(spectra).tobytes() == model.method.leverage_each(spectra).tobytes()
    assert method.residual_each(spectra).tobytes() == model.method.residual_each(spectra).tobytes()


def test_states_are_told(model):
    assert STATES[0] == ModelState().name == "draft"
    assert (
        str(ModelState(name="retired", by="QA", on="2024-01-01", why="new probe"))
        == "retired by QA on 2024-01-01: new probe"
    )


def test_versions():
    assert program_versions()["quant"] == own_version()
    assert program_versions()["numpy"] == np.__version__
