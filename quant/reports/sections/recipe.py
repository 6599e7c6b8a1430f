"""The recipe, as it was written."""

from typing import Any

from quant.calibration.result import CalibrationResult


def context(result: CalibrationResult) -> dict[str, Any]:
    """Return the text of the recipe."""
    return {"recipe": result.recipe}
