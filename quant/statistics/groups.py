"""Groups of samples that share something."""

from collections.abc import Hashable, Iterable, Sequence

import numpy as np

from quant.arrays import IntArray


def connected_groups(marks: Sequence[Iterable[Hashable]]) -> IntArray:
    """Put samples that share a mark into one group, directly or through others.

    Parameters
    ----------
    marks : sequence of n_samples collections
        What each sample carries: a batch, a spectrum ...

    Returns
    -------
    array of int, shape (n_samples,)
        Group of each sample, numbered in the order of first appearance.

    Examples
    --------
    >>> connected_groups([["a"], ["b"], ["c", "a"], ["b"], ["d"], ["d", "c"]]).tolist()
    [0, 1, 0, 1, 0, 0]
    """
    parent = list(range(len(marks)))
    owner: dict[Hashable, int] = {}
    for sample, own in enumerate(marks):
        for mark in own:
            one, other = _root(parent, sample), _root(parent, owner.setdefault(mark, sample))
            parent[max(one, other)] = min(one, other)
    roots = [_root(parent, sample) for sample in range(len(marks))]
    numbers: dict[int, int] = {}
    return np.array([numbers.setdefault(root, len(numbers)) for root in roots], dtype=np.intp)


def _root(parent: list[int], sample: int) -> int:
    while parent[sample] != sample:
        parent[sample] = parent[parent[sample]]  # halves the path for the next to ask
        sample = parent[sample]
    return sample
