"""Weights of standards on a calibration line, and the weight of the unknown that is read off it."""

import numpy as np

from quant.arrays import FloatArray
from quant.checks import name_some
from quant.errors import NotEnoughDataError, ParameterError

POWERS = {"1/x": 1, "1/x^2": 2}
LAWS = ("equal", *POWERS, "1/s^2")
"""Equal; variance of the signal as the content, or as its square; variances from stated standard deviations."""


def standard_weights(law: str, content: FloatArray, sd: FloatArray | None = None) -> FloatArray:
    """Return the weights of standards, their mean 1, shape (n,).

    Parameters
    ----------
    law : {"equal", "1/x", "1/x^2", "1/s^2"}
    content : array of shape (n,)
        x. [unit of the analyte]
    sd : array of shape (n,), optional
        s, standard deviation of the signal of each standard. [unit of the signal, or any]

    Raises
    ------
    NotEnoughDataError
        A weight would be infinite: a standard at zero or below, or without a scatter.
    """
    if law == "equal":
        return np.ones_like(content)
    scatter = content if law in POWERS else np.asarray(sd)
    bad = np.flatnonzero(~(scatter > 0))
    if bad.size:
        what = "contents" if law in POWERS else "standard deviations"
        raise NotEnoughDataError(
            f"Weights {law} need {what} above zero; found {name_some(f'{value:g}' for value in scatter[bad])}. "
            "Leave these standards out, or choose other line_weights."
        )
    relative = (scatter.min() / scatter) ** POWERS.get(law, 2)
    return np.asarray(relative / relative.mean())


def weight_at(law: str, standards: FloatArray | None, content: FloatArray) -> FloatArray:
    """Return the weight of a signal at contents of shape (n,), on the scale of the standards' weights.

    By the law itself for 1/x and 1/x^2, else by the standards' standard deviations interpolated linearly; outside the
    range that of the nearest standard.

    Parameters
    ----------
    law : {"equal", "1/x", "1/x^2", "1/s^2"}
    standards : array of shape (2, levels), or None for equal weights
        Different contents of the standards, rising, and the mean relative standard deviation 1/√w at each.
    content : array of shape (n,)
        [unit of the analyte]

    Raises
    ------
    ParameterError
        An unknown law.
    """
    if law not in LAWS:
        raise ParameterError(f"line_weights = {law!r}; expected one of {', '.join(LAWS)}.")
    if standards is None:
        return np.ones_like(content)
    levels, sd = standards
    if law in POWERS:
        inside = np.clip(content, levels[0], levels[-1])
        return np.asarray(sd[0] ** -2 * (levels[0] / inside) ** POWERS[law])
    return np.asarray(np.interp(content, levels, sd) ** -2)


def level_table(content: FloatArray, weights: FloatArray) -> FloatArray:
    """Return what `weight_at` needs, shape (2, levels): variances of equal contents are averaged."""
    levels, member = np.unique(content, return_inverse=True)
    variance = np.bincount(member, weights=1 / weights) / np.bincount(member)
    return np.stack([levels, np.sqrt(variance)])


def told_weight(law: str, weight: float) -> str:
    """Say which weight a signal was given, and where it comes from."""
    source = "interpolated between the standards" if law not in POWERS else f"modelled as {law}"
    return f"weight of its signal {weight:.3g}, {source} (mean of the standards 1)"
