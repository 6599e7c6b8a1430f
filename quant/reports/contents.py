"""The contents of a report: a plain table of sections, in order."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from quant.reports.sections import (
    answer,
    calibration,
    cautions,
    chemistry,
    cross_validation,
    data,
    decision,
    detection,
    diagnostics,
    limits,
    preprocessing,
    provenance,
    recipe,
    standards,
    uncertainty,
    validation,
    view,
)


@dataclass(frozen=True)
class Section:
    """A section: its name (of template and anchor), its heading, and what makes its context.

    The context of a section about one analyte takes the whole result, the analyte's, and the place for ids; that of a
    section about the whole report takes the whole result.
    """

    name: str
    heading: str
    context: Callable[..., dict[str, Any]]
    each_analyte: bool = False


SECTIONS = (
    Section("answer", "The answer", answer.context),
    Section("data", "Data", data.context, each_analyte=True),
    Section("preprocessing", "Preprocessing", preprocessing.context, each_analyte=True),
    Section("cross_validation", "Cross-validation and factors", cross_validation.context, each_analyte=True),
    Section("calibration", "Fit of the calibration", calibration.context, each_analyte=True),
    Section("validation", "Validation", validation.context, each_analyte=True),
    Section("standards", "Acceptance and standards", standards.context, each_analyte=True),
    Section("diagnostics", "Diagnostics", diagnostics.context, each_analyte=True),
    Section("view", "What the model looks at", view.context, each_analyte=True),
    Section("chemistry", "The chemistry behind the model", chemistry.context, each_analyte=True),
    Section("limits", "Limits and intervals", limits.context, each_analyte=True),
    Section("uncertainty", "Where the error comes from", uncertainty.context, each_analyte=True),
    Section("detection", "Detection", detection.context, each_analyte=True),
    Section("decision", "Decision", decision.context, each_analyte=True),
    Section("recipe", "Recipe", recipe.context),
    Section("provenance", "Files and versions", provenance.context),
    Section("cautions", "Cautions and glossary", cautions.context),
)
