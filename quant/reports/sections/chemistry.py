"""The chemistry behind the model: bands, their shares of the prediction, and the test of indirect prediction."""

from typing import Any

from quant.calibration.chemistry import ChemistryResult
from quant.calibration.indirect import PartialEffect
from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.plots.chemistry import plot_marked_vector
from quant.reports.pictures import Picture, picture
from quant.text_table import format_number

CAPTION = (
    "Regression vector. Shaded: where the analyte, the rest of the samples and the air are known to absorb; a point "
    "goes to the first of these."
)


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return the verdict, the shares of the regions, and the test against interferents."""
    found = analyte.chemistry
    return {
        "found": found,
        "shares": [] if found is None else _shares(found),
        "effects": [] if found is None or found.test is None else [_effect(each) for each in found.test.effects],
        "unit": analyte.unit,
        "pictures": _pictures(analyte, place),
    }


def _shares(found: ChemistryResult) -> list[tuple[str, str, str, str]]:
    """Return a row a region: name, bands, points, share in percent; and the total."""
    rows = [
        (each.region, "; ".join(each.bands), format_number(each.n_points), _percent(each.share, 1))
        for each in found.shares
    ]
    total = sum(each.share for each in found.shares)
    points = sum(each.n_points for each in found.shares)
    return [*rows, ("together", "", format_number(points), _percent(total, 1))] if rows else []


def _effect(each: PartialEffect) -> tuple[str, str, str, str, str]:
    return (
        each.name,
        format_number(each.correlation, 3),
        format_number(each.coefficient, 3),
        f"{format_number(each.low, 3)} to {format_number(each.high, 3)}",
        _percent(each.share, 0),
    )


def _percent(share: float, places: int) -> str:
    """Return a share in percent; nothing is printed as "-0"."""
    return f"{round(100 * share, places) + 0.0:.{places}f}"


def _pictures(analyte: AnalyteResult, place: str) -> list[Picture]:
    found = analyte.chemistry
    if found is None or not found.declared or not found.shares or analyte.picture.regression_vector is None:
        return []
    return [picture(plot_marked_vector, analyte, f"{place}-chemistry", CAPTION)]
