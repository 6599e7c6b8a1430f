"""Where the calibrations came from: files and programs."""

from typing import Any

from quant.calibration.result import CalibrationResult


def context(result: CalibrationResult) -> dict[str, Any]:
    """Return training files with their fingerprints, and versions of programs, each once."""
    models = [analyte.model for analyte in result.analytes]
    return {
        "files": list(dict.fromkeys(source for model in models for source in model.training)),
        "versions": {name: version for model in models for name, version in model.versions.items()},
    }
