"""Model files: the same bits come back, and whatever is damaged is refused."""

import io
import json
import zipfile
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from quant.errors import FileFormatError, ModelFileError, UsageError
from quant.model.calibration import ModelState
from quant.model.storage import LARGEST_ENTRY, load_model, save_model


def parts_of(path: Path) -> dict[str, bytes]:
    with zipfile.ZipFile(path) as archive:
        return {name: archive.read(name) for name in archive.namelist()}


def write_parts(path: Path, parts: dict[str, bytes]) -> None:
    with zipfile.ZipFile(path, "w") as archive:
        for name, content in parts.items():
            archive.writestr(name, content)


def without_fingerprint(text: bytes, **changes: object) -> bytes:
    """Return a manifest as the first programs wrote it, perhaps with other entries."""
    manifest = {**json.loads(text), **changes}
    del manifest["fingerprint"]
    return json.dumps(manifest).encode()


def npy(array: np.ndarray) -> bytes:
    stream = io.BytesIO()
    np.lib.format.write_array(stream, array)
    return stream.getvalue()


@pytest.fixture
def saved(model, tmp_path) -> Path:
    return save_model(model, tmp_path / "a.model")


def test_the_same_bits_come_back(model, saved):
    loaded = load_model(saved)
    assert loaded.predict_values(model.test_spectra).tobytes() == model.predict_values(model.test_spectra).tobytes()
    assert loaded.axis == model.axis
    assert loaded.analyte == model.analyte
    assert loaded.domain == model.domain == {"technique": ("ATR",)}
    assert loaded.reading == model.reading == {"decimal": ","}
    assert (loaded.limits, loaded.uncertainty, loaded.state) == (model.limits, model.uncertainty, model.state)
    assert (loaded.recipe, loaded.versions, loaded.figures) == (model.recipe, model.versions, model.figures)
    assert str(loaded) == str(model)
    assert [type(step) for step in loaded.steps] == [type(step) for step in model.steps]


def test_saving_twice_and_saving_what_was_loaded_gives_the_same_bytes(model, saved, tmp_path):
    first = saved.read_bytes()
    assert save_model(model, saved).read_bytes() == first
    assert save_model(load_model(saved), tmp_path / "b.model").read_bytes() == first
    with zipfile.ZipFile(saved) as archive:  # nothing tells when it was saved
        assert {entry.date_time for entry in archive.infolist()} == {(1980, 1, 1, 0, 0, 0)}


def test_a_state_is_kept(model, tmp_path):
    approved = replace(model, state=ModelState(name="approved", by="QA", on="2024-05-02", why="validated"))
    loaded = load_model(save_model(approved, tmp_path / "a.model"))
    assert loaded.state == approved.state
    assert str(loaded).endswith("state: approved by QA on 2024-05-02: validated")


def test_the_file_is_plain_json_and_plain_arrays(saved, model):
    parts = parts_of(saved)
    manifest = json.loads(parts.pop("manifest.json"))
    assert manifest["format"] == "quant calibration"
    assert manifest["format_version"] == 1
    assert manifest["recipe"] == model.recipe
    assert "Säure in µm" in manifest["recipe"]
    for name, content in parts.items():
        assert name.startswith("arrays/")
        assert name.endswith(".npy")
        assert np.load(io.BytesIO(content), allow_pickle=False).dtype.kind in "fib"


def test_loading_does_not_read_the_recipe(saved):
    parts = parts_of(saved)
    parts["manifest.json"] = without_fingerprint(parts["manifest.json"], recipe="no = [TOML")
    write_parts(saved, parts)
    assert load_model(saved).recipe == "no = [TOML"


def test_every_cut_is_refused(saved):
    content = saved.read_bytes()
    for length in range(1, len(content), max(len(content) // 60, 1)):
        saved.write_bytes(content[:length])
        with pytest.raises(ModelFileError, match=r"a\.model is no intact model file"):
            load_model(saved)


def test_a_flipped_byte_changes_nothing_or_is_refused(saved, model):
    content, expected = saved.read_bytes(), model.predict_values(model.test_spectra).tobytes()
    refused = 0
    for place in range(0, len(content), max(len(content) // 150, 1)):
        saved.write_bytes(content[:place] + bytes([content[place] ^ 0xFF]) + content[place + 1 :])
        try:
            loaded = load_model(saved)  # a time stamp or an attribute in the archive's own tables
        except ModelFileError:
            refused += 1
        else:
            assert loaded.predict_values(model.test_spectra).tobytes() == expected
            assert loaded.uncertainty == model.uncertainty
    assert refused > 100


@pytest.mark.parametrize("entry", ["manifest.json", "arrays/axis.npy", "arrays/test_spectra.npy"])
def test_a_missing_part_is_refused(saved, entry):
    parts = parts_of(saved)
    del parts[entry]
    write_parts(saved, parts)
    with pytest.raises(ModelFileError, match="KeyError"):
        load_model(saved)


def other_manifest(saved: Path, **changes: object) -> None:
    parts = parts_of(saved)
    parts["manifest.json"] = json.dumps({**json.loads(parts["manifest.json"]), **changes}).encode()
    write_parts(saved, parts)


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"format": "else"}, r"a\.model: The manifest says format 'else'; expected 'quant calibration'\."),
        ({"format_version": 2}, r"a\.model: The model file has format version 2; this program reads version 1\."),
        (
            {"steps": [{"name": "magic", "parameters": {}}]},
            r"a\.model: The model uses 'magic', which this program does not",
        ),
        (
            {"method": {"name": "magic", "parameters": {}}},
            r"a\.model: The model uses 'magic'.* expected pls, pcr, classical_least_squares, band_area",
        ),
        ({"steps": 3}, "no intact model file"),
        ({"limits": {"lowest": 1}}, "no intact model file"),
        ({"axis_unit": "furlong"}, "no intact model file"),
    ],
)
def test_another_manifest_is_refused(saved, changes, message):
    other_manifest(saved, **changes)
    with pytest.raises(ModelFileError, match=message):
        load_model(saved)


ALTERED = [
    ("uncertainty", "s0", 1e-6),
    ("limits", "residual_stop", 1e9),
    ("state", "name", "approved"),
    ("analyte", "unit", "g/L"),
]


@pytest.mark.parametrize(("part", "key", "value"), ALTERED)
def test_what_does_not_change_a_prediction_cannot_be_altered_either(saved, part, key, value):
    manifest = json.loads(parts_of(saved)["manifest.json"])
    other_manifest(saved, **{part: {**manifest[part], key: value}})
    with pytest.raises(ModelFileError, match=r"a\.model: the content was altered after the model was saved"):
        load_model(saved)


def test_arrays_that_only_intervals_use_cannot_be_altered_either(saved):
    parts = parts_of(saved)
    entry = next(name for name in parts if name.startswith("arrays/method/"))
    parts[entry] = npy(np.load(io.BytesIO(parts[entry])) * (1 + 1e-15))  # far below what the test spectra can tell
    write_parts(saved, parts)
    with pytest.raises(ModelFileError, match="altered after the model was saved"):
        load_model(saved)


@pytest.mark.parametrize("model", ["pls"], indirect=True)
def test_a_model_without_fingerprint_has_to_tell_whether_it_applies(saved):
    parts = parts_of(saved)
    parts["manifest.json"] = without_fingerprint(parts["manifest.json"])
    del parts["arrays/method/loadings_.npy"]
    write_parts(saved, parts)
    with pytest.raises(ModelFileError, match="cannot predict its own test spectra"):
        load_model(saved)


@pytest.mark.parametrize("text", [b"", b"[]", b"null", b"{", b"\xff\xfe", b"[" * 100_000])
def test_a_manifest_that_is_none_is_refused(saved, text):
    parts = parts_of(saved)
    parts["manifest.json"] = text
    write_parts(saved, parts)
    with pytest.raises(ModelFileError, match="no intact model file"):
        load_model(saved)


@pytest.mark.parametrize(
    "array",
    [
        npy(np.array([{"a": 1}], dtype=object)),
        npy(np.array(["a", "b"])),
        npy(np.zeros((0, 0))),
        npy(np.full(41, np.nan)),
        b"\x93NUMPY\x01\x00v\x00{'descr': '<f8', 'fortran_order': False, 'shape': (99999999999999,), }".ljust(127)
        + b"\n",
        b"no array",
    ],
    ids=["pickled", "text", "empty", "NaN", "beyond memory", "no array"],
)
@pytest.mark.parametrize("entry", ["axis", "test_spectra", "test_predictions"])
def test_another_array_is_refused(saved, array, entry):
    parts = parts_of(saved)
    parts[f"arrays/{entry}.npy"] = array
    write_parts(saved, parts)
    with pytest.raises(ModelFileError):
        load_model(saved)


def test_altered_predictions_are_refused_and_rounding_is_not(saved, model):
    parts = parts_of(saved)
    parts["manifest.json"] = without_fingerprint(parts["manifest.json"])
    span = model.limits.highest - model.limits.lowest
    for shift, refused in ((0.5e-9 * span, False), (2e-9 * span, True)):
        parts["arrays/test_predictions.npy"] = npy(model.test_predictions + np.array([0, 0, shift]))
        write_parts(saved, parts)
        if refused:
            with pytest.raises(ModelFileError, match="no longer reproduces its own test predictions"):
                load_model(saved)
        else:
            load_model(saved)


def test_an_entry_that_unpacks_beyond_measure_is_refused(saved):
    parts = parts_of(saved)
    with zipfile.ZipFile(saved, "w", zipfile.ZIP_DEFLATED, compresslevel=1) as archive:
        for name, content in parts.items():
            archive.writestr(name, content)
        with archive.open("arrays/bomb.npy", "w", force_zip64=True) as stream:
            block = bytes(2**22)
            for _ in range(LARGEST_ENTRY // len(block) + 1):
                stream.write(block)
    with pytest.raises(ModelFileError, match=r"Entry arrays/bomb\.npy unpacks to more than 256 MiB"):
        load_model(saved)


def test_no_file_and_no_folder(tmp_path, model):
    with pytest.raises(FileFormatError, match="no such file"):
        load_model(tmp_path / "none.model")
    assert save_model(model, tmp_path / "new" / "deep" / "a.model").exists()
    (tmp_path / "file").touch()
    with pytest.raises(UsageError, match="cannot be written"):
        save_model(model, tmp_path / "file" / "a.model")


def test_a_failure_while_saving_leaves_the_old_file(saved, model):
    before = saved.read_bytes()
    with pytest.raises(ValueError, match="Out of range float values"):
        save_model(replace(model, figures={"RMSECV": float("nan")}), saved)  # JSON has no NaN
    assert saved.read_bytes() == before
    # Half-way: the manifest is written when an array cannot be.
    with pytest.raises(ValueError, match="Object arrays cannot be saved"):
        save_model(replace(model, test_predictions=np.array([object()])), saved)
    assert saved.read_bytes() == before
    assert [path.name for path in saved.parent.iterdir()] == ["a.model"]
