"""Do the files belong together: readable, one axis, one quantity, one way of recording, and each with its partner?"""

from collections.abc import Iterable, Sequence

import numpy as np

from quant.checks import name_some
from quant.inspection.finding import DOUBT, NOTE, STOP, Finding, plural
from quant.inspection.material import Material, Reading
from quant.spectra.spectra_set import SpectraSet
from quant.units import QUANTITIES

# Notes that say how a spectrum was recorded, and how grave it is if they differ. Techniques (transmission, ATR,
# reflectance) give different spectra; resolution and accessory change bands a little.
RECORDED = {
    "technique": STOP,
    "resolution": DOUBT,
    "accessory": DOUBT,
    "path_length": DOUBT,
    "instrument": NOTE,
}


def check_readable(material: Material) -> list[Finding]:
    """Name files that cannot be read."""
    unread = [entry for reading in material.readings for entry in reading.unread]
    if not unread:
        return []
    return [
        Finding(
            gravity=STOP,
            code="unreadable_file",
            title=f"{plural(len(unread), 'file')} cannot be read",
            samples=tuple(file for file, _ in unread),
            evidence=f"The first: {unread[0][1]}",
            advice="Export the files again, or take them out of [spectra] files; calibrating refuses them.",
        )
    ]


def check_axes(material: Material) -> list[Finding]:
    """Name files whose axis differs from that of most spectra, and validation files on another axis."""
    findings = []
    for reading in material.readings:
        odd = [(file, spectra) for file, spectra, what in reading.other if what == "axis"]
        if odd:
            findings.append(
                _other_axis("file", _labels(odd), odd[0][1], reading.spectra, material.recipe.spectra.resample)
            )
    first, *others = material.readings
    if others and material.validation is None and len(others[0].samples):
        findings.append(
            _other_axis(
                "sample",
                others[0].samples.sample_ids,
                others[0].spectra,
                first.spectra,
                material.recipe.spectra.resample,
            )
        )
    return findings


def _other_axis(noun: str, names: tuple[str, ...], other: SpectraSet, main: SpectraSet, resample: bool) -> Finding:  # noqa: FBT001
    if other.quantity != main.quantity:
        title, evidence = "Validation samples of another quantity", QUANTITIES[other.quantity]
        evidence = f"{evidence}; the calibration's spectra are {QUANTITIES[main.quantity]}."
    else:
        title = f"{plural(len(names), noun)} on another axis than most spectra"
        evidence = f"The first lies on {other.axis}; most lie on {main.axis}."
    return Finding(
        gravity=STOP,
        code="mixed_axes",
        title=title,
        samples=names,
        evidence=f"{evidence} They were left out of all that follows.",
        advice=(
            "Even resampling cannot help, since the measured axis does not cover the other: measure again alike."
            if resample
            else "Measure or export them alike, or set resample = true under [spectra]; another spacing often means "
            "another resolution, which resampling does not mend."
        ),
    )


def check_quantities(material: Material) -> list[Finding]:
    """Name files whose ordinate is another quantity than that of most spectra."""
    findings = []
    for reading in material.readings:
        odd = [(file, spectra) for file, spectra, what in reading.other if what == "quantity"]
        if odd:
            found, usual = QUANTITIES[odd[0][1].quantity], QUANTITIES[reading.spectra.quantity]
            findings.append(
                Finding(
                    gravity=STOP,
                    code="mixed_quantities",
                    title=f"{found.capitalize()} among {usual}: {plural(len(odd), 'file')}",
                    samples=_labels(odd),
                    evidence="The files say so themselves. They were left out of all that follows.",
                    advice=f"Export these files as {usual}.",
                )
            )
    return findings


def check_recording(material: Material) -> list[Finding]:
    """Name spectra recorded in another way than most, where the notes say so."""
    findings = []
    spectra = material.spectra
    for note, gravity in RECORDED.items():
        found: dict[str, list[int]] = {}
        for row, notes in enumerate(spectra.notes):
            found.setdefault(notes.get(note, "not stated"), []).append(row)
        stated = [value for value in found if value != "not stated"]
        if len(found) < 2 or not stated:
            continue
        usual = max(found, key=lambda value: len(found[value]))
        odd = [row for value, rows in found.items() if value != usual for row in rows]
        counts = ", ".join(f"{value} ({plural(len(rows), 'spectrum', 'spectra')})" for value, rows in found.items())
        findings.append(
            Finding(
                gravity=gravity if len(stated) > 1 else NOTE,
                code=f"mixed_{note}",
                title=f"Spectra differ in {note.replace('_', ' ')}",
                samples=material.named(odd),
                evidence=f"Found: {counts}.",
                advice=f"Measure all spectra alike, or make a calibration for each; state {note} under [spectra.notes] "
                "if the files are wrong or silent.",
            )
        )
    return findings


def check_pairing(material: Material) -> list[Finding]:
    """Name what has no partner: spectra without values, values without spectra, samples in both sets."""
    findings = []
    if material.in_both:
        findings.append(
            Finding(
                gravity=STOP,
                code="sample_in_both_sets",
                title=f"{plural(len(material.in_both), 'sample')} in the calibration and in the validation",
                samples=material.in_both,
                evidence="The same sample IDs have spectra in both sets of files.",
                advice="A sample that calibrates proves nothing about new ones: take it out of one set, or give "
                "separately prepared material its own ID.",
            )
        )
    reference = material.recipe.reference
    spectra = _once(name for reading in material.readings for name in reading.samples.spectra_without_values)
    if spectra:
        refused = reference.unmatched == "refuse"
        findings.append(
            Finding(
                gravity=STOP if refused else NOTE,
                code="spectra_without_values",
                title=f"{plural(len(spectra), 'sample')} with spectra but no row in the reference table",
                samples=spectra,
                evidence="Calibrating refuses this." if refused else "Left out, as the recipe says.",
                advice='Add the rows or mend the spelling; to leave them out, set unmatched = "drop" under [reference].'
                if refused
                else "Nothing, if that is meant.",
            )
        )
    lacking = [
        f"{sample} ({analyte.name})"
        for samples in (material.calibration, material.validation)
        if samples is not None
        for analyte, values, limits in zip(samples.analytes, samples.values.T, samples.censored.T, strict=True)
        for sample, absent in zip(samples.sample_ids, np.isnan(values) & np.isnan(limits), strict=True)
        if absent
    ]
    if lacking:
        refused = reference.missing == "refuse"
        findings.append(
            Finding(
                gravity=STOP if refused else NOTE,
                code="missing_values",
                title=f"{plural(len(lacking), 'reference value')} missing",
                samples=tuple(lacking),
                evidence="Calibrating refuses this." if refused else "Left out for that analyte, as the recipe says.",
                advice='Supply them; to leave these samples out, set missing = "drop" under [reference].'
                if refused
                else "Nothing, if that is meant.",
            )
        )
    return findings


def unpaired_values(reading: Reading, readings: Sequence[Reading]) -> tuple[str, ...]:
    """Return samples of a reference table that have no spectrum in any set of files."""
    elsewhere = {sample for other in readings for _, part in other.parts for sample in part.sample_ids}
    return tuple(sample for sample in reading.samples.values_without_spectra if sample not in elsewhere)


def check_unmeasured(material: Material) -> list[Finding]:
    """Name values without a spectrum."""
    names = _once(name for reading in material.readings for name in unpaired_values(reading, material.readings))
    if not names:
        return []
    return [
        Finding(
            gravity=NOTE,
            code="values_without_spectra",
            title=f"{plural(len(names), 'sample')} in the reference table without a spectrum",
            samples=names,
            evidence="They take no part.",
            advice="Check the spelling of the sample IDs, or measure them.",
        )
    ]


def _labels(odd: Sequence[tuple[str, SpectraSet]]) -> tuple[str, ...]:
    """Name files with the samples in them."""
    return tuple(f"{file} ({name_some(dict.fromkeys(spectra.sample_ids), 2)})" for file, spectra in odd)


def _once(names: Iterable[str]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(names))
