"""The same spectrum under two names: exact copies, and spectra that differ by less than their noise."""

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.inspection.finding import DOUBT, NOTE, STOP, Finding, plural
from quant.inspection.material import Material
from quant.inspection.noise import noise_levels

NEARER_THAN_NOISE = 0.7  # times the distance that noise alone puts between two spectra
FEWEST_POINTS = 30  # a distance over fewer points says little
ADVICE = "duplicates_together = true under [cross_validation]"


def check_duplicates(material: Material) -> list[Finding]:
    """Name samples that share a spectrum; a stop where one of a pair is to validate the other."""
    exact = duplicate_pairs(material)
    near = _near_pairs(material, exact)
    findings: list[Finding] = []
    for pairs, kind in ((exact, "Exact"), (near, "Near")):
        across = [pair for pair in pairs if _is_validation(material, pair[0]) != _is_validation(material, pair[1])]
        within = [pair for pair in pairs if pair not in across]
        if across:
            findings.append(_across(material, across, kind))
        if within:
            findings.append(_within(material, within, kind, len(across)))
    return [*findings, *_contradictions(material, exact), *_copied_replicates(material)]


def duplicate_pairs(material: Material) -> list[tuple[int, int]]:
    """Return pairs of samples (positions, the first before the second) that have a spectrum exactly in common."""
    owners: dict[bytes, list[int]] = {}
    for row, sample in zip(material.spectra.values, material.sample_index.tolist(), strict=True):
        owners.setdefault(row.tobytes(), []).append(sample)
    pairs = {
        (min(a, b), max(a, b))
        for samples in owners.values()
        for i, a in enumerate(samples)
        for b in samples[i + 1 :]
        if a != b
    }
    return sorted(pairs)


def _near_pairs(material: Material, exact: list[tuple[int, int]]) -> list[tuple[int, int]]:
    """Pairs whose spectra are nearer than two measurements of one sample could be."""
    rows = material.absorbance[:, material.used]
    noise = noise_levels(material.absorbance, material.used)
    if rows.shape[1] < FEWEST_POINTS or not (noise > 0).all():
        return []
    sample, known = material.sample_index, set(exact)
    found = {}
    for i in range(len(rows) - 1):
        rest = rows[i + 1 :] - rows[i]
        distance = np.sqrt(np.mean(rest * rest, axis=1))
        least = NEARER_THAN_NOISE * np.hypot(noise[i], noise[i + 1 :])
        for j in np.flatnonzero((distance < least) & (sample[i + 1 :] != sample[i])) + i + 1:
            pair = (int(min(sample[i], sample[j])), int(max(sample[i], sample[j])))
            if pair not in known:
                found[pair] = True
    return sorted(found)


def _is_validation(material: Material, sample: int) -> bool:
    return sample >= len(material.calibration)


def _names(material: Material, pairs: list[tuple[int, int]]) -> tuple[str, ...]:
    return tuple(f"{material.sample_ids[a]} = {material.sample_ids[b]}" for a, b in pairs)


def _across(material: Material, pairs: list[tuple[int, int]], kind: str) -> Finding:
    twins = len({b for _, b in pairs})
    return Finding(
        gravity=STOP,
        code=f"{kind.lower()}_duplicates_across_sets",
        title=f"{plural(twins, 'validation sample')} with {'an exact' if kind == 'Exact' else 'a near'} twin among the "
        "calibration samples",
        samples=_names(material, pairs),
        evidence=_why(kind),
        advice="Such samples prove nothing about new ones, and RMSEP comes out too small: take them out of the "
        "validation, or exclude their twins from the calibration.",
    )


def _within(material: Material, pairs: list[tuple[int, int]], kind: str, n_across: int) -> Finding:
    together = material.recipe.cross_validation.duplicates_together
    also = f" ({plural(n_across, 'more pair')} between calibration and validation above)" if n_across else ""
    return Finding(
        gravity=NOTE if together and kind == "Exact" else DOUBT,
        code=f"{kind.lower()}_duplicates",
        title=f"{plural(len(pairs), 'pair')} of samples that are {kind.lower()} duplicates{also}",
        samples=_names(material, pairs),
        evidence=_why(kind),
        advice="Kept together in cross-validation, as the recipe says."
        if together and kind == "Exact"
        else f"Set {ADVICE}, else a sample is predicted from its own copy and RMSECV comes out too small; or exclude "
        "one of each pair.",
    )


def _why(kind: str) -> str:
    if kind == "Exact":
        return "Every point of their spectra is equal to the last digit: a file that was copied or read twice."
    return "Their spectra differ by less than the noise of one, which two measurements cannot: processed copies."


def _contradictions(material: Material, pairs: list[tuple[int, int]]) -> list[Finding]:
    values: FloatArray = material.calibration.values
    if material.validation is not None:
        values = np.vstack([values, material.validation.values])
    with np.errstate(invalid="ignore"):
        unequal = [(a, b) for a, b in pairs if (np.abs(values[a] - values[b]) > 1e-9 * np.abs(values[a])).any()]
    if not unequal:
        return []
    a, b = unequal[0]
    column = int(np.nanargmax(np.abs(values[a] - values[b])))
    analyte = material.calibration.analytes[column]
    said = f"{analyte.name} {values[a, column]:g} and {values[b, column]:g} {analyte.unit}".rstrip()
    return [
        Finding(
            gravity=DOUBT,
            code="duplicates_with_different_values",
            title=f"{plural(len(unequal), 'pair')} of one spectrum but different reference values",
            samples=_names(material, unequal),
            evidence=f"The first: {said}.",
            advice="One spectrum carries the wrong name, or one value is wrong: find out which before calibrating.",
        )
    ]


def _copied_replicates(material: Material) -> list[Finding]:
    copied: list[int] = []
    seen: dict[tuple[int, bytes], int] = {}
    for row, (sample, values) in enumerate(zip(material.sample_index.tolist(), material.spectra.values, strict=True)):
        if (sample, values.tobytes()) in seen:
            copied.append(row)
        seen[sample, values.tobytes()] = row
    if not copied:
        return []
    samples: IntArray = np.unique(material.sample_index[copied])
    return [
        Finding(
            gravity=DOUBT,
            code="copied_replicates",
            title=f"{plural(samples.size, 'sample')} whose replicates are copies of each other",
            samples=tuple(material.sample_ids[i] for i in samples),
            evidence=_why("Exact"),
            advice="Copies hide how much replicates differ: keep one spectrum, or fetch the true replicates.",
        )
    ]
