"""The reference values by themselves: gaps, crowding, analytes that vary together, origins, numbers of samples."""

import numpy as np
from scipy import stats

from quant.arrays import FloatArray
from quant.calibration.cross_validation import MOST_FACTORS, check_calibration_values
from quant.calibration.split import INTERNAL
from quant.errors import NotEnoughDataError
from quant.inspection.finding import DOUBT, NOTE, STOP, Finding, percent, plural, signed_percent
from quant.inspection.material import Material

WIDE_GAP = 0.2  # of the range
RARE = 0.01  # chance of so wide a gap among evenly scattered values
CROWDED = 0.6  # share of the samples in the fullest fifth of the range
FEWEST = 5
TOGETHER, NEARLY = 0.9, 0.7  # |r|: as good as one variable; half of the variance shared
# ASTM E1655, from memory: calibration 6(k + 1) with mean-centring, never fewer than 24; validation 4k, never below 20.
LEAST_CALIBRATION, LEAST_VALIDATION = 24, 20
FEW_VALIDATION = 8  # fewer say next to nothing about RMSEP (95 % interval wider than −32 % to +92 %)
ALIKE = 1e-13  # of the largest value: rounding
LEAST_LEVELS = 5  # concentrations of a straight-line calibration; ICH Q2, from memory


def check_vary(material: Material) -> list[Finding]:
    """Find spectra that are all alike behind the preprocessing: nothing can be calibrated with them."""
    if material.processed is None or len(material.calibration) < 2:
        return []
    rows = material.processed[: material.n_calibration]
    largest = float(np.abs(rows).max())
    if float(np.ptp(rows, axis=0).max()) > ALIKE * largest:
        return []
    return [
        Finding(
            gravity=STOP,
            code="equal_spectra",
            title="All calibration spectra are equal behind the preprocessing",
            samples=(),
            evidence=f"They differ by no more than rounding ({ALIKE:g} of their largest value, {largest:.3g}).",
            advice="Check that each file holds its own spectrum, and which points and steps the recipe leaves; "
            "calibrating will refuse it.",
        )
    ]


def check_possible(material: Material) -> list[Finding]:
    """Stop where calibrating would refuse: too few values, or values that do not differ."""
    findings = []
    for analyte, column in zip(material.calibration.analytes, material.calibration.values.T, strict=True):
        try:
            check_calibration_values(analyte.name, column[np.isfinite(column)])
        except NotEnoughDataError as problem:
            findings.append(
                Finding(
                    gravity=STOP,
                    code="nothing_to_learn",
                    title=f"{analyte.name} cannot be calibrated",
                    samples=(),
                    evidence=str(problem),
                    advice="Calibrating refuses this.",
                )
            )
    return findings


def check_range(material: Material) -> list[Finding]:
    """Name gaps in the range of each analyte, and crowding."""
    findings = []
    for analyte, column in zip(material.calibration.analytes, material.calibration.values.T, strict=True):
        order = np.argsort(column, kind="stable")
        order = order[np.isfinite(column[order])]
        values = column[order]
        if values.size < FEWEST or values[0] == values[-1]:
            continue
        gap = widest_gap(values)
        if gap is not None:
            place, share = gap
            ids = material.calibration.sample_ids
            edge = place == 0 or place == values.size - 2
            findings.append(
                Finding(
                    gravity=DOUBT,
                    code="gap_in_range",
                    title=f"A gap in the range of {analyte.name}: {values[place]:.4g} to {values[place + 1]:.4g} "
                    f"{analyte.unit}".rstrip(),
                    samples=(ids[order[place]], ids[order[place + 1]]),
                    evidence=f"{percent(share)} of the range without a calibration sample"
                    + ("; one sample alone holds an end of the range." if edge else "."),
                    advice="Prepare standards inside the gap"
                    + (
                        ", or limit the range to where samples are."
                        if edge
                        else "; a straight line across it is a guess."
                    ),
                )
            )
        width = (values[-1] - values[0]) / 5
        inside = np.searchsorted(values, values + width, side="right") - np.arange(values.size)
        if inside.max() > CROWDED * values.size:
            start = int(np.argmax(inside))
            findings.append(
                Finding(
                    gravity=NOTE,
                    code="crowded_range",
                    title=f"Values of {analyte.name} crowd in a fifth of their range",
                    samples=(),
                    evidence=f"{inside.max()} of {values.size} samples between {values[start]:.4g} and "
                    f"{values[start] + width:.4g} {analyte.unit}".rstrip()
                    + ".",
                    advice="The calibration is known best there; more samples elsewhere would carry more weight.",
                )
            )
    return findings


def widest_gap(values: FloatArray) -> tuple[int, float] | None:
    """Return where sorted values have a gap too wide for chance (its lower end), and its share of the range; or None.

    Of n values scattered evenly, two extremes define the range and n − 2 lie inside; a given one of the n − 1 gaps is
    wider than a share g with probability (1 − g)^(n − 2).
    """
    gaps = np.diff(values) / (values[-1] - values[0])
    place = int(np.argmax(gaps))
    share = float(gaps[place])
    by_chance = min((values.size - 1) * (1 - share) ** (values.size - 2), 1.0)
    return (place, share) if share > WIDE_GAP and by_chance < RARE else None


def check_together(material: Material) -> list[Finding]:
    """Name analytes whose values rise and fall together."""
    analytes, values = material.calibration.analytes, material.calibration.values
    found = []
    for i in range(len(analytes)):
        for j in range(i + 1, len(analytes)):
            both = np.isfinite(values[:, [i, j]]).all(axis=1)
            a, b = values[both, i], values[both, j]
            if both.sum() >= FEWEST and np.ptp(a) > 0 and np.ptp(b) > 0:
                found.append((float(np.corrcoef(a, b)[0, 1]), f"{analytes[i].name} and {analytes[j].name}"))
    found.sort(key=lambda pair: -abs(pair[0]))
    pairs = [(r, names) for r, names in found if abs(r) >= NEARLY]
    if not pairs:
        return []
    strong = abs(pairs[0][0]) >= TOGETHER
    return [
        Finding(
            gravity=DOUBT if strong else NOTE,
            code="analytes_together",
            title="Analytes that vary together in the calibration samples",
            samples=(),
            evidence="; ".join(f"{names}: r = {r:+.2f}" for r, names in pairs) + ".",
            advice="One may be predicted through the other, and fails as soon as they part. Add standards in which "
            "they vary independently, or use the calibration only where nature ties them.",
        )
    ]


def check_below_limit(material: Material) -> list[Finding]:
    """Name values that the laboratory gave as below its limit."""
    samples = material.calibration
    findings = []
    for analyte, values, limits in zip(samples.analytes, samples.values.T, samples.censored.T, strict=True):
        below = np.flatnonzero(np.isnan(values) & np.isfinite(limits))
        if below.size:
            findings.append(
                Finding(
                    gravity=NOTE,
                    code="values_below_limit",
                    title=f"{plural(below.size, 'value')} of {analyte.name} below the laboratory's limit",
                    samples=tuple(samples.sample_ids[i] for i in below),
                    evidence=f"Given as below {float(limits[below].max()):g} {analyte.unit}".rstrip()
                    + "; left out of the fit, so that the low end of the range is cut off.",
                    advice="Prepare blanks and standards of known small content, whose values are weighed.",
                )
            )
    return findings


def check_origin(material: Material) -> list[Finding]:
    """Say whether process samples are to be predicted from prepared standards only."""
    origins = set(material.calibration.origins)
    if not origins or not origins <= {"spiked", "blended"}:
        return []
    later = set(material.validation.origins) if material.validation is not None else set()
    tested = "process" in later
    return [
        Finding(
            gravity=NOTE if tested else DOUBT,
            code="prepared_standards_only",
            title=f"All calibration samples are {' or '.join(sorted(origins))}",
            samples=(),
            evidence="The validation has samples from the process, and shows how they are predicted."
            if tested
            else "Process samples vary in ways that prepared ones do not: by-products, water, particle size.",
            advice="" if tested else "If process samples will be predicted, add some with laboratory values.",
        )
    ]


def check_counts(material: Material) -> list[Finding]:
    """Compare the numbers of samples with what the method wants."""
    table = material.recipe.regression
    most = table.max_factors if isinstance(table.max_factors, int) else MOST_FACTORS
    findings = []
    for analyte, values in zip(material.calibration.analytes, material.calibration.values.T, strict=True):
        n = int(np.isfinite(values).sum())
        if table.method == "band_area":
            levels = np.unique(values[np.isfinite(values)]).size
            if levels < LEAST_LEVELS:
                findings.append(
                    _few(
                        analyte.name, f"{plural(levels, 'different value')}", f"{LEAST_LEVELS} are the least for a line"
                    )
                )
            continue
        if not table.on_factors:
            continue
        factors = table.factors if isinstance(table.factors, int) else None
        wanted = LEAST_CALIBRATION if factors is None else max(LEAST_CALIBRATION, 6 * (factors + 1))
        if n < wanted:
            why = f"{wanted} are wanted" + (f" for {plural(factors, 'factor')}" if factors is not None else "")
            findings.append(_few(analyte.name, plural(n, "calibration sample"), f"{why} (ASTM E1655, from memory)"))
        elif factors is None and n // 6 - 1 < most:
            findings.append(
                Finding(
                    gravity=NOTE,
                    code="sample_count",
                    title=f"{n} calibration samples carry up to {plural(n // 6 - 1, 'factor')}; up to {most} are tried",
                    samples=(),
                    evidence="6(k + 1) samples for k factors, at least 24 (ASTM E1655, from memory).",
                    advice="Distrust a choice of more factors than that, or add samples.",
                )
            )
    findings += _validation_counts(material)
    return list({(f.title, f.evidence): f for f in findings}.values())


def _few(analyte: str, found: str, wanted: str) -> Finding:
    return Finding(
        gravity=DOUBT,
        code="few_calibration_samples",
        title=f"Only {found} of {analyte}",
        samples=(),
        evidence=f"{wanted[0].upper()}{wanted[1:]}.",
        advice="Prepare more, spread evenly over the range, or ask for fewer factors.",
    )


def _validation_counts(material: Material) -> list[Finding]:
    table, validation = material.recipe.regression, material.validation
    if validation is None or not len(validation):
        return [] if len(material.readings) > 1 else [_no_validation()]
    n = len(validation)
    factors = table.factors if isinstance(table.factors, int) else 1
    wanted = max(LEAST_VALIDATION, 4 * factors) if table.on_factors else FEW_VALIDATION
    if n >= wanted:
        return []
    kind = INTERNAL if material.recipe.validation is not None and material.recipe.validation.split else "validation"
    low, high = _rmse_interval(n)
    return [
        Finding(
            gravity=DOUBT if n < FEW_VALIDATION else NOTE,
            code="few_validation_samples",
            title=f"Only {plural(n, 'sample')} in the {kind}",
            samples=(),
            evidence=f"RMSEP from {n} is known to {signed_percent(low)} to {signed_percent(high)} (95 %)"
            + (f"; {wanted} are wanted (ASTM E1655, from memory)." if table.on_factors else "."),
            advice="Prepare more, separately from the calibration and over its whole range.",
        )
    ]


def _no_validation() -> Finding:
    return Finding(
        gravity=NOTE,
        code="no_validation",
        title="No validation samples",
        samples=(),
        evidence="The recipe has no [validation].",
        advice="Without samples that took no part, how the calibration does on new material is not proven.",
    )


def _rmse_interval(n: int) -> tuple[float, float]:
    low, high = np.sqrt(n / stats.chi2.ppf((0.975, 0.025), max(n, 1)))
    return float(low) - 1, float(high) - 1
