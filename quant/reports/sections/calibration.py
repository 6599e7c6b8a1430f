"""How well the calibration fits its own samples."""

from itertools import accumulate
from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult

SHOWN = (
    "samples",
    "RMSEC",
    "SEC",
    "R² (determination)",
    "correlation²",
)  # the tests prove nothing about fitted samples


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return the figures of the fit and the variance that each factor explains."""
    x, y = analyte.picture.explained_x, analyte.picture.explained_y
    explained: list[tuple[int, float, float, float, float]] = []
    if x is not None and y is not None:
        shares = list(zip(x, accumulate(x), y, accumulate(y), strict=True))[: analyte.factors]
        explained = [(i, *(100 * float(share) for share in row)) for i, row in enumerate(shares, start=1)]  # type: ignore[misc]
    return {"rows": [row for row in analyte.calibration.rows() if row[0] in SHOWN], "explained": explained}
