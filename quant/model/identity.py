"""The fingerprint of a model, and its way back to the first calibration."""

import json
from collections.abc import Mapping
from hashlib import sha256
from typing import Any

import numpy as np

from quant.arrays import AnyArray
from quant.model.calibration import Calibration
from quant.model.lineage import Ancestor
from quant.model.manifest import to_manifest


def fingerprint_of(model: Calibration) -> str:
    """Return SHA-256 over everything that a model's file holds, however it was packed."""
    return fingerprint_of_parts(*to_manifest(model))


def fingerprint_of_parts(manifest: Mapping[str, Any], arrays: Mapping[str, AnyArray]) -> str:
    """Return SHA-256 over a manifest and named arrays: values, types and shapes."""
    content = sha256(json.dumps(manifest, sort_keys=True, ensure_ascii=False, allow_nan=False).encode())
    for name, array in sorted(arrays.items()):
        content.update(f"{name} {array.dtype.str} {array.shape}".encode())
        content.update(np.ascontiguousarray(array).tobytes())
    return content.hexdigest()


def as_ancestor(model: Calibration) -> Ancestor:
    """Return what a child keeps of its parent."""
    own = model.lineage
    return Ancestor(
        number=own.number,
        fingerprint=fingerprint_of(model),
        state=str(model.state),
        made_by=own.made_by,
        verdict=own.verdict,
        made_from=own.made_from or model.training,
        samples=own.samples,
    )


def trace(model: Calibration) -> tuple[str, ...]:
    """Return the model and its ancestors, one line each, back to the first calibration."""
    return tuple(entry.told() for entry in (as_ancestor(model), *reversed(model.lineage.ancestors)))
