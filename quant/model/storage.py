"""Model files: a zip of one JSON manifest and plain NumPy arrays, never pickle."""

import io
import json
import struct
import zipfile
import zlib
from pathlib import Path
from typing import Any

import numpy as np
from numpy.lib import format as npy

from quant.arrays import AnyArray
from quant.errors import ModelFileError
from quant.files import read_bytes, whole_file
from quant.model.calibration import Calibration
from quant.model.identity import fingerprint_of_parts
from quant.model.manifest import from_manifest, to_manifest

LARGEST_ENTRY = 256 * 2**20  # bytes of one unpacked entry
REPRODUCES = 1e-9  # share of the calibrated range within which a loaded model repeats its own predictions
# What zipfile, json, NumPy and the constructors raise when they meet bytes that are not theirs.
_DAMAGE = (
    *(zipfile.BadZipFile, zlib.error, struct.error, EOFError, OSError),
    *(ValueError, LookupError, TypeError, AttributeError, ArithmeticError, MemoryError, RuntimeError),
)
_SEAL = "fingerprint"  # of everything else in the file; the first models of this format had none
_EPOCH = (1980, 1, 1, 0, 0, 0)  # the same model gives the same bytes


def save_model(model: Calibration, path: str | Path) -> Path:
    """Write a model file, whole or not at all.

    Parameters
    ----------
    model : Calibration
    path : str or Path
        Where to; an existing file is replaced.

    Returns
    -------
    Path
        Where it was written.
    """
    manifest, arrays = to_manifest(model)
    manifest[_SEAL] = fingerprint_of_parts(manifest, arrays)
    with whole_file(path) as stream, zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as archive:
        _write(archive, "manifest.json", json.dumps(manifest, indent=2, ensure_ascii=False, allow_nan=False).encode())
        for name, array in arrays.items():
            buffer = io.BytesIO()
            npy.write_array(buffer, np.ascontiguousarray(array), allow_pickle=False)
            _write(archive, f"arrays/{name}.npy", buffer.getvalue())
    return Path(path)


def load_model(path: str | Path) -> Calibration:
    """Read a model file and make sure that it still predicts what it did when it was saved.

    Parameters
    ----------
    path : str or Path
        A file written by `save_model`.

    Raises
    ------
    ModelFileError
        No model file, a damaged or altered one, one of a newer format, or a model that no longer reproduces its test
        predictions to 1e-9 of its calibrated range.
    FileFormatError
        The file cannot be read at all.
    """
    content = read_bytes(path)
    try:
        manifest, arrays = _read(content)
        stated = manifest.pop(_SEAL, None)
        model = from_manifest(manifest, arrays)
        _prove(model)
        _compare(stated, fingerprint_of_parts(manifest, arrays))
    except ModelFileError as problem:
        raise ModelFileError(f"{path}: {problem}") from problem
    except _DAMAGE as problem:
        raise ModelFileError(
            f"{path} is no intact model file ({type(problem).__name__}: {problem}); expected one written by "
            "'quant calibrate'. Fetch an undamaged copy."
        ) from problem
    return model


def _write(archive: zipfile.ZipFile, name: str, content: bytes) -> None:
    entry = zipfile.ZipInfo(name, date_time=_EPOCH)
    entry.compress_type = zipfile.ZIP_DEFLATED
    entry.external_attr = 0o644 << 16
    archive.writestr(entry, content)


def _read(content: bytes) -> tuple[dict[str, Any], dict[str, AnyArray]]:
    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        large = [entry.filename for entry in archive.infolist() if entry.file_size > LARGEST_ENTRY]
        if large:
            raise ModelFileError(
                f"Entry {large[0]} unpacks to more than {LARGEST_ENTRY >> 20} MiB; no model is that large."
            )
        manifest = json.loads(archive.read("manifest.json"))
        arrays = {
            name.removeprefix("arrays/").removesuffix(".npy"): npy.read_array(
                io.BytesIO(archive.read(name)), allow_pickle=False
            )
            for name in archive.namelist()
            if name.startswith("arrays/")
        }
    return manifest, arrays


def _prove(model: Calibration) -> None:
    """Predict the kept test spectra again, with all that tells whether the model applies to them."""
    try:
        with np.errstate(all="ignore"):  # what comes of damaged numbers is refused, not warned of
            off = np.abs(model.predict_values(model.test_spectra) - model.test_predictions)
            processed = model.process(model.test_spectra)
            np.stack([model.method.leverage_each(processed)[-1], model.method.residual_each(processed)[-1]])
    except _DAMAGE as problem:
        raise ModelFileError(f"the model cannot predict its own test spectra ({problem}). Do not use it.") from problem
    allowed = REPRODUCES * (model.limits.highest - model.limits.lowest)
    if not (off <= allowed).all():
        raise ModelFileError(
            f"the model no longer reproduces its own test predictions (off by up to {np.max(off, initial=0):.3g} "
            f"{model.analyte.unit}, allowed {allowed:.3g}). Do not use it; fetch an undamaged copy or calibrate again."
        )


def _compare(stated: object, found: str) -> None:
    if stated is not None and stated != found:
        raise ModelFileError(
            f"the content was altered after the model was saved (fingerprint {found[:16]}, stated {str(stated)[:16]}). "
            "Do not use it; fetch an unaltered copy, or make changes in Python and save them with 'save_model'."
        )
