"""Evidence beside the predictions: film, empty beam, labels of the standards, domain."""

from dataclasses import dataclass

from quant.chemistry.film_positions import FilmTable
from quant.model.calibration import Calibration
from quant.result import Result, documented
from quant.revalidation.domain import DomainEvidence, domain_evidence
from quant.revalidation.film import FilmEvidence, film_evidence
from quant.revalidation.instrument import InstrumentEvidence, instrument_evidence
from quant.revalidation.standards_state import StandardsEvidence
from quant.spectra.sample_set import SampleSet
from quant.spectra.spectra_set import SpectraSet


@dataclass(frozen=True, kw_only=True)
class InstrumentRecord:
    """Spectra that tell of the instrument without any standard, each where it was measured.

    Attributes
    ----------
    film, film_before : SpectraSet or None
        A polystyrene film in transmission.
    blank, blank_before : SpectraSet or None
        100 % lines.
    film_table : FilmTable or None
        Where the film's bands should be, if its certificate is at hand.
    """

    film: SpectraSet | None = None
    film_before: SpectraSet | None = None
    blank: SpectraSet | None = None
    blank_before: SpectraSet | None = None
    film_table: FilmTable | None = None


@dataclass(frozen=True, kw_only=True, eq=False)
class Gathered(Result):
    """What film, empty beam, labels and domain say."""

    film: FilmEvidence | None = documented("Wavenumber scale and resolution by the polystyrene film, if given")
    instrument: InstrumentEvidence | None = documented("Noise and level by 100 % lines, if given")
    standards: StandardsEvidence = documented("Whether the check standards are what their labels say")
    domain: DomainEvidence = documented("Whether the check spectra lie inside the calibration's domain")

    def parts(self) -> list[tuple[str, Result]]:
        """Return headings and evidence, of what was given."""
        named = (
            ("Polystyrene film", self.film),
            ("Empty beam", self.instrument),
            ("Check standards", self.standards),
            ("Domain", self.domain),
        )
        return [(name, found) for name, found in named if found is not None]


def gather_evidence(
    model: Calibration,
    samples: SampleSet,
    labels: StandardsEvidence,
    own: SampleSet | None,
    record: InstrumentRecord,
) -> Gathered:
    """Gather what is known beside the predictions.

    Parameters
    ----------
    model : Calibration
    samples : SampleSet
        The check standards as measured after.
    labels : StandardsEvidence
    own : SampleSet or None
        The calibration's own samples.
    record : InstrumentRecord
    """
    return Gathered(
        film=None if record.film is None else film_evidence(record.film, record.film_before, record.film_table),
        instrument=None if record.blank is None else instrument_evidence(record.blank, record.blank_before),
        standards=labels,
        domain=domain_evidence(model, samples.spectra, own.spectra if own is not None else None),
    )
