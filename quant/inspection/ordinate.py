"""Can the ordinates be what they are said to be: the quantity, the linear range, missing points, clipped bands?"""

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.inspection.finding import DOUBT, NOTE, STOP, Finding, plural
from quant.inspection.material import Material
from quant.inspection.noise import noise_levels
from quant.units import AXIS_UNITS, QUANTITIES

# Trade practice in quantitative mid-infrared work, from memory (handbooks, guidance of ASTM E168 and E1655): analytical
# bands of 0.1 to 1.0 A, up to 1.2-1.5 only with proven linearity, distrust above 2.
PROVE_ABOVE = 1.5  # A
DISTRUST_ABOVE = 2.0  # A
NEGATIVE_SHARE = 0.05  # of the highest absorbance; less below zero is a baseline's wobble
NEGATIVE_LEAST = 0.02  # A
FLAT_POINTS = 4  # neighbouring points of exactly one ordinate at the top of a band ...
STEEP = 2.5  # ... from which the spectrum falls by more than so many times its least step
TURNED = -0.5  # correlation with the other spectra below which a spectrum stands on its head
HALF_AS_FAR = 0.5  # bands that point down: the middle lies this much nearer to the top than to the bottom
PERCENT_OF_ONE = 2.0  # a fraction is at most about 1
PERCENT = 20.0  # no absorbance is so high; percent transmittance mostly is


def check_quantity(material: Material) -> list[Finding]:
    """Name spectra that are not the quantity they are said to be: %T or T among absorbance, or all of them."""
    values, said = material.spectra.values, QUANTITIES[material.spectra.quantity]
    percent, turned = other_quantity(material)
    middle = _middles(values)
    findings = _downward(values[~percent]) if material.spectra.quantity == "absorbance" else []
    for rows, evidence in (
        (percent, f"Their middle ordinate is {_span(middle[percent])}; no {said} is so high, but percent is."),
        (turned, "They run against the others: where most spectra have bands, these have gaps."),
    ):
        if rows.any():
            everyone = bool(rows.all())
            findings.append(
                Finding(
                    gravity=STOP,
                    code="wrong_quantity",
                    title=f"{'All spectra look' if everyone else _look(rows)} like another quantity than {said}",
                    samples=() if everyone else material.named(rows),
                    evidence=evidence,
                    advice='State what they are by quantity under [spectra], such as "percent_transmittance".'
                    if everyone
                    else f"Export them as {said}, like the others.",
                )
            )
    return findings


def other_quantity(material: Material) -> tuple[BoolArray, BoolArray]:
    """Mark spectra that look like percent, and spectra that stand on their heads, each of shape (n_spectra,)."""
    values, quantity = material.spectra.values, material.spectra.quantity
    if quantity == "arbitrary":
        return np.zeros(len(values), dtype=bool), np.zeros(len(values), dtype=bool)
    percent = _middles(values) > (PERCENT_OF_ONE if quantity in ("transmittance", "reflectance") else PERCENT)
    return percent, ~percent & _on_their_heads(values, ~percent)


def _middles(values: FloatArray) -> FloatArray:
    """Median of each spectrum, zero where nothing is known."""
    return np.array([float(np.median(row[~np.isnan(row)])) if (~np.isnan(row)).any() else 0.0 for row in values])


def _downward(values: FloatArray) -> list[Finding]:
    """Say so if most spectra lie near 1 with bands that point down, as transmittance does."""
    values = values[~np.isnan(values).all(axis=1)]
    if len(values) == 0:
        return []
    low, middle, high = np.nanpercentile(values, (1, 50, 99), axis=1)
    down = (high < 1.1) & (low > 0) & (middle > 0.5) & (high - middle < HALF_AS_FAR * (middle - low))
    if down.mean() <= 0.5:
        return []
    return [
        Finding(
            gravity=DOUBT,
            code="perhaps_transmittance",
            title="Most spectra look like transmittance, not absorbance",
            samples=(),
            evidence=f"Ordinates lie between {np.nanmin(values):.3g} and {np.nanmax(values):.3g}, most of them near "
            "the upper end, and bands point down.",
            advice='If that is what they are, state quantity = "transmittance" under [spectra].',
        )
    ]


def _look(rows: BoolArray) -> str:
    count = int(rows.sum())
    return f"{plural(count, 'spectrum', 'spectra')} look{'s' if count == 1 else ''}"


def _on_their_heads(values: FloatArray, rows: BoolArray) -> BoolArray:
    """Mark spectra whose correlation with the middle of all is far below zero; a minority only."""
    turned = np.zeros(len(values), dtype=bool)
    known = ~np.isnan(values[rows]).any(axis=0) if rows.any() else np.zeros(values.shape[1], bool)
    if rows.sum() < 3 or known.sum() < 5:
        return turned
    shown = values[rows][:, known]
    centred = shown - shown.mean(axis=1, keepdims=True)
    norms = np.linalg.norm(centred, axis=1)
    centred /= np.where(norms > 0, norms, 1.0)[:, None]
    middle = np.median(centred, axis=0)
    length = float(np.linalg.norm(middle))
    if length > 0:
        turned[np.flatnonzero(rows)[centred @ middle / length < TURNED]] = True
    return turned


def check_opaque(material: Material) -> list[Finding]:
    """Name transmittance or reflectance at or below zero, of which no logarithm exists."""
    if material.spectra.quantity not in ("transmittance", "reflectance"):
        return []
    dark = material.spectra.values <= 0
    return [
        Finding(
            gravity=STOP if inside else NOTE,
            code="opaque",
            title=f"{QUANTITIES[material.spectra.quantity].capitalize()} of zero or less in "
            f"{plural(int(rows.sum()), 'spectrum', 'spectra')}" + ("" if inside else ", outside the ranges used"),
            samples=material.named(rows),
            evidence=f"At {_where(material, _columns(places))}; such points have no absorbance.",
            advice="Use a thinner or more dilute sample, or leave that range out before converting.",
        )
        for rows, places, inside in _inside_and_outside(material, dark)
    ]


def check_high_absorbance(material: Material) -> list[Finding]:
    """Name absorbance beyond what detectors follow linearly."""
    if not material.is_absorbance:
        return []
    limits = ((DISTRUST_ABOVE, np.inf, DOUBT), (PROVE_ABOVE, DISTRUST_ABOVE, NOTE))
    findings = []
    a = material.absorbance
    if np.median(a) > PERCENT:
        return []  # no absorbance at all: told by check_quantity
    highest = np.where(material.used, a, -np.inf).max(axis=1)
    for low, high, gravity in limits:
        rows = (highest > low) & (highest <= high)
        if rows.any():
            places = _columns(a[rows] > low) & material.used
            findings.append(
                Finding(
                    gravity=gravity,
                    code="high_absorbance",
                    title=f"Absorbance above {low:g} in the ranges used: "
                    f"{plural(int(rows.sum()), 'spectrum', 'spectra')}",
                    samples=material.named(np.flatnonzero(rows)[np.argsort(-highest[rows], kind="stable")]),
                    evidence=f"Up to {highest[rows].max():.2f} A at {_where(material, places)}. At {low:g} A "
                    f"{100 * 10.0**-low:.2g} % of the light is left: stray light and detector bend the line.",
                    advice="Use a shorter path or dilute, or leave the tops of these bands out by keep_ranges; else "
                    "prove linearity with standards over the range.",
                )
            )
    outside = a[:, ~material.used]
    rows = _columns((outside > DISTRUST_ABOVE).T)
    if rows.any():
        findings.append(
            Finding(
                gravity=NOTE,
                code="high_absorbance_unused",
                title=f"Absorbance above {DISTRUST_ABOVE:g} outside the ranges used: "
                f"{plural(int(rows.sum()), 'spectrum', 'spectra')}",
                samples=material.named(rows),
                evidence=f"At {_where(material, _columns(a > DISTRUST_ABOVE) & ~material.used)}.",
                advice="Nothing; keep these ranges out.",
            )
        )
    return findings


def check_flattened(material: Material) -> list[Finding]:
    """Name bands cut off at the top: several neighbouring points of one ordinate, and a steep fall at both ends."""
    if material.spectra.quantity == "arbitrary":
        return []
    flat = np.array([_flat_tops(row) for row in material.absorbance]) & ~material.missing
    return [
        Finding(
            gravity=STOP if inside else NOTE,
            code="flattened_band",
            title=f"Bands cut off at the top in {plural(int(rows.sum()), 'spectrum', 'spectra')}"
            + ("" if inside else ", outside the ranges used"),
            samples=material.named(rows),
            evidence=f"{FLAT_POINTS} or more neighbouring points share one ordinate "
            f"({_span(material.absorbance[places])}) at {_where(material, _columns(places))}.",
            advice="The detector or the export is at its end there: measure thinner or more dilute, or leave the band "
            "out by leave_out_ranges.",
        )
        for rows, places, inside in _inside_and_outside(material, flat)
    ]


def _flat_tops(row: FloatArray) -> BoolArray:
    """Mark runs of equal points, in the upper half of the spectrum, that fall off steeply at both ends.

    Steeply: by more than rounding, which makes runs on the tops of wide bands, too.
    """
    marked = np.zeros(row.size, dtype=bool)
    steps = np.diff(row)
    level = steps == 0
    middle = (row.min() + row.max()) / 2
    bounds = np.flatnonzero(np.diff(np.concatenate([[False], level, [False]]).astype(np.int8)))
    moving = np.abs(steps[~level])
    steep = STEEP * float(moving.min()) if moving.size else np.inf  # the least step is the rounding, or noise
    for first, after in zip(
        bounds[::2].tolist(), bounds[1::2].tolist(), strict=True
    ):  # steps first ... after - 1 are 0
        enough = after - first + 1 >= FLAT_POINTS and row[first] > middle
        ends = [-steps[after] if after < steps.size else np.inf, steps[first - 1] if first > 0 else np.inf]
        if enough and min(ends) > steep:
            marked[first : after + 1] = True
    return marked


def check_negative(material: Material) -> list[Finding]:
    """Name absorbance clearly below zero in the ranges used."""
    if not material.is_absorbance or not material.used.any():
        return []
    a = material.absorbance[:, material.used]
    noise = noise_levels(material.absorbance, material.used)
    limit = np.maximum.reduce([NEGATIVE_SHARE * a.max(axis=1), 6 * noise, np.full(len(a), NEGATIVE_LEAST)])
    rows = (np.percentile(a, 1, axis=1) if a.shape[1] > 100 else a.min(axis=1)) < -limit
    if not rows.any():
        return []
    lowest = a.min(axis=1)
    return [
        Finding(
            gravity=NOTE,
            code="negative_absorbance",
            title=f"Absorbance below zero in the ranges used: {plural(int(rows.sum()), 'spectrum', 'spectra')}",
            samples=material.named(np.flatnonzero(rows)[np.argsort(lowest[rows], kind="stable")]),
            evidence=f"Down to {lowest[rows].min():.3f} A at "
            f"{_where(material, _columns(material.absorbance[rows] < -limit[rows, None]) & material.used)}.",
            advice="The background saw more absorption than the sample, or scatters less: measure a fresh background, "
            "or take the baseline out by a step (straight_baseline, savitzky_golay, snv).",
        )
    ]


def check_missing(material: Material) -> list[Finding]:
    """Name missing points."""
    return [
        Finding(
            gravity=STOP if inside else NOTE,
            code="missing_points",
            title=f"Missing points in {plural(int(rows.sum()), 'spectrum', 'spectra')}"
            + ("" if inside else ", outside the ranges used"),
            samples=material.named(rows),
            evidence=f"{plural(int(places.sum()), 'point')} at {_where(material, _columns(places))}; bridged by "
            "straight lines for this look, but calibrating refuses them.",
            advice="Export these spectra again, or leave the range out by leave_out_ranges.",
        )
        for rows, places, inside in _inside_and_outside(material, material.missing)
    ]


def _inside_and_outside(material: Material, places: BoolArray) -> list[tuple[BoolArray, BoolArray, bool]]:
    """Part marked points into those that the regression uses and others: rows, points, whether used."""
    parted = []
    for mask, inside in ((material.used, True), (~material.used, False)):
        marked = places & mask
        if marked.any():
            parted.append((_columns(marked.T), marked, inside))
    return parted


def _columns(marks: BoolArray) -> BoolArray:
    """Mark the columns in which anything is marked."""
    return np.asarray(marks.any(axis=0))


def _where(material: Material, points: BoolArray) -> str:
    axis = material.spectra.axis
    values, unit = axis.values[points], AXIS_UNITS[axis.unit]
    if values.size == 0:
        return "no point"
    low, high = float(values.min()), float(values.max())
    return f"{low:g} {unit}" if low == high else f"{low:g} to {high:g} {unit} ({values.size} points)"


def _span(values: FloatArray) -> str:
    if values.size == 0:
        return ""
    low, high = float(values.min()), float(values.max())
    return f"{low:.4g}" if low == high else f"{low:.4g} to {high:.4g}"
