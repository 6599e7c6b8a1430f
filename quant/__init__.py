"""Make, defend and use a quantitative infrared calibration.

Every name is loaded when it is first used, so that ``import quant`` costs next to nothing.
"""

from importlib import import_module as _import_module
from typing import Any as _Any

_HOME = {
    "Analyte": "quant.spectra.reference_table",
    "AuditResult": "quant.calibration.audit",
    "Calibration": "quant.model.calibration",
    "CalibrationResult": "quant.calibration.result",
    "ColumnOf": "quant.readers.reference_column",
    "CrossValidationResult": "quant.calibration.cross_validation_result",
    "DecisionRule": "quant.model.decision_rule",
    "InspectionResult": "quant.inspection.inspect",
    "Plan": "quant.recipe.plan_schema",
    "PlanResult": "quant.planning.result",
    "PredictionResult": "quant.prediction.result",
    "PurityResult": "quant.calibration.purity",
    "QuantError": "quant.errors",
    "ReadingOptions": "quant.readers.options",
    "Recipe": "quant.recipe.schema",
    "ReferenceTable": "quant.spectra.reference_table",
    "SampleSet": "quant.spectra.sample_set",
    "SpectraSet": "quant.spectra.spectra_set",
    "SpectralAxis": "quant.spectra.axis",
    "ValidationResult": "quant.calibration.validate",
    "calibrate": "quant.calibration.calibrate",
    "cross_validate": "quant.calibration.cross_validation",
    "decision_rule": "quant.prediction.decisions",
    "inspect": "quant.inspection.inspect",
    "judge_file": "quant.planning.existing",
    "load_model": "quant.model.storage",
    "load_plan": "quant.planning.load",
    "load_recipe": "quant.recipe.load",
    "load_samples": "quant.recipe.load",
    "open_ledger": "quant.calibration.sealed",
    "pair_samples": "quant.spectra.sample_set",
    "plan": "quant.planning.plan",
    "predict": "quant.prediction.predict",
    "purity": "quant.calibration.purity",
    "read_reference": "quant.readers.reference_csv",
    "read_spectra": "quant.readers.read",
    "save_model": "quant.model.storage",
    "validate": "quant.calibration.validate",
    "write_report": "quant.reports.write",
}

__all__ = [
    "Analyte",
    "AuditResult",
    "Calibration",
    "CalibrationResult",
    "ColumnOf",
    "CrossValidationResult",
    "DecisionRule",
    "InspectionResult",
    "Plan",
    "PlanResult",
    "PredictionResult",
    "PurityResult",
    "QuantError",
    "ReadingOptions",
    "Recipe",
    "ReferenceTable",
    "SampleSet",
    "SpectraSet",
    "SpectralAxis",
    "ValidationResult",
    "calibrate",
    "cross_validate",
    "decision_rule",
    "inspect",
    "judge_file",
    "load_model",
    "load_plan",
    "load_recipe",
    "load_samples",
    "open_ledger",
    "pair_samples",
    "plan",
    "predict",
    "purity",
    "read_reference",
    "read_spectra",
    "save_model",
    "validate",
    "write_report",
]


def __getattr__(name: str) -> _Any:
    if name not in _HOME:
        raise AttributeError(f"module 'quant' has no attribute {name!r}; it has {', '.join(__all__)}")
    value = getattr(_import_module(_HOME[name]), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return __all__
