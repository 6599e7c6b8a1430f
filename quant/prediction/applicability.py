"""Whether the calibration speaks for a spectrum at all."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from quant.checks import name_some
from quant.errors import AcquisitionMismatchError, QuantityError
from quant.model.calibration import Calibration, Limits
from quant.spectra.spectra_set import SpectraSet
from quant.units import QUANTITIES

DOMAIN_NOTES = ("technique", "resolution", "accessory")
"""Acquisition notes that belong to a model's domain: other values are another measurement."""

APPLICABLE, WARNING, NOT_APPLICABLE = "applicable", "warning", "not applicable"


@dataclass(frozen=True, kw_only=True)
class Applicability:
    """The statement about one sample, and its reasons."""

    verdict: str
    reasons: tuple[str, ...]


def judge(limits: Limits, *, residual: float, leverage: float, value: float, standard_error: float) -> Applicability:
    """Compare one sample with the model's limits.

    Parameters
    ----------
    limits : Limits
    residual : float
        Sum of squares of the residual spectrum, mean over replicates. [(ordinate)²]
    leverage : float
        1/n included.
    value, standard_error : float
        Prediction and its standard error. [unit of the analyte]
    """
    beyond = max(limits.lowest - value, value - limits.highest)
    criteria = (
        (
            residual > limits.residual_warn,
            residual > limits.residual_stop,
            _times("residual spectrum", residual, limits.residual_warn),
        ),
        (
            leverage > limits.leverage_warn,
            leverage > limits.leverage_stop,
            _times("leverage", leverage, limits.leverage_warn),
        ),
        (
            beyond > 0,
            beyond > limits.margin_t * standard_error,
            f"value outside the calibrated range {limits.lowest:g} to {limits.highest:g}",
        ),
    )
    verdict = (
        NOT_APPLICABLE
        if any(stop for _, stop, _ in criteria)
        else WARNING
        if any(warn for warn, _, _ in criteria)
        else APPLICABLE
    )
    return Applicability(verdict=verdict, reasons=tuple(text for warn, _, text in criteria if warn))


def acquisition_domain(notes: Sequence[Mapping[str, str]]) -> dict[str, tuple[str, ...]]:
    """Return the acquisition notes that every spectrum of a calibration states, with the values they have."""
    return {
        note: tuple(dict.fromkeys(row[note] for row in notes))
        for note in DOMAIN_NOTES
        if notes and all(row.get(note) for row in notes)
    }


def check_acquisition(model: Calibration, spectra: SpectraSet) -> None:
    """Refuse spectra recorded in another way than the calibration's.

    Raises
    ------
    QuantityError
        Transmittance for a model of absorbance, or the like.
    AcquisitionMismatchError
        Another technique, resolution or accessory. A note that a spectrum does not state is no clash.
    """
    if spectra.quantity != model.quantity:
        raise QuantityError(
            f"The spectra are {QUANTITIES[spectra.quantity]}, but the model was made from {QUANTITIES[model.quantity]}"
            f". Export them as the calibration's were, or read them with quantity = {model.quantity!r} if that is what "
            "they are."
        )
    for note, known in model.domain.items():
        allowed = {_comparable(value) for value in known}
        clash = [
            (sample, row[note])
            for sample, row in zip(spectra.sample_ids, spectra.notes, strict=True)
            if row.get(note) and _comparable(row[note]) not in allowed
        ]
        if clash:
            samples, found = (dict.fromkeys(part) for part in zip(*clash, strict=True))
            raise AcquisitionMismatchError(
                f"{note} is {name_some(found)} for {name_some(samples)}, but the calibration holds for "
                f"{name_some(known)}. Measure as for the calibration, or make a calibration for this {note}."
            )


def _times(name: str, found: float, warn: float) -> str:
    return f"{name} {found / warn:.3g} times its warning limit"


def _comparable(value: str) -> str | float:
    """``4``, ``4.0`` and ``4 cm-1`` are one resolution; words are compared without regard to case and blanks."""
    text = "".join(value.lower().split())
    try:
        return float(text.removesuffix("cm-1").removesuffix("1/cm").removesuffix("cm⁻¹"))
    except ValueError:
        return text
