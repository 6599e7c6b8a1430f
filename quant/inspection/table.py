"""The checks, in the order in which their findings are told."""

from collections.abc import Callable

from quant.inspection import atmosphere, duplicates, files, noise, ordinate, outliers, shift, spread, values
from quant.inspection.finding import STOP, Finding
from quant.inspection.gather import leave_out
from quant.inspection.material import Material

Check = Callable[[Material], list[Finding]]

FIRST: tuple[Check, ...] = (
    files.check_readable,
    files.check_axes,
    files.check_quantities,
    files.check_recording,
    files.check_pairing,
    files.check_unmeasured,
    ordinate.check_quantity,
)
"""Checks of whether the spectra belong together at all."""

CHECKS: tuple[Check, ...] = (
    ordinate.check_opaque,
    ordinate.check_missing,
    ordinate.check_flattened,
    ordinate.check_high_absorbance,
    ordinate.check_negative,
    values.check_values,
    duplicates.check_duplicates,
    outliers.check_replicates,
    outliers.check_outlying,
    shift.check_shift,
    noise.check_spikes,
    noise.check_noise,
    atmosphere.check_atmosphere,
    spread.check_vary,
    spread.check_possible,
    spread.check_range,
    spread.check_together,
    spread.check_below_limit,
    spread.check_origin,
    spread.check_counts,
)
"""A check takes the material and returns findings. A new one is a function in the file of its theme and a line here."""


def run_checks(material: Material) -> list[Finding]:
    """Return the findings of all checks; spectra of another quantity would spoil the later ones, and are left out."""
    findings = [finding for check in FIRST for finding in check(material)]
    material = _without_other_quantity(material)
    findings += [finding for check in CHECKS for finding in check(material)]
    return [*findings, *_trouble(material)]


def _without_other_quantity(material: Material) -> Material:
    percent, turned = ordinate.other_quantity(material)
    odd = {material.sample_ids[i] for i in material.sample_index[percent | turned]}
    if not odd or odd.issuperset(material.calibration.sample_ids):
        return material
    return leave_out(material, odd)


def _trouble(material: Material) -> list[Finding]:
    if not material.trouble:
        return []
    return [
        Finding(
            gravity=STOP,
            code="preprocessing_fails",
            title="The recipe's preprocessing cannot be applied",
            samples=(),
            evidence=material.trouble,
            advice="Mend what this names, calibrating will refuse it; checks of processed spectra were left out.",
        )
    ]
