"""Dividing samples: folds for cross-validation, and one part to keep against one to leave out.

Everything counts samples, never spectra. Where `groups` names a group for each sample (a batch, a pair of duplicates),
the groups take the place of the samples: they are numbered in the order of their first appearance, divided, and their
samples go where they go. Fold makers return one whole number a sample, the fold that leaves it out; splits return the
positions kept and left out, each ascending.
"""

from collections.abc import Hashable, Sequence
from typing import TypeAlias

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import IntArray
from quant.checks import as_matrix, name_some
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.kennard_stone import kennard_stone

Groups: TypeAlias = Sequence[Hashable] | np.ndarray[tuple[int, ...], np.dtype[np.generic]]
Seed: TypeAlias = int | Sequence[int]


def leave_one_out(n: int, groups: Groups | None = None) -> IntArray:
    """Every sample, or every group, is left out alone.

    Parameters
    ----------
    n : int
        Number of samples.
    groups : sequence of length n, optional
        Group of each sample.

    Returns
    -------
    array of shape (n,)
        Fold of each sample, from 0.

    Raises
    ------
    ParameterError
        A sample without a group.
    SampleMismatchError
        `groups` is not of length n.
    NotEnoughDataError
        Fewer than two samples or groups.
    """
    return _unit_numbers(n, groups)


def leave_one_group_out(groups: Groups) -> IntArray:
    """Every group is left out in turn, in the order of first appearance.

    Returns
    -------
    array of shape (n_samples,)
        Fold of each sample, from 0.

    Raises
    ------
    ParameterError
        A sample without a group.
    NotEnoughDataError
        Fewer than two groups.
    """
    return _unit_numbers(len(groups), groups)


def random_folds(n: int, k: int, seed: Seed, groups: Groups | None = None) -> IntArray:
    """Deal samples, or groups, to k folds at random; the folds' sizes differ by one at most.

    Parameters
    ----------
    n : int
        Number of samples.
    k : int
        Number of folds.
    seed : int or sequence of int
        The same seed gives the same folds; (seed, repeat) gives repeats of their own.
    groups : sequence of length n, optional
        Group of each sample. Sizes of folds are then counted in groups.

    Returns
    -------
    array of shape (n,)
        Fold of each sample, 0 ... k - 1.

    Raises
    ------
    ParameterError
        k below 2 or above the number of samples or groups; a sample without a group.
    SampleMismatchError
        `groups` is not of length n.
    NotEnoughDataError
        Fewer than two samples or groups.
    """
    units = _unit_numbers(n, groups)
    blocks = _blocks(_n_units(units), k)
    return np.random.default_rng(seed).permutation(blocks)[units]


def contiguous_blocks(n: int, k: int, groups: Groups | None = None) -> IntArray:
    """Divide samples, or groups, into k runs of neighbours, the first ones longer by one where k does not divide n.

    Parameters
    ----------
    n : int
        Number of samples.
    k : int
        Number of folds.
    groups : sequence of length n, optional
        Group of each sample.

    Returns
    -------
    array of shape (n,)
        Fold of each sample, 0 ... k - 1.

    Raises
    ------
    ParameterError
        k below 2 or above the number of samples or groups; a sample without a group.
    SampleMismatchError
        `groups` is not of length n.
    NotEnoughDataError
        Fewer than two samples or groups.
    """
    units = _unit_numbers(n, groups)
    return _blocks(_n_units(units), k)[units]


def interleaved(n: int, k: int, groups: Groups | None = None) -> IntArray:
    """Put sample i, or group i, into fold i mod k, counted from 0.

    Parameters
    ----------
    n : int
        Number of samples.
    k : int
        Number of folds.
    groups : sequence of length n, optional
        Group of each sample.

    Returns
    -------
    array of shape (n,)
        Fold of each sample, 0 ... k - 1.

    Raises
    ------
    ParameterError
        k below 2 or above the number of samples or groups; a sample without a group.
    SampleMismatchError
        `groups` is not of length n.
    NotEnoughDataError
        Fewer than two samples or groups.
    """
    units = _unit_numbers(n, groups)
    _check_folds(_n_units(units), k)
    return units % k


def random_split(n: int, fraction_out: float, seed: Seed, groups: Groups | None = None) -> tuple[IntArray, IntArray]:
    """Leave out a random part of the samples, or of the groups.

    Parameters
    ----------
    n : int
        Number of samples.
    fraction_out : float
        Part to leave out, inside (0, 1); rounded to whole samples or groups, at least one on either side.
    seed : int or sequence of int
        The same seed gives the same split.
    groups : sequence of length n, optional
        Group of each sample; the fraction is then one of groups.

    Returns
    -------
    kept, left_out : arrays of shapes (n_kept,) and (n_out,)
        Positions, ascending.

    Raises
    ------
    ParameterError
        A fraction outside (0, 1); a sample without a group.
    SampleMismatchError
        `groups` is not of length n.
    NotEnoughDataError
        Fewer than two samples or groups.
    """
    units = _unit_numbers(n, groups)
    n_units = _n_units(units)
    order = np.random.default_rng(seed).permutation(n_units)
    return _parts(units, order[: n_units - _n_out(n_units, fraction_out)])


def kennard_stone_split(X: ArrayLike, fraction_out: float, groups: Groups | None = None) -> tuple[IntArray, IntArray]:
    """Keep the samples that `kennard_stone` chooses first, and leave out the rest.

    What is left out lies inside the range of what is kept: an internal test that flatters, by construction.

    Parameters
    ----------
    X : array of shape (n_samples, n_points)
        Spectra or scores, one row a sample.
    fraction_out : float
        Part to leave out, inside (0, 1); rounded to whole samples or groups. At least one is left out and two are kept.
    groups : sequence of length n_samples, optional
        Group of each sample. Groups are then chosen by their mean spectra.

    Returns
    -------
    kept, left_out : arrays of shapes (n_kept,) and (n_out,)
        Positions, ascending.

    Raises
    ------
    ParameterError
        A fraction outside (0, 1); X not a table of finite numbers; a sample without a group.
    SampleMismatchError
        `groups` is not as long as X.
    NotEnoughDataError
        Fewer than three samples or groups.
    """
    spectra = as_matrix("X", X)
    units = _unit_numbers(spectra.shape[0], groups)
    n_units = _n_units(units)
    if n_units < 3:
        raise NotEnoughDataError(f"{n_units} samples or groups; Kennard-Stone needs three, two of them to keep.")
    means = np.zeros((n_units, spectra.shape[1]))
    np.add.at(means, units, spectra)
    means /= np.bincount(units)[:, np.newaxis]
    return _parts(units, kennard_stone(means, max(2, n_units - _n_out(n_units, fraction_out))))


def _unit_numbers(n: int, groups: Groups | None) -> IntArray:
    """Number of each sample's unit, itself or its group, in the order of first appearance."""
    units = np.arange(n, dtype=np.intp) if groups is None else _group_numbers(n, groups)
    if n < 1 or _n_units(units) < 2:
        raise NotEnoughDataError(
            f"{n} sample(s) {'' if groups is None else 'in one group '}cannot be divided; at least two "
            f"{'samples' if groups is None else 'groups'} are needed."
        )
    return units


def _group_numbers(n: int, groups: Groups) -> IntArray:
    names: list[Hashable] = groups.tolist() if isinstance(groups, np.ndarray) else list(groups)
    if len(names) != n:
        raise SampleMismatchError(f"{len(names)} group names for {n} samples; one each is expected.")
    nameless = [i for i, name in enumerate(names) if name is None or name == "" or name != name]  # NaN
    if nameless:
        raise ParameterError(
            f"{len(nameless)} sample(s) have no group, at position(s) {name_some(nameless)}; "
            "name a group for each, or divide without groups."
        )
    numbers: dict[Hashable, int] = {}
    return np.array([numbers.setdefault(name, len(numbers)) for name in names], dtype=np.intp)


def _n_units(units: IntArray) -> int:
    return int(units.max()) + 1


def _check_folds(n_units: int, k: int) -> None:
    if not 2 <= k <= n_units:
        raise ParameterError(f"{k} folds of {n_units} samples or groups; expected from 2 folds to {n_units}.")


def _blocks(n_units: int, k: int) -> IntArray:
    _check_folds(n_units, k)
    parts = np.array_split(np.arange(n_units), k)
    return np.repeat(np.arange(k, dtype=np.intp), [part.size for part in parts])


def _n_out(n_units: int, fraction_out: float) -> int:
    if not 0 < fraction_out < 1:
        raise ParameterError(f"fraction_out = {fraction_out}; expected a part inside (0, 1), such as 0.25.")
    return min(max(int(np.floor(fraction_out * n_units + 0.5)), 1), n_units - 1)


def _parts(units: IntArray, kept_units: IntArray) -> tuple[IntArray, IntArray]:
    kept = np.isin(units, kept_units)
    return np.flatnonzero(kept), np.flatnonzero(~kept)
