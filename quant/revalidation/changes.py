"""What changed in the spectra of the same standards, before and after."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.model.calibration import Calibration
from quant.result import Result, documented
from quant.revalidation.change_fit import (
    ROBUST_ROUNDS,
    ROUNDS_ON,
    Fit,
    composition_directions,
    fit_changes,
    robust_weights,
    scatter_weights,
)
from quant.revalidation.change_pairs import Pairs, pair_spectra
from quant.revalidation.change_spread import Spread, spreads
from quant.revalidation.change_terms import RESOLUTION, Ground, changed, core_of
from quant.revalidation.change_tests import dempster_p, mean_p
from quant.revalidation.change_words import CAUSES, CONTENT, NOISE, QUIETER, UNEXPLAINED, UNITS, describe
from quant.revalidation.multiple_tests import holm_adjusted
from quant.spectra.spectra_set import SpectraSet
from quant.statistics.groups import connected_groups
from quant.text_table import format_columns
from quant.units import AXIS_UNITS

SIGNIFICANCE = 0.05  # of the whole family, held by Holm
OF_NO_ACCOUNT = 1e-6  # of s0
SMALL = 1e-3  # step of a numerical derivative, of the largest absorbance
SAME_CLASS = 0.9  # correlation of two estimates beyond which the two changes cannot be told apart on this range


@dataclass(frozen=True, kw_only=True, eq=False)
class Change(Result):
    """One thing that may have changed."""

    kind: str = documented("What changed: shift, stretch, gain, offset, baseline_slope, ...")
    size: float = documented("How much, mean over the standards; in a class of several as if it were the only one")
    unit: str = documented("Unit of the size")
    standard_error: float = documented("Standard error of the size, from the scatter between standards; in its unit")
    p_value: float = documented("Probability of as much by chance, adjusted by Holm for the number of questions asked")
    significant: bool = documented("Whether chance does not explain it, at 5 % for all kinds together")
    effect: float | None = documented("Mean change of the predictions that this alone causes, in the analyte's unit")
    scatter: float | None = documented(
        "Standard deviation that it adds to the predictions, if it is a greater spread, in the analyte's unit",
        default=None,
    )
    words: str = documented("The finding in words")
    usual_cause: str = documented("Where such a change usually comes from")
    same_class_as: tuple[str, ...] = documented("Kinds that cannot be told apart from it on this range")

    def __str__(self) -> str:
        """The finding, and the usual cause where it is one."""
        return f"{self.words}. {self.usual_cause}" if self.significant else self.words


def format_changes(changes: Sequence[Change]) -> str:
    """Return changes as a table: kind, size, standard error, unit, p, significance, effect, class."""
    header = ("change", "size", "standard error", "unit", "p", "significant", "effect", "same class as")
    rows = [
        (c.kind, c.size, c.standard_error, c.unit, c.p_value, c.significant, c.effect, ", ".join(c.same_class_as))
        for c in changes
    ]
    return format_columns(header, rows)


def estimate_changes(before: SpectraSet, after: SpectraSet, model: Calibration) -> tuple[Change, ...]:
    """Estimate what changed between two measurements of the same standards, in the range that the model uses.

    Axis shift and stretch, gain, offset, slope and curvature of the baseline, width of the line shape and water vapour
    are fitted together to each standard's pair of mean spectra, beside the ways in which the standards' composition
    differs. The mean over standards is the size; the scatter between standards gives its standard error and test. Kinds
    whose estimates correlate by more than 0.9 on this range form one class, tested together. Noise, the analyte's
    content, how much vapour and baseline vary, and what is left unexplained are tested beside them, all in one family
    held by Holm.

    Size (gain) is judged against the mean spectrum: where the analyte makes up much of it, part of a loss looks like
    smaller absorbances. Where something is left that chance does not explain, the fit is repeated with little weight on
    it.

    Parameters
    ----------
    before, after : SpectraSet
        Spectra of the same standards, paired by sample ID; replicates are averaged. Standards in one set only are not
        used.
    model : Calibration
        Its axis, and the range it uses.

    Returns
    -------
    tuple of Change
        All that was looked for: significant ones first, those with the largest effect on the predictions at the top.

    Raises
    ------
    NotEnoughDataError
        Fewer than four standards in both sets, or too few points in the range.
    AxisMismatchError, QuantityError
        The spectra are not on the model's axis, or have points without absorbance.

    References
    ----------
    .. [1] A.P. Dempster, Ann. Math. Statist. 29 (1958) 995-1010: the test of what is left (from memory).
    """
    pairs = pair_spectra(before, after, model)
    best = _best_fit(pairs, model)
    content = _content(pairs, model, best.wholly)
    found = [(members, _columns(best.fit, content, members)) for members in _classes(best.fit, content)]
    found.append(((NOISE,), pairs.noise_ratios[:, None]))
    spread = spreads(best.ground, best.before, best.after, best.directions, best.scatter)
    alone = [best.unexplained_p, *(each.p_value for each in spread)]
    adjusted = holm_adjusted([*alone, *(mean_p(columns) for _, columns in found)]).tolist()
    changes = [_unexplained(pairs, model, best, adjusted[0])]
    changes += [_spread(pairs, model, each, p) for each, p in zip(spread, adjusted[1:], strict=False)]
    for (members, columns), p in zip(found, adjusted[len(changes) :], strict=True):
        # A new substance may look like more or less of the old ones.
        alike = (CONTENT, UNEXPLAINED) if members == (CONTENT,) and changes[0].significant else members
        for i, kind in enumerate(members):
            each = columns[:, i] if len(members) == 1 else _alone(best, kind, members)
            changes.append(_change(pairs, model, kind, each, p, alike))
    return tuple(sorted(changes, key=lambda c: (not c.significant, -abs(c.effect or 0.0))))


@dataclass(frozen=True, eq=False)
class _Best:
    """The fit of all kinds together, and what it rests on."""

    ground: Ground  # without the points far from those used
    inside: IntArray  # positions of its points on the model's axis
    before: FloatArray
    after: FloatArray
    wholly: FloatArray  # directions of composition on the model's axis ...
    directions: FloatArray  # ... and on the ground
    scatter: FloatArray  # weights from the scatter between standards ...
    weights: FloatArray  # ... and with little of them where all show something new
    fit: Fit
    unexplained_p: float


def _best_fit(pairs: Pairs, model: Calibration) -> _Best:
    """Fit, weight by the scatter between standards, fit on; and on, robustly, where something new remains."""
    both = 0.5 * (pairs.before + pairs.after)
    light = 10.0 ** (-2.0 * both.mean(axis=0)) if pairs.ground.light else np.ones(pairs.ground.axis.size)
    wholly = composition_directions(pairs.ground, both, max(model.factors, 1), light)
    ground, inside = core_of(pairs.ground)
    a, b, directions, light = (rows[..., inside] for rows in (pairs.before, pairs.after, wholly, light))
    fit = fit_changes(ground, a, b, ground.kinds, directions, light)
    scatter = weights = scatter_weights(ground, fit.rest)
    fit = fit_changes(ground, a, b, ground.kinds, directions, scatter, start=fit, rounds=ROUNDS_ON)
    unexplained_p = dempster_p(fit.rest[:, ground.used] * np.sqrt(scatter[ground.used]))
    if unexplained_p <= SIGNIFICANCE:
        for _ in range(ROBUST_ROUNDS):
            weights = robust_weights(ground, fit.rest, scatter)
            fit = fit_changes(ground, a, b, ground.kinds, directions, weights, start=fit, rounds=ROUNDS_ON)
    return _Best(ground, inside, a, b, wholly, directions, scatter, weights, fit, unexplained_p)


def _alone(best: _Best, kind: str, members: Sequence[str]) -> FloatArray:
    """Size of a change for each standard as if the others of its class had not happened, shape (n_standards,)."""
    kinds = [k for k in best.ground.kinds if k == kind or k not in members]
    fit = fit_changes(best.ground, best.before, best.after, kinds, best.directions, best.weights)
    return fit.sizes[:, kinds.index(kind)]


def _content(pairs: Pairs, model: Calibration, directions: FloatArray) -> FloatArray:
    """Analyte per unit of each direction, from what the model found of the standards before, shape (n_directions,)."""
    # Small steps: spectra with a whole unit of a direction may be none that the model accepts.
    largest = float(np.abs(pairs.before[:, pairs.ground.used]).max())
    steps = [SMALL * largest / max(float(np.abs(d[pairs.ground.used]).max()), 1e-300) for d in directions]
    moved = [_mean_step(pairs, model, s * d) / s for s, d in zip(steps, directions, strict=True)]
    return np.array(moved)


def _columns(fit: Fit, content: FloatArray, members: Sequence[str]) -> FloatArray:
    """Sizes of each standard, one column a kind."""
    made = [fit.composition @ content if k == CONTENT else fit.sizes[:, fit.kinds.index(k)] for k in members]
    return np.column_stack(made)


def _classes(fit: Fit, content: FloatArray) -> list[tuple[str, ...]]:
    """Kinds in groups that cannot be told apart: their estimates correlate beyond `SAME_CLASS`."""
    k = len(fit.kinds)
    names = [*fit.kinds, *([CONTENT] if content.size else [])]
    onto = np.zeros((len(names), len(fit.covariance)))
    onto[:k, :k] = np.eye(k)
    onto[k:, k:] = content
    covariance = onto @ fit.covariance @ onto.T
    sd = np.sqrt(np.maximum(np.diag(covariance), np.finfo(float).tiny))
    alike = np.abs(covariance / np.outer(sd, sd)) > SAME_CLASS
    alike[k:, :] = alike[:, k:] = False  # the standards themselves are not the instrument
    marks = [[(min(i, j), max(i, j)) for j in np.flatnonzero(alike[i]) if i != j] for i in range(len(names))]
    group = connected_groups(marks)
    return [
        tuple(n for n, g in zip(names, group, strict=True) if g == number) for number in dict.fromkeys(group.tolist())
    ]


def _change(
    pairs: Pairs, model: Calibration, kind: str, each: FloatArray, p_value: float, members: Sequence[str]
) -> Change:
    """Put what was found of one kind into words."""
    size, error = float(each.mean()), float(each.std(ddof=1) / np.sqrt(each.size))
    effect = None if kind == NOISE else size if kind == CONTENT else _effect(pairs, model, kind, size)
    if effect is not None and abs(effect) < OF_NO_ACCOUNT * model.uncertainty.s0:
        effect = 0.0  # what a step takes out to the last digits
    unit = {CONTENT: model.analyte.printed_unit, **UNITS}.get(kind, AXIS_UNITS[pairs.unit])
    if kind == NOISE:
        size, error = float(np.expm1(size)), float(np.exp(size) * error)
    if kind == RESOLUTION:
        size, error = _width(pairs.resolution, size, error)
    significant = p_value <= SIGNIFICANCE
    others = tuple(other for other in members if other != kind)
    return Change(
        kind=kind,
        size=size,
        unit=unit,
        standard_error=error,
        p_value=p_value,
        significant=significant,
        effect=effect,
        words=describe(kind, size, error, unit, significant=significant, others=others),
        usual_cause=QUIETER if kind == NOISE and size < 0 else CAUSES[kind],
        same_class_as=others,
    )


def _width(width: float, added: float, error: float) -> tuple[float, float]:
    """Turn what is added to the square of the line width into a change of the width, with its standard error."""
    now = float(np.sqrt(max(width**2 + added, 0.0)))
    return now - width, error / (2.0 * max(now, 0.5 * width))


def _effect(pairs: Pairs, model: Calibration, kind: str, size: float) -> float:
    """Mean change of the predictions of the standards before, had only this changed. [unit of the analyte]"""
    ground, rows = pairs.ground, pairs.before
    if kind == RESOLUTION and size < 0:
        return -_effect(pairs, model, kind, -size)
    return _mean_step(pairs, model, changed(ground, rows, {kind: np.full(len(rows), size)}) - rows)


def _mean_step(pairs: Pairs, model: Calibration, added: FloatArray) -> float:
    """Mean change of prediction when something is added to the absorbances of the standards before."""
    now, then = (model.predict_values(pairs.ordinates(pairs.before + part)) for part in (added, 0.0 * added))
    return float((now - then).mean())


def _unexplained(pairs: Pairs, model: Calibration, best: _Best, p_value: float) -> Change:
    """What all standards have in common beyond every kind of change: a band of something new, say."""
    mean = best.fit.rest.mean(axis=0)
    place = int(np.argmax(np.abs(mean)))
    added = np.zeros(pairs.ground.axis.size)
    added[best.inside] = mean
    error = float(best.fit.rest[:, place].std(ddof=1) / np.sqrt(len(best.fit.rest)))
    significant = p_value <= SIGNIFICANCE
    where = f"{pairs.ground.axis[best.inside[place]]:g} {AXIS_UNITS[pairs.unit]}"
    return Change(
        kind=UNEXPLAINED,
        size=float(mean[place]),
        unit="absorbance",
        standard_error=error,
        p_value=p_value,
        significant=significant,
        effect=_mean_step(pairs, model, np.broadcast_to(added, pairs.before.shape)),
        words=describe(UNEXPLAINED, float(mean[place]), error, "absorbance", significant=significant, where=where),
        usual_cause=CAUSES[UNEXPLAINED],
        same_class_as=(CONTENT,) if significant and best.fit.composition.size else (),
    )


def _spread(pairs: Pairs, model: Calibration, spread: Spread, p_value: float) -> Change:
    """Whether something varies more, or less, from standard to standard; its mean is another question."""
    size, significant = spread.after - spread.before, p_value <= SIGNIFICANCE
    step = SMALL * float(np.abs(pairs.before[:, pairs.ground.used]).max()) or SMALL
    moved = {kind: _effect(pairs, model, kind, step) / step for kind in spread.added}
    variance = sum(moved[kind] ** 2 * added for kind, added in spread.added.items())
    return Change(
        kind=spread.kind,
        size=size,
        unit="absorbance",
        standard_error=spread.error,
        p_value=p_value,
        significant=significant,
        effect=None,
        scatter=float(np.sqrt(max(variance, 0.0))),
        words=describe(spread.kind, size, spread.error, "absorbance", significant=significant),
        usual_cause=CAUSES[spread.kind],
        same_class_as=(),
    )
