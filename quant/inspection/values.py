"""Reference values against spectra: values that the spectra contradict, and labels that are probably exchanged."""

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.errors import ParameterError, QuantityError
from quant.inspection.duplicates import duplicate_pairs
from quant.inspection.exchange import Exchange, find_exchanges
from quant.inspection.finding import DOUBT, STOP, Finding, percent, plural
from quant.inspection.left_out import best_smoother, make_smoothers, studentised
from quant.inspection.material import Material
from quant.inspection.robust import FALSE_ALARM, FEWEST, largest_z, robust_z
from quant.recipe.pipeline import axis_behind, build_method, build_steps
from quant.spectra.bands import place_bands, refuse_gaps

PLAIN = 0.5  # left-out error falls to this share of what it was: more than a suspicion
USEFUL = 0.5  # share of the values' variance that spectra have to explain, left out, before they may contradict any


def check_values(material: Material) -> list[Finding]:
    """Predict every calibration sample from the others and ask which values, or pairs of values, cannot be right."""
    if material.processed is None:
        return []
    try:
        spectra = _predictors(material, material.processed)
    except (ParameterError, QuantityError) as problem:
        return [_no_signal(str(problem))]
    exchanges: dict[tuple[int, int], list[tuple[str, str, Exchange]]] = {}
    contradictions = []
    alarm = FALSE_ALARM / len(material.calibration.analytes)
    groups = _groups(material)
    for analyte, values in zip(material.calibration.analytes, material.calibration.values.T, strict=True):
        known = np.flatnonzero(np.isfinite(values))
        if known.size < FEWEST or np.ptp(values[known]) == 0:
            continue
        smoothers = make_smoothers(spectra[known], groups[known])
        if not smoothers:
            continue
        pairs, mended = find_exchanges(smoothers, values[known], alarm, material.recipe.cross_validation.seed)
        for pair in pairs:
            place = (int(known[pair.first]), int(known[pair.second]))
            exchanges.setdefault(place, []).append((analyte.name, analyte.unit, pair))
        best = best_smoother(smoothers, mended)
        left_out = best.errors @ mended
        explained = 1 - np.sum(left_out**2) / np.sum((mended - mended.mean()) ** 2)
        if explained < USEFUL:
            continue
        z = robust_z(studentised(best, mended))
        limit = largest_z(known.size, alarm, both_sides=True)
        out = np.flatnonzero(np.abs(z) > limit)
        if out.size:
            out = out[np.argsort(-np.abs(z[out]), kind="stable")]
            contradictions.append(
                Finding(
                    gravity=DOUBT,
                    code="contradicted_value",
                    title=f"{plural(out.size, 'value')} of {analyte.name} that the spectra contradict",
                    samples=tuple(material.calibration.sample_ids[known[i]] for i in out),
                    evidence=_contradiction(analyte.unit, mended[out[0]], -left_out[out[0]], z[out[0]], limit),
                    advice="Ask the laboratory for the raw result, or have the sample analysed again; do not exclude a "
                    "value only because it does not fit.",
                )
            )
    return [*_exchanged(material, exchanges), *contradictions]


def _predictors(material: Material, processed: FloatArray) -> FloatArray:
    """Mean processed spectra of the calibration samples, or the band signals where the recipe takes these."""
    rows = material.calibration.mean_by_sample(processed[: material.n_calibration])
    if material.recipe.regression.method != "band_area":
        return rows
    axis = material.spectra.axis
    behind = axis_behind(build_steps(material.recipe, axis, material.spectra.quantity), axis)
    method = build_method(material.recipe, behind, 1).get_params()
    bands = place_bands(method["bands"], method["reference_band"], behind, behind.size)
    refuse_gaps("band_area", bands)
    return bands.signals(rows)[:, None]


def _no_signal(problem: str) -> Finding:
    return Finding(
        gravity=STOP,
        code="no_band_signal",
        title="The band's signal cannot be computed",
        samples=(),
        evidence=problem,
        advice="Mend what this names, calibrating will refuse it; values were not compared with spectra.",
    )


def _groups(material: Material) -> IntArray:
    """Label samples so that exact duplicates share a label: they are left out together."""
    label = np.arange(len(material.calibration))
    for a, b in duplicate_pairs(material):
        if b < label.size:
            label[label == label[b]] = label[a]
    return label


def _contradiction(unit: str, value: float, error: float, z: float, limit: float) -> str:
    return (
        f"The worst: the laboratory says {value:.4g}, the other samples {value + error:.4g} {unit}".rstrip()
        + f" ({abs(z):.1f} robust standard errors apart; {limit:.1f} is the limit that {percent(FALSE_ALARM)} of "
        "clean sets pass)."
    )


def _exchanged(material: Material, exchanges: dict[tuple[int, int], list[tuple[str, str, Exchange]]]) -> list[Finding]:
    findings = []
    ids, n = material.calibration.sample_ids, len(material.calibration.analytes)
    ranked = sorted(exchanges.items(), key=lambda item: min(e.after / e.before for _, _, e in item[1]))
    for (a, b), seen in ranked:
        name, unit, best = min(seen, key=lambda item: item[2].after / item[2].before)
        also = f" (and {', '.join(other for other, _, _ in seen if other != name)})" if len(seen) > 1 else ""
        whole = "the spectra or whole rows" if len(seen) == n else "the values"
        values = material.calibration.analyte(name)[1]
        findings.append(
            Finding(
                gravity=STOP if best.after < PLAIN * best.before else DOUBT,
                code="exchanged_labels",
                title=f"Labels probably exchanged: {ids[a]} and {ids[b]}",
                samples=(ids[a], ids[b]),
                evidence=f"{name}{also}: {values[a]:.4g} and {values[b]:.4g} {unit}".rstrip()
                + f". With {whole} of the two exchanged, the left-out error falls from {best.before:.3g} to "
                f"{best.after:.3g}; chance does as well with p = {best.p:.2g} (a pair is named in "
                f"{percent(FALSE_ALARM)} of clean sets).",
                advice="Check vials, file names and laboratory sheet of both; mend the files only when the cause is "
                "found, else exclude both.",
            )
        )
    return findings
