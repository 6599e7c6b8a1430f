"""Net analyte signal: the part of a substance's spectrum that nothing else in the sample can imitate."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, as_vector
from quant.errors import NotEnoughDataError, ParameterError
from quant.result import Result, documented
from quant.text_table import Row, format_rows


@dataclass(frozen=True, kw_only=True, eq=False)
class NetAnalyteSignal(Result):
    """What of the analyte's spectrum serves to find it."""

    direction: FloatArray = documented("Unit vector of the net analyte signal, shape (n_points,)")
    sensitivity: float = documented("Net analyte signal of one unit", "ordinate / unit of the analyte")
    selectivity: float | None = documented("Net analyte signal over the whole spectrum's length, 0 to 1")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [("sensitivity", self.sensitivity, ""), ("selectivity", self.selectivity, "")]

    def __str__(self) -> str:
        return f"Net analyte signal\n{format_rows(self.rows())}"


def net_analyte_signal(pure: ArrayLike, others: ArrayLike) -> NetAnalyteSignal:
    """Net analyte signal from pure spectra: (I - R·R^+)·s, R holding the spectra of everything else.

    Parameters
    ----------
    pure : array of shape (n_points,)
        s, the analyte's spectrum at unit content. [ordinate / unit of the analyte]
    others : array of shape (n_others, n_points)
        Spectra of everything else: other substances, baselines; at any content. May have no row.

    Raises
    ------
    ParameterError
        Shapes that do not fit, numbers that are not finite.
    NotEnoughDataError
        The analyte's spectrum is zero, or the others' add up to it: nothing of it is left.

    References
    ----------
    .. [1] A. Lorber, Anal. Chem. 58 (1986) 1167-1172; A. Lorber, K. Faber, B.R. Kowalski, Anal. Chem. 69 (1997)
       1620-1626 (from memory).
    """
    spectrum, rest = as_vector("pure", pure), as_matrix("others", others)
    if rest.shape[1] != spectrum.size:
        raise ParameterError(f"pure has {spectrum.size} points, others {rest.shape[1]}; expected one axis.")
    coefficients = np.linalg.lstsq(rest.T, spectrum, rcond=None)[0]
    net = spectrum - coefficients @ rest
    whole, length = float(np.linalg.norm(spectrum)), float(np.linalg.norm(net))
    if length <= 100 * spectrum.size * np.finfo(np.float64).eps * whole:
        raise NotEnoughDataError(
            "nothing of the analyte's spectrum is left beside the others': it is zero, or they add up to it."
        )
    return NetAnalyteSignal(direction=net / length, sensitivity=length, selectivity=length / whole)


def net_analyte_signal_of_vector(coefficients: ArrayLike, pure: ArrayLike | None = None) -> NetAnalyteSignal:
    """Net analyte signal from a regression vector b: direction b/|b|, sensitivity 1/|b|.

    Parameters
    ----------
    coefficients : array of shape (n_points,)
        b, for which predicted = b'x. [unit of the analyte / ordinate]
    pure : array of shape (n_points,), optional
        The analyte's spectrum at unit content, preprocessed as the model's spectra, for the selectivity.

    Raises
    ------
    ParameterError
        Shapes that do not fit, numbers that are not finite.
    NotEnoughDataError
        The regression vector or the pure spectrum is zero.

    References
    ----------
    .. [1] A. Lorber, K. Faber, B.R. Kowalski, Anal. Chem. 69 (1997) 1620-1626 (from memory).
    """
    vector = as_vector("coefficients", coefficients)
    length = _length("regression vector", vector)
    selectivity = None
    if pure is not None:
        spectrum = as_vector("pure", pure)
        if spectrum.size != vector.size:
            raise ParameterError(f"pure has {spectrum.size} points, the vector {vector.size}; expected one axis.")
        selectivity = 1 / (length * _length("pure spectrum", spectrum))
    return NetAnalyteSignal(direction=vector / length, sensitivity=1 / length, selectivity=selectivity)


def analytical_sensitivity(sensitivity: float, signal_sd: float) -> float:
    """Analytical sensitivity γ = SEN/s_x; 1/γ is the smallest difference in content that stands out of the noise.

    Parameters
    ----------
    sensitivity : float
        SEN. [ordinate / unit of the analyte]
    signal_sd : float
        s_x, noise of one point of a spectrum. [ordinate]

    Returns
    -------
    float
        [1 / unit of the analyte]

    Raises
    ------
    ParameterError
        Either is not above zero.
    """
    if not (sensitivity > 0 and signal_sd > 0):
        raise ParameterError(f"sensitivity = {sensitivity}, signal_sd = {signal_sd}; expected both above zero.")
    return sensitivity / signal_sd


def _length(name: str, vector: FloatArray) -> float:
    length = float(np.linalg.norm(vector))
    if length == 0:
        raise NotEnoughDataError(f"the {name} is zero: there is no net analyte signal.")
    return length
