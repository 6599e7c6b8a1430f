"""A calibration as plain values and named arrays, and back."""

from collections.abc import Mapping
from dataclasses import asdict
from typing import Any

from quant.arrays import AnyArray
from quant.errors import ModelFileError
from quant.estimator.base import Estimator
from quant.model.calibration import Calibration, Limits, ModelState, Uncertainty
from quant.model.decision_rule import DecisionRule
from quant.model.left_out_models import LeftOutModels
from quant.model.lineage import Lineage
from quant.model.revalidation_basis import RevalidationBasis
from quant.preprocessing.registry import CORRECTIONS, STEPS
from quant.regression.registry import METHODS
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import Source
from quant.spectra.reference_table import Analyte

FORMAT = "quant calibration"
FORMAT_VERSION = 1

Arrays = dict[str, AnyArray]

_STEPS = STEPS | CORRECTIONS


def to_manifest(model: Calibration) -> tuple[dict[str, Any], Arrays]:
    """Return what a model file holds: a manifest that JSON can write, and arrays by name."""
    arrays: Arrays = {
        "axis": model.axis.values,
        "test_spectra": model.test_spectra,
        "test_predictions": model.test_predictions,
    }
    steps = [
        {"name": _STEPS.name_of(type(step)), "parameters": _split(step, f"steps/{i}", arrays)}
        for i, step in enumerate(model.steps)
    ]
    manifest = {
        "format": FORMAT,
        "format_version": FORMAT_VERSION,
        "analyte": asdict(model.analyte),
        "axis_unit": model.axis.unit,
        "quantity": model.quantity,
        "reading": dict(model.reading),
        "domain": {note: list(values) for note, values in model.domain.items()},
        "steps": steps,
        "method": {"name": METHODS.name_of(type(model.method)), "parameters": _split(model.method, "method", arrays)},
        "factors": model.factors,
        "n_samples": model.n_samples,
        "limits": asdict(model.limits),
        "uncertainty": asdict(model.uncertainty),
        "figures": dict(model.figures),
        "state": asdict(model.state),
        "recipe": model.recipe,
        "training": [asdict(source) for source in model.training],
        "versions": dict(model.versions),
        "decision": asdict(model.decision) if model.decision else None,
        "smallest_decidable": model.smallest_decidable,
        "smallest_from": model.smallest_from,
        "left_out": _split(model.left_out, "left_out", arrays) if model.left_out else None,
        "left_out_note": model.left_out_note,
        "lineage": asdict(model.lineage),
        "revalidation": asdict(model.revalidation) if model.revalidation else None,
    }
    return manifest, arrays


def from_manifest(manifest: Mapping[str, Any], arrays: Arrays) -> Calibration:
    """Return the calibration that a manifest and its arrays describe.

    Raises
    ------
    ModelFileError
        Another format, a newer version, or a step or method that is not known.
    """
    if manifest.get("format") != FORMAT:
        raise ModelFileError(f"The manifest says format {manifest.get('format')!r}; expected {FORMAT!r}.")
    if manifest["format_version"] != FORMAT_VERSION:
        raise ModelFileError(
            f"The model file has format version {manifest['format_version']}; this program reads version "
            f"{FORMAT_VERSION}. Use the program version that wrote it, or a newer one."
        )
    return Calibration(
        analyte=Analyte(**manifest["analyte"]),
        axis=SpectralAxis(arrays["axis"], manifest["axis_unit"]),
        quantity=manifest["quantity"],
        reading=manifest["reading"],
        domain={note: tuple(values) for note, values in manifest["domain"].items()},
        steps=tuple(_join(_STEPS, step, f"steps/{i}", arrays) for i, step in enumerate(manifest["steps"])),
        method=_join(METHODS, manifest["method"], "method", arrays),
        factors=manifest["factors"],
        n_samples=manifest["n_samples"],
        limits=Limits(**manifest["limits"]),
        uncertainty=Uncertainty(**manifest["uncertainty"]),
        test_spectra=arrays["test_spectra"],
        test_predictions=arrays["test_predictions"],
        figures=manifest["figures"],
        state=ModelState(**manifest["state"]),
        recipe=manifest["recipe"],
        training=tuple(Source(**source) for source in manifest["training"]),
        versions=manifest["versions"],
        # The first models of this format had none of these.
        decision=DecisionRule(**manifest["decision"]) if manifest.get("decision") else None,
        smallest_decidable=manifest.get("smallest_decidable"),
        smallest_from=manifest.get("smallest_from", ""),
        left_out=_left_out(manifest.get("left_out"), arrays),
        left_out_note=manifest.get("left_out_note", ""),
        lineage=Lineage.from_plain(manifest.get("lineage")),
        revalidation=RevalidationBasis.from_plain(manifest.get("revalidation")),
    )


def _split(estimator: Estimator | LeftOutModels, prefix: str, arrays: Arrays) -> dict[str, Any]:
    """Put an estimator's arrays among the others under a prefix, and return its plain values."""
    parameters, own = estimator.state()
    arrays.update({f"{prefix}/{name}": array for name, array in own.items()})
    return parameters


def _left_out(plain: Mapping[str, Any] | None, arrays: Arrays) -> LeftOutModels | None:
    return LeftOutModels.from_state(dict(plain), _own(arrays, "left_out")) if plain else None


def _own(arrays: Arrays, prefix: str) -> Arrays:
    return {key.removeprefix(f"{prefix}/"): array for key, array in arrays.items() if key.startswith(f"{prefix}/")}


def _join(registry: Mapping[str, type[Any]], entry: Mapping[str, Any], prefix: str, arrays: Arrays) -> Any:
    name = entry["name"]
    if name not in registry:
        raise ModelFileError(
            f"The model uses {name!r}, which this program does not know; expected {', '.join(registry)}."
        )
    return registry[name].from_state(dict(entry["parameters"]), _own(arrays, prefix))
