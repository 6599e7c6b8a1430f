"""The check standards as remedies and judgements see them: one row a standard, before and after."""

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.calibration.split import split_samples
from quant.checks import name_some
from quant.errors import SampleMismatchError
from quant.model.calibration import Calibration
from quant.prediction.applicability import NOT_APPLICABLE, check_acquisition, judge
from quant.prediction.predict import Evaluation, evaluate
from quant.recipe.load import load_samples, load_validation_samples
from quant.recipe.schema import Recipe
from quant.revalidation.change_pairs import used_points
from quant.revalidation.point_noise import noise_of
from quant.spectra.provenance import Source
from quant.spectra.sample_set import SampleSet, mean_by_sample
from quant.spectra.spectra_set import SpectraSet


@dataclass(frozen=True, eq=False)
class Training:
    """The calibration's own spectra behind the model's steps, with values and weights (1/m a replicate)."""

    processed: FloatArray
    values: FloatArray
    weights: FloatArray


@dataclass(frozen=True, eq=False)
class Standards:
    """Check standards measured after the visit, and before it where that was done.

    Attributes
    ----------
    model : Calibration
    sample_ids : tuple of str
        The standards, n of them.
    reference : array of shape (n,)
        [unit of the analyte]
    after_spectra : SpectraSet
        On the model's axis.
    after_index : array of int, shape (n_spectra,)
        The standard that each belongs to.
    before_spectra, before_index
        The same from before the visit, or None.
    training : Training or None
        The calibration's own spectra, for remedies that fit anew.
    """

    model: Calibration
    sample_ids: tuple[str, ...]
    reference: FloatArray
    after_spectra: SpectraSet
    after_index: IntArray
    before_spectra: SpectraSet | None = None
    before_index: IntArray | None = None
    training: Training | None = None

    def __len__(self) -> int:
        return len(self.sample_ids)

    @property
    def paired(self) -> bool:
        """Whether there are spectra from before."""
        return self.before_spectra is not None

    @cached_property
    def after_raw(self) -> FloatArray:
        """Mean spectra after, shape (n, n_points)."""
        return mean_by_sample(self.after_spectra.values, self.after_index, len(self))

    @cached_property
    def before_raw(self) -> FloatArray:
        """Mean spectra before, shape (n, n_points)."""
        assert self.before_spectra is not None
        assert self.before_index is not None
        return mean_by_sample(self.before_spectra.values, self.before_index, len(self))

    @cached_property
    def after_processed(self) -> FloatArray:
        """Mean spectra after, behind the model's steps, shape (n, n_points_after)."""
        return mean_by_sample(self.model.process(self.after_spectra.values), self.after_index, len(self))

    @cached_property
    def before_processed(self) -> FloatArray:
        """Mean spectra before, behind the model's steps, shape (n, n_points_after)."""
        assert self.before_spectra is not None
        assert self.before_index is not None
        return mean_by_sample(self.model.process(self.before_spectra.values), self.before_index, len(self))

    @cached_property
    def after(self) -> Evaluation:
        """What the model says of the standards now."""
        return self.evaluated(self.model, np.arange(len(self)))

    @cached_property
    def before(self) -> FloatArray:
        """What it said of them before, shape (n,). [unit of the analyte]"""
        return np.asarray(self.model.method.predict(self.before_processed))

    @cached_property
    def difference_sd(self) -> tuple[float, str]:
        """Standard deviation of one difference after - before of an unchanged instrument, from earlier data, and which.

        [unit of the analyte]
        """
        sep, source = self.validated_sep, self.model.revalidation.sep_source if self.model.revalidation else "s0"
        replicate_sd = self.model.uncertainty.replicate_sd
        if replicate_sd is None or self.before_index is None:
            return sep * float(np.sqrt(2)), f"SEP, {source}, before and after as if independent"
        counts = [np.bincount(index, minlength=len(self)) for index in (self.before_index, self.after_index)]
        sd = replicate_sd * float(np.sqrt(np.mean(1 / counts[0] + 1 / counts[1])))
        return sd, "replicate spectra of the calibration, before and after"

    @cached_property
    def noise_variances(self) -> tuple[float, float]:
        """Noise variance of the standards' mean spectra before and after, mean over standards. [ordinate²]"""
        assert self.before_spectra is not None
        assert self.before_index is not None
        axis, used = self.model.axis.values, used_points(self.model)
        found = []
        for spectra, index in ((self.before_spectra, self.before_index), (self.after_spectra, self.after_index)):
            variance = mean_by_sample(noise_of(spectra.values, axis, used)[:, None] ** 2, index, len(self))[:, 0]
            found.append(float(np.mean(variance / np.bincount(index, minlength=len(self)))))
        return found[0], found[1]

    @property
    def validated_sep(self) -> float:
        """SEP before any service. [unit of the analyte]"""
        return self.model.revalidation.sep if self.model.revalidation else self.model.uncertainty.s0

    @cached_property
    def target(self) -> FloatArray:
        """What remedies are fitted to and left-out values are judged by, shape (n,). [unit of the analyte]

        Predictions from before and reference values, each weighted by how little it scattered before the visit: the one
        carries the scatter of presenting the sample, the other that of laboratory and model. Without spectra from
        before, the reference values.
        """
        if not self.paired or self.before_index is None:
            return self.reference
        sep = self.validated_sep
        spread = self.model.uncertainty.replicate_sd
        if spread is None:
            return (self.before + self.reference) / 2
        own = spread**2 / float(np.bincount(self.before_index).mean())
        share = own / (
            own + max(sep**2 - own, sep**2 / 4)
        )  # of the reference values; the model's part is never nothing
        return (1 - share) * self.before + share * self.reference

    def evaluated(self, model: Calibration, rows: IntArray) -> Evaluation:
        """Evaluate a model (the standards' own, or one corrected) on some of the standards as measured after."""
        place = np.full(len(self), -1)
        place[rows] = np.arange(rows.size)
        index = place[self.after_index]
        chosen = index >= 0
        return evaluate(model, model.process(self.after_spectra.values[chosen]), index[chosen], rows.size)


def not_applicable(model: Calibration, found: Evaluation) -> int:
    """Count the samples to whose spectra a model does not apply.

    A value outside the calibrated range does not count: that is how the standard was prepared, not what the visit did.
    """
    middle = (model.limits.lowest + model.limits.highest) / 2
    verdicts = [
        judge(model.limits, residual=r, leverage=h, value=middle, standard_error=s).verdict
        for r, h, s in zip(found.residual, found.leverage, found.standard_error, strict=True)
    ]
    return verdicts.count(NOT_APPLICABLE)


def files_among(spectra: SpectraSet, sources: Iterable[Source]) -> list[str]:
    """Return the names of the spectra's files that are among others; none of a table that holds many samples."""
    known = {source.sha256 for source in sources}
    if len(spectra.sources) < len(set(spectra.sample_ids)):
        return []
    return [source.name for source in spectra.sources if source.sha256 in known]


def gather(
    model: Calibration,
    samples: SampleSet,
    before: SpectraSet | None,
    training: Training | None = None,
) -> Standards:
    """Bring standards measured before and after into one order.

    Parameters
    ----------
    model : Calibration
    samples : SampleSet
        Standards as measured after, with reference values.
    before : SpectraSet, optional
        Spectra of the same standards from before.
    training : Training, optional

    Raises
    ------
    SampleMismatchError
        A standard measured after lacks spectra from before, or the same spectrum was given as both.
    """
    resample = bool(model.reading.get("resample", False))
    check_acquisition(model, samples.spectra)
    _, values = samples.analyte(model.analyte.name)
    after = samples.spectra.on_axis(model.axis, resample=resample)
    if before is None:
        return Standards(model, samples.sample_ids, values, after, samples.sample_index, training=training)
    check_acquisition(model, before)
    lacking = [sample for sample in samples.sample_ids if sample not in set(before.sample_ids)]
    if lacking:
        raise SampleMismatchError(
            f"No spectrum from before of {name_some(lacking)}; expected the same standards before and after. Leave "
            "these out of the spectra after, or leave the spectra before out altogether."
        )
    _refuse_copies(before, samples.spectra)
    chosen = before.select(samples.sample_ids).on_axis(model.axis, resample=resample)
    place = {sample: i for i, sample in enumerate(samples.sample_ids)}
    index = np.array([place[sample] for sample in chosen.sample_ids], dtype=np.intp)
    return Standards(model, samples.sample_ids, values, after, samples.sample_index, chosen, index, training)


def _refuse_copies(before: SpectraSet, after: SpectraSet) -> None:
    """Refuse spectra that were given twice: no measurement repeats another to the last digit."""
    known = {(sample, row.tobytes()) for sample, row in zip(before.sample_ids, before.values, strict=True)}
    copies = dict.fromkeys(
        sample for sample, row in zip(after.sample_ids, after.values, strict=True) if (sample, row.tobytes()) in known
    )
    if copies:
        raise SampleMismatchError(
            f"The spectra before and after are the very same numbers for {name_some(copies)}; expected one measurement "
            "before the visit and another after it. Check which files were named."
        )


def training_of(model: Calibration, samples: SampleSet) -> Training:
    """Return the calibration's own samples as remedies need them.

    Parameters
    ----------
    model : Calibration
    samples : SampleSet
        Its calibration samples.
    """
    _, values = samples.analyte(model.analyte.name)
    spectra = samples.spectra.on_axis(model.axis, resample=bool(model.reading.get("resample", False)))
    return Training(model.process(spectra.values), values[samples.sample_index], samples.weights)


def calibration_samples(recipe: Recipe, analyte: str) -> SampleSet:
    """Return the calibration samples that a recipe names.

    Parameters
    ----------
    recipe : Recipe
    analyte : str
    """
    return split_samples(recipe, load_samples(recipe), load_validation_samples(recipe), analyte).calibration
