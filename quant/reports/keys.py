"""What every key of a report's JSON means."""

from collections.abc import Iterator
from dataclasses import is_dataclass
from typing import Any, get_args, get_origin, get_type_hints

from quant.calibration.result import CalibrationResult
from quant.calibration.split import LeftOut
from quant.model.calibration import Limits, Uncertainty
from quant.model.revalidation_basis import MonitoringLimit, RevalidationBasis
from quant.result import Result, field_docs
from quant.spectra.provenance import Source

# Records that are no results themselves and so carry no documentation of their own.
PLAIN: dict[type[Any], dict[str, str]] = {
    LeftOut: {"sample": "Sample ID", "reason": "Why it was left out"},
    Limits: {
        "residual_warn": "Sum of squares of the residual spectrum that 95 % of good new samples stay below",
        "residual_stop": "The same, beyond which the calibration does not apply",
        "leverage_warn": "Leverage (1/n included) that 95 % of good new samples stay below",
        "leverage_stop": "The same, beyond which the calibration does not apply",
        "lowest": "Lower end of the calibrated range [unit of the analyte]",
        "highest": "Upper end of it [unit of the analyte]",
        "margin_t": "A value beyond the range by more than this many standard errors is outside it for certain",
    },
    Uncertainty: {
        "s0": "Standard error of left-out samples, leverage taken out [unit of the analyte]",
        "t": "Student's t, 97.5 %",
        "degrees_of_freedom": "Its degrees of freedom",
        "laboratory_error": "Standard error of one reference value, or null [unit of the analyte]",
        "replicate_sd": "SD of predictions of replicate spectra about their mean, or null [unit of the analyte]",
        "replicates": "Spectra a sample in the calibration (harmonic mean)",
        "laboratory_error_source": "Where the laboratory error comes from, in words; empty where there is none",
    },
    MonitoringLimit: {
        "kind": "shift, stretch, gain, offset, slope, resolution, noise or vapour",
        "size": "Smallest size that costs the allowed bias or SEP, or null where none up to `tried` does",
        "tried": "Largest size tried",
        "unit": "Unit of both",
        "costs": "bias or SEP: what is used up first; empty where nothing is",
    },
    RevalidationBasis: {
        "allowed_bias": "Largest bias allowed, its sign gone [unit of the analyte]",
        "allowed_sep": "Largest SEP allowed [unit of the analyte]",
        "source": "Where these two come from",
        "sep": "SEP before any service [unit of the analyte]",
        "n_samples": "Samples behind it",
        "sep_source": "Independent validation, internal test, or cross-validation",
        "monitoring": "What would break the calibration, one entry a kind of change",
    },
    Source: {"name": "File name", "size": "Size [bytes]", "sha256": "SHA-256 of its content"},
}


def key_docs(cls: type[Result] = CalibrationResult) -> dict[str, str]:
    """Return the meaning of every key by its path: "analytes[].limits.lowest".

    Raises
    ------
    TypeError
        A record has fields that nobody documented.
    """
    return dict(_walk(cls, ""))


def _walk(cls: type[Any], path: str) -> Iterator[tuple[str, str]]:
    hints = get_type_hints(cls)
    for name, doc in _docs(cls).items():
        yield path + name, doc
        for inner, step in _records(hints[name]):
            yield from _walk(inner, f"{path}{name}{step}.")


def _docs(cls: type[Any]) -> dict[str, str]:
    return PLAIN[cls] if cls in PLAIN else field_docs(cls)


def _records(hint: Any) -> Iterator[tuple[type[Any], str]]:
    """Yield the records that a type holds, and how a path steps into them: "" itself, "[]" a list, ".*" a mapping."""
    if isinstance(hint, type) and is_dataclass(hint):
        yield hint, ""
        return
    step = {tuple: "[]", list: "[]", dict: ".*"}.get(get_origin(hint), "")
    for argument in get_args(hint):
        for inner, further in _records(argument):
            yield inner, step + further
