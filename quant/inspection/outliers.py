"""Spectra unlike the others: replicates that disagree, and samples far from all that the others span."""

import numpy as np
from scipy import stats

from quant.arrays import FloatArray, IntArray
from quant.inspection.finding import DOUBT, Finding, percent, plural
from quant.inspection.material import Material
from quant.inspection.robust import FALSE_ALARM, FEWEST, standing_out
from quant.statistics.splits import interleaved

EXPLAINED = 0.9999  # share of the spread that the components kept explain ...
MOST_COMPONENTS = 8  # ... at most so many, and at most a sixth of the samples
LEFT_OUT_ALONE = 60  # up to so many samples each is left out alone, else a twentieth at a time
SHARES = 20
WORTH_NAMING = 4.0  # times the median sum of squares: twice the distance
ADVICE = {
    "calibration sample": "Look at the picture and at how the sample came about. A wrong sample or a bad measurement "
    "is excluded with its reason; a rare but true one is kept, and more like it are wanted.",
    "validation sample": 'The calibration will call such samples "not applicable". Measure them as the calibration '
    "samples were, leave the range out where they differ, or calibrate with samples of their kind.",
}
FAR_APART = 3.0  # times as far as usual replicates: a little more is common where some portions lie worse than others
USUAL = 0.95  # share of left-out calibration samples whose residual is called usual
FEWEST_VALIDATION = 5  # of so few, half lie beyond by chance once in a thousand sets


def check_outlying(material: Material) -> list[Finding]:
    """Name samples whose mean spectrum lies far from what the (other) calibration samples span."""
    n = len(material.calibration)
    if material.processed is None or n < FEWEST:
        return []
    rows = material.mean_by_sample(material.processed)
    within, beyond = distances(rows[:n], rows[n:])
    findings = []
    for squares, code, what, how in (
        (beyond, "outlying_residual", "hold something that no other calibration sample holds", "What the others lack"),
        (within, "outlying_composition", "are extreme in composition", "The distance inside what the others span"),
    ):
        out = standing_out(squares, FALSE_ALARM / 2, least_ratio=WORTH_NAMING, usual=n)
        for chosen, whose in ((out[out < n], "calibration sample"), (out[out >= n], "validation sample")):
            if chosen.size:
                ratio = float(np.sqrt(squares[chosen[0]] / np.median(squares[:n])))
                findings.append(
                    Finding(
                        gravity=DOUBT,
                        code=code,
                        title=f"{plural(chosen.size, whose)} whose spectra {what}",
                        samples=tuple(material.sample_ids[i] for i in chosen),
                        evidence=f"{how} is up to {ratio:.1f} times that of a usual sample (each left out in turn; "
                        f"{percent(FALSE_ALARM)} of clean sets would raise this).",
                        advice=ADVICE[whose],
                    )
                )
    return [*findings, *_unlike_validation(material, beyond, n)]


def _unlike_validation(material: Material, beyond: FloatArray, n: int) -> list[Finding]:
    """Say so if half of the validation samples leave more than 95 % of left-out calibration samples do."""
    limit = float(np.quantile(beyond[:n], USUAL))
    out = n + np.flatnonzero(beyond[n:] > limit)
    count = beyond.size - n
    if count < FEWEST_VALIDATION or 2 * out.size <= count:
        return []
    return [
        Finding(
            gravity=DOUBT,
            code="validation_unlike_calibration",
            title="The validation spectra as a whole hold something that the calibration spectra do not",
            samples=tuple(material.sample_ids[i] for i in out[np.argsort(-beyond[out], kind="stable")]),
            evidence=f"{out.size} of {count} leave a larger residual than {percent(USUAL)} of the calibration samples "
            "do when left out; by chance it would be one in twenty.",
            advice=ADVICE["validation sample"],
        )
    ]


def distances(rows: FloatArray, others: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return how far spectra lie from the calibration samples: inside the space they span, and outside of it.

    Parameters
    ----------
    rows : array of shape (n, n_points)
        Calibration spectra, one a sample; each is left out (a twentieth of many at a time) when it is judged.
    others : array of shape (m, n_points)
        Spectra that take no part.

    Returns
    -------
    within : array of shape (n + m,)
        Squared Mahalanobis distance in the principal components.
    beyond : array of shape (n + m,)
        Sum of squares of what these components leave.
    """
    n = len(rows)
    everything = np.vstack([rows, others])
    mean = rows.mean(axis=0)
    _, _, basis = np.linalg.svd(everything - mean, full_matrices=False)
    scores = (everything - mean) @ basis.T  # all distances survive in so few coordinates
    count = _components(np.linalg.svd(scores[:n], compute_uv=False), n)
    within, beyond = np.zeros(len(everything)), np.zeros(len(everything))
    labels = np.arange(n) if n <= LEFT_OUT_ALONE else interleaved(n, SHARES)
    labels = np.concatenate([labels, np.full(len(others), labels.max() + 1)])
    for label in np.unique(labels):
        out = labels == label
        training = scores[:n][~out[:n]]
        centre = training.mean(axis=0)
        _, s, axes = np.linalg.svd(training - centre, full_matrices=False)
        centred = scores[out] - centre
        along = centred @ axes[:count].T
        spread = np.maximum(s[:count] / np.sqrt(max(len(training) - 1, 1)), 1e-12 * max(float(s[0]), 1e-300))
        within[out] = np.sum((along / spread) ** 2, axis=1)
        beyond[out] = np.sum((centred - along @ axes[:count]) ** 2, axis=1)
    return within, beyond


def _components(s: FloatArray, n: int) -> int:
    share = np.cumsum(s**2) / max(float(np.sum(s**2)), 1e-300)
    return min(int(np.searchsorted(share, EXPLAINED)) + 1, MOST_COMPONENTS, max(n // 6, 1))


def check_replicates(material: Material) -> list[Finding]:
    """Name samples whose replicate spectra differ more than those of the others."""
    if material.processed is None:
        return []
    index = material.sample_index
    count = np.bincount(index)
    several: IntArray = np.flatnonzero(count > 1)
    if several.size < FEWEST:
        return []
    means = material.mean_by_sample(material.processed)
    deviations = material.processed - means[index]
    _, s, axes = np.linalg.svd(means - means.mean(axis=0), full_matrices=False)
    axes = axes[: min(_components(s, len(means)), several.size // 5)]
    scores = deviations @ axes.T
    found = disagreeing(scores, index, several, FALSE_ALARM / 2)
    rest = np.bincount(index, weights=np.sum((deviations - scores @ axes) ** 2, axis=1))[several] / (count[several] - 1)
    for i in standing_out(rest, FALSE_ALARM / 2, least_ratio=WORTH_NAMING).tolist():
        ratio = float(np.sqrt(rest[i] / np.median(rest)))
        found[int(several[i])] = max(ratio, found.get(int(several[i]), 0.0))
    if not found:
        return []
    ranked = sorted(found, key=lambda sample: -found[sample])
    return [
        Finding(
            gravity=DOUBT,
            code="replicates_disagree",
            title=f"{plural(len(ranked), 'sample')} whose replicate spectra disagree",
            samples=tuple(material.sample_ids[i] for i in ranked),
            evidence=f"They differ up to {found[ranked[0]]:.1f} times as much as usual replicates, after "
            f"preprocessing (at most {percent(FALSE_ALARM)} of clean sets with normal scatter would raise this).",
            advice="One spectrum may belong to another sample, or the sample is not homogeneous: compare, measure "
            "again.",
        )
    ]


def disagreeing(scores: FloatArray, index: IntArray, several: IntArray, false_alarm: float) -> dict[int, float]:
    """Return samples whose replicates scatter more than the pooled covariance of the others allows.

    They have to lie three times as far apart as usual, too. The test: Hotelling's T² of each sample's deviations with
    the covariance of the other samples', p by its F distribution,
    Bonferroni over the samples. Samples found are left out of the pool, and the others judged once more.

    Parameters
    ----------
    scores : array of shape (n_spectra, k)
        Deviations from the sample's mean.
    index : array of int, shape (n_spectra,)
        The sample of each spectrum.
    several : array of int
        Samples with replicates.
    false_alarm : float
        For all samples together.

    Returns
    -------
    dict
        Sample and how many times as far as expected its replicates lie apart.
    """
    k = scores.shape[1]
    squares = {int(i): scores[index == i].T @ scores[index == i] for i in several}
    freedom = {i: int(np.sum(index == i)) - 1 for i in squares}
    found: dict[int, float] = {}
    for _ in range(3):
        pool = [i for i in squares if i not in found]
        total, dof = sum((squares[i] for i in pool), np.zeros((k, k))), sum(freedom[i] for i in pool)
        for i in squares:
            left = dof - (freedom[i] if i in pool else 0)
            if left < k + 2:
                continue
            others = (total - (squares[i] if i in pool else 0.0)) / left
            distance = float(np.trace(np.linalg.pinv(others) @ squares[i])) / (k * freedom[i])
            p = float(stats.f.sf(distance * (left - k + 1) / left, k * freedom[i], left - k + 1))
            if p < false_alarm / len(squares) and distance > FAR_APART**2:
                found[i] = float(np.sqrt(distance))
    return found
