"""What is done to the spectra before the regression."""

from typing import Any

import numpy as np

from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.estimator.base import Step
from quant.plots.spectra import kept_ranges, plot_spectra
from quant.reports.pictures import picture


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return the steps in words, and the spectra before and after."""
    steps = analyte.model.steps
    kept = kept_ranges(analyte)
    read = f"Spectra as read, mean of each sample{'; ranges that are kept shaded' if kept else ''}."
    after = f"Spectra after preprocessing{'; the gaps between ranges shaded' if len(kept) > 1 else ''}."
    pictures = [picture(plot_spectra, analyte, f"{place}-read", read)]
    if steps:
        pictures.append(picture(plot_spectra, analyte, f"{place}-after", after, processed=True))
    return {"steps": [describe_step(step) for step in steps], "pictures": pictures}


def describe_step(step: Step) -> str:
    """Return a step and its options in words: "savitzky golay: derivative 2, polynomial 2, window 9"."""
    options = [
        _text(value) if step.name.endswith(name) else f"{name.replace('_', ' ')} {_text(value)}"
        for name, value in step.get_params().items()
        if name != "axis" and value is not None
    ]
    name = step.name.upper() if step.name in ("snv", "msc", "emsc") else step.name.replace("_", " ")
    return f"{name}: {', '.join(options)}" if options else name


def _text(value: object) -> str:
    if isinstance(value, np.ndarray):  # spectra given to the step
        return f"{len(value)} spectr{'um' if len(value) == 1 else 'a'}"
    if isinstance(value, list | tuple):
        if len(value) == 2 and not isinstance(value[0], list | tuple):
            return f"{value[0]:g} to {value[1]:g}"
        return " and ".join(_text(entry) for entry in value)
    return f"{value:g}" if isinstance(value, float) else str(value)
