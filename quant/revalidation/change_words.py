"""Findings in plain words, and where such a change usually comes from."""

from collections.abc import Sequence

from quant.revalidation import change_terms as kinds
from quant.text_table import format_number

NOISE, CONTENT, UNEXPLAINED = "noise", "content", "unexplained"
VAPOUR_SPREAD, BASELINE_SPREAD = "vapour_spread", "baseline_spread"

CAUSES = {
    kinds.SHIFT: "Usual cause: the interferometer or its laser was re-aligned, the accessory or the sample sits "
    "differently in the beam, or the temperature differs.",
    kinds.STRETCH: "Usual cause: the laser or its wavelength setting was changed, or the beam is more divergent "
    "(aperture, alignment).",
    kinds.GAIN: "Usual cause: another path length or cell, another pressure on the crystal, another angle or number of "
    "reflections; or a detector that answers less than in proportion.",
    kinds.OFFSET: "Usual cause: an old background, a dirty or exchanged window or crystal, or light lost in another "
    "way than for the background.",
    kinds.SLOPE: "Usual cause: another source temperature since the background, a new source or beam splitter, "
    "scattering in the sample.",
    kinds.CURVATURE: "Usual cause: a new source, detector or beam splitter since the background, or an "
    "accessory that is out of line.",
    kinds.RESOLUTION: "Usual cause: alignment of the interferometer, another aperture, or another setting of "
    "resolution or apodisation.",
    kinds.VAPOUR: "Usual cause: the instrument was opened: purge it longer, look at seals and desiccant, measure the "
    "background more often.",
    VAPOUR_SPREAD: "Usual cause: an unsteady purge, or a background measured too seldom: look at the purge gas, "
    "seals and desiccant.",
    BASELINE_SPREAD: "Usual cause: samples lie or are pressed differently from one to the next, an accessory or a "
    "stage that moves, or a background measured too seldom.",
    NOISE: "Usual cause: source or detector old or exchanged, fewer scans, less light (alignment, a dirty crystal).",
    CONTENT: "Usual cause: the standards themselves, not the instrument: vials that were opened or leak, evaporation, "
    "water taken up. Have them assayed again.",
    UNEXPLAINED: "Usual cause: a substance that was not there before (residue on crystal or window, a cleaning agent, "
    "oil), or an exchanged accessory.",
}

QUIETER = "Usual cause: a new source or detector, better alignment, cleaner optics, or more scans."

UNITS = {
    kinds.STRETCH: "relative",
    kinds.GAIN: "relative",
    kinds.OFFSET: "absorbance",
    kinds.SLOPE: "absorbance",
    kinds.CURVATURE: "absorbance",
    kinds.VAPOUR: "absorbance",
    NOISE: "relative",
}
"""Units of the sizes; shift and resolution are in the axis' unit, content in the analyte's."""

_NAMES = {
    kinds.SHIFT: "shift of the axis",
    kinds.STRETCH: "stretch of the axis",
    kinds.GAIN: "size of the absorbances",
    kinds.OFFSET: "offset of the baseline",
    kinds.SLOPE: "slope of the baseline",
    kinds.CURVATURE: "curvature of the baseline",
    kinds.RESOLUTION: "line width (resolution)",
    kinds.VAPOUR: "water vapour",
    VAPOUR_SPREAD: "how much water vapour varies",
    BASELINE_SPREAD: "how much the baseline varies",
    NOISE: "noise",
    CONTENT: "analyte in the standards",
    UNEXPLAINED: "bands of something new",
}

# up, down; {0} is the size without sign and its standard error, with unit
_SENTENCES = {
    kinds.SHIFT: ("Bands lie {0} higher", "Bands lie {0} lower"),
    kinds.STRETCH: ("The axis is longer by {0}", "The axis is shorter by {0}"),
    kinds.GAIN: ("Absorbances are larger by {0}", "Absorbances are smaller by {0}"),
    kinds.OFFSET: ("The baseline lies {0} higher", "The baseline lies {0} lower"),
    kinds.SLOPE: (
        "The baseline rises towards higher axis values, {0} from its middle to the end",
        "The baseline falls towards higher axis values, {0} from its middle to the end",
    ),
    kinds.CURVATURE: (
        "The baseline is bent upwards at the ends, {0}",
        "The baseline is bent downwards at the ends, {0}",
    ),
    kinds.RESOLUTION: ("The line width (resolution) grew by {0}", "The line width (resolution) fell by {0}"),
    kinds.VAPOUR: ("There is more water vapour, strongest line {0}", "There is less water vapour, strongest line {0}"),
    VAPOUR_SPREAD: (
        "Water vapour varies more from standard to standard, strongest line {0} (standard deviation)",
        "Water vapour varies less from standard to standard, strongest line {0} (standard deviation)",
    ),
    BASELINE_SPREAD: (
        "The baseline varies more from standard to standard, {0} (standard deviation)",
        "The baseline varies less from standard to standard, {0} (standard deviation)",
    ),
    NOISE: ("Noise is larger by {0}", "Noise is smaller by {0}"),
    CONTENT: ("The standards seem to have gained {0} of analyte", "The standards seem to have lost {0} of analyte"),
    UNEXPLAINED: ("Something new absorbs, most at {1}: {0}", "Something absorbs less, most at {1}: {0}"),
}


def describe(
    kind: str,
    size: float,
    error: float,
    unit: str,
    *,
    significant: bool,
    others: Sequence[str] = (),
    where: str = "",
) -> str:
    """Return the finding about one kind of change as a sentence, without its full stop.

    Parameters
    ----------
    kind : str
        What may have changed.
    size, error : float
        Size and its standard error. [unit]
    unit : str
        "relative" is told in percent.
    significant : bool
        Whether chance does not explain it.
    others : sequence of str
        Kinds that cannot be told apart from it.
    where : str
        Place on the axis, for what is unexplained.
    """
    if not significant:
        return f"No change of {_NAMES[kind]} can be shown ({_amount(size, error, unit, signed=True)})"
    sentence = _SENTENCES[kind][size < 0].format(_amount(size, error, unit), where)
    if others:
        names = " and ".join(_NAMES[other] for other in others)
        sentence += f"; on this range it cannot be told apart from {names}"
    return sentence


def _amount(size: float, error: float, unit: str, *, signed: bool = False) -> str:
    """``0.41 ± 0.02 cm⁻¹``; relative sizes in percent."""
    factor, shown = (100.0, "%") if unit == "relative" else (1.0, unit)
    value = size if signed else abs(size)
    return f"{format_number(factor * value, 3)} ± {format_number(factor * error, 2)} {shown}".rstrip()
