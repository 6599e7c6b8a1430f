"""The prediction error to expect, before anything is prepared: net analyte signals of supplied pure spectra."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, name_some
from quant.errors import DataError, ParameterError
from quant.result import Result, documented

_SAME_SHAPE = 1e-12  # least eigenvalue of spectra of unit length: angles below about 1e-6


@dataclass(frozen=True, kw_only=True)
class NetSignal(Result):
    """Net analyte signal of one component: the part of its spectrum that no other component can imitate."""

    component: str = documented("Name of the component")
    sensitivity: float = documented("SEN, length of the net analyte signal of one unit", "ordinate / unit")
    selectivity: float = documented("SEL, that length over the length of the component's own spectrum; 1 is best")


@dataclass(frozen=True, kw_only=True)
class ExpectedError(Result):
    """Standard error of prediction to expect of a calibration with as many factors as components vary."""

    component: str = documented("Name of the component")
    sensitivity: float = documented("SEN, length of the net analyte signal of one unit", "ordinate / unit")
    selectivity: float = documented("SEL, that length over the length of the component's own spectrum; 1 is best")
    noise_part: float = documented("noise / SEN: the smallest difference that the noise lets see", "unit")
    leverage: float = documented("Mean leverage of the samples predicted, 1/n included")
    from_noise: float = documented("Part of the standard error from the noise of sample and standards", "unit")
    shrinkage: float = documented("Part from predictions being pulled to the mean by noise in the standards", "unit")
    laboratory_error: float = documented("Standard error of a reference value used", "unit")
    laboratory_source: str = documented("Where that comes from")
    against_truth: float = documented("Expected standard error against true values", "unit")
    against_reference: float = documented("Expected RMSEP against reference values", "unit")


def net_signals(spectra: ArrayLike, names: Sequence[str], *, closed: bool = False) -> tuple[NetSignal, ...]:
    """Net analyte signals of pure spectra of one unit each.

    Parameters
    ----------
    spectra : array of shape (k, n_points)
        Pure spectra of one unit of each component. [ordinate / unit]
    names : sequence of str
        The k components.
    closed : bool, optional
        The total is fixed and the last component makes up the rest. Then one unit more of a component is one unit less
        of the last, so its spectrum is the difference to the last one's; the last is found from the sum of the others.

    Raises
    ------
    ParameterError
        Spectra and names differ in number, or a single component has a fixed total.
    DataError
        Spectra of which one is a mixture of the others: no calibration can tell them apart.

    References
    ----------
    .. [1] A. Lorber, Anal. Chem. 58 (1986) 1167-1172; A. Lorber, K. Faber, B.R. Kowalski, Anal. Chem. 69 (1997)
       1620-1626 (from memory).
    """
    pure = as_matrix("The pure spectra", spectra)
    if len(pure) != len(names) or len(pure) < 1 + closed:
        raise ParameterError(f"{len(pure)} pure spectra for components {', '.join(names)}; expected one each.")
    varied = pure[:-1] - pure[-1] if closed else pure
    size = np.linalg.norm(varied, axis=1)
    _check_apart(varied, size, names)
    unit_length = varied / size[:, None]
    # ĉ = (K K')⁻¹ K x, so that var(ĉ) = noise²·(K K')⁻¹ and SEN = 1/√diag: Lorber's projection, for all at once.
    covariance = np.linalg.inv(unit_length @ unit_length.T) / np.outer(size, size)
    signals = [1 / np.sqrt(covariance[c, c]) for c in range(len(varied))]
    lengths = size.tolist()
    if closed:
        signals.append(1 / np.sqrt(covariance.sum()))  # ĉ = total − Σ of the others
        # The balance rises at the cost of the others in equal parts.
        lengths.append(float(np.linalg.norm(varied.mean(axis=0))))
    return tuple(
        NetSignal(component=name, sensitivity=float(signal), selectivity=float(signal / length))
        for name, signal, length in zip(names, signals, lengths, strict=True)
    )


def mean_leverage(standards: FloatArray, samples: FloatArray) -> float:
    """Mean leverage 1/n + (c − c̄)'(C'C)⁻¹(c − c̄) of samples among standards.

    Parameters
    ----------
    standards, samples : array of shape (n, k), (m, k)
        Concentrations of the varied components. [unit]

    Raises
    ------
    DataError
        The standards do not vary the components independently.
    """
    middle = standards.mean(axis=0)
    centred = standards - middle
    if np.linalg.matrix_rank(centred) < centred.shape[1]:
        raise DataError("The standards do not vary the components independently; expected a design that does.")
    rows = np.linalg.solve(np.asarray(np.linalg.qr(centred, mode="r")).T, (samples - middle).T)
    return float(1 / len(standards) + (rows**2).sum(axis=0).mean())


def expected_errors(
    spectra: ArrayLike,
    names: Sequence[str],
    standards: FloatArray,
    samples: FloatArray,
    noise: float,
    laboratory: Sequence[tuple[float, str]],
    *,
    closed: bool = False,
) -> tuple[ExpectedError, ...]:
    """Standard errors of prediction to expect of a PLS calibration with as many factors as components vary.

    To first order s² = (noise/SEN)²·(1 + h) + s_lab²·h against the truth [1]_: the noise of the sample counts once,
    that of the standards and the errors of their reference values by the leverage h. With many points p the noise of
    the standards also tilts the factors, which pulls every prediction towards the mean. With K the spectra, C the
    centred concentrations of the standards, Q = p·noise²·(C'C)⁻¹ and B = (KK' + Q)⁻¹, a sample c off the mean is
    predicted with an error of −c·Q·B on average, and the noise part becomes noise²·(1 + h)·diag B (own derivation to
    second order, by classical least squares; simulations of PLS agree, see the tests). Against reference values s_lab²
    is added.

    Parameters
    ----------
    spectra : array of shape (k, n_points)
        Pure spectra of one unit of each component; see `net_signals`. [ordinate / unit]
    names : sequence of str
        The k components.
    standards, samples : array of shape (n, k), (m, k)
        Concentrations of the standards and of the samples predicted. [unit]
    noise : float
        Standard deviation at one point of a spectrum, independent from point to point. [ordinate]
    laboratory : sequence of (float, str)
        Standard error of a reference value of each component and where it comes from. [unit]
    closed : bool, optional
        The total is fixed and the last component makes up the rest.

    Raises
    ------
    ParameterError, DataError
        As in `net_signals` and `mean_leverage`.

    References
    ----------
    .. [1] A.C. Olivieri et al., Pure Appl. Chem. 78 (2006) 633-661 (from memory).
    """
    pure = as_matrix("The pure spectra", spectra)
    signals = net_signals(pure, names, closed=closed)
    varied, k = (pure[:-1] - pure[-1], len(pure) - 1) if closed else (pure, len(pure))
    leverage = mean_leverage(standards[:, :k], samples[:, :k])
    directions = np.vstack([np.eye(k), -np.ones((1, k))])[: len(pure)]  # of each component in those that vary
    scatter, pull = _propagated(varied, standards[:, :k], samples[:, :k], noise)
    from_noise = np.einsum("ij,jk,ik->i", directions, scatter, directions) * (1 + leverage)
    shrinkage = ((pull @ directions.T) ** 2).mean(axis=0)
    found = []
    for c, (signal, (error, source)) in enumerate(zip(signals, laboratory, strict=True)):
        truth = float(from_noise[c] + shrinkage[c]) + error**2 * leverage
        found.append(
            ExpectedError(
                component=signal.component,
                sensitivity=signal.sensitivity,
                selectivity=signal.selectivity,
                noise_part=noise / signal.sensitivity,
                leverage=leverage,
                from_noise=float(np.sqrt(from_noise[c])),
                shrinkage=float(np.sqrt(shrinkage[c])),
                laboratory_error=error,
                laboratory_source=source,
                against_truth=float(np.sqrt(truth)),
                against_reference=float(np.sqrt(truth + error**2)),
            )
        )
    return tuple(found)


def _propagated(
    varied: FloatArray, standards: FloatArray, samples: FloatArray, noise: float
) -> tuple[FloatArray, FloatArray]:
    """Return noise²·B, shape (k, k), and the pull −c·Q·B of each sample, shape (m, k); see `expected_errors`."""
    middle = standards.mean(axis=0)
    centred = standards - middle
    Q = varied.shape[1] * noise**2 * np.linalg.inv(centred.T @ centred)
    B = np.linalg.inv(varied @ varied.T + Q)
    return noise**2 * B, -(samples - middle) @ Q @ B


def _check_apart(varied: FloatArray, size: FloatArray, names: Sequence[str]) -> None:
    """Refuse spectra without a net analyte signal, and name those that are in it together."""
    blended = size <= 1e-12 * size.max(initial=0.0)
    if not blended.any():
        unit_length = varied / size[:, None]
        values, vectors = np.linalg.eigh(unit_length @ unit_length.T)
        if values[0] > _SAME_SHAPE:
            return
        blended = np.abs(vectors[:, 0]) > 0.01
    culprits = name_some(names[c] for c in np.flatnonzero(blended).tolist())
    raise DataError(
        f"The pure spectra of {culprits} cannot be told apart: one is a mixture of others (or of the balance "
        "component's alone). Expected spectra that differ; use other ranges, or leave a component out."
    )
