"""Gram matrices of any window of the spectra from running sums over blocks of points."""

from collections.abc import Iterator

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix
from quant.errors import ParameterError
from quant.regression.fast_cross_validation_gram import Gram


class WindowGrams:
    """Running sums P_j = Σ X_i·X_i' over the first j blocks of points: the Gram matrix of a window is P_stop − P_start.

    The subtraction leaves rounding error of the size of P_stop in the Gram matrix of a narrow or weak window. The
    `size` of a `Gram` tells the guard of `cross_validate_many`, which stops early rather than follow noise. Score
    leading windows again by refitting (`fast_left_out`): that keeps the digits, and the factors, that are lost here.

    Parameters
    ----------
    X : array of shape (n, k)
        Spectra behind row-wise preprocessing that was applied before cutting. Their mean is subtracted here.
    block : int
        Points a block; the last block may be shorter.

    Attributes
    ----------
    sums : array of shape (blocks + 1, n, n)
        (k/block + 1)·n² doubles. [(unit of X)²]
    traces : array of shape (blocks + 1,)
        Of the sums. [(unit of X)²]
    """

    def __init__(self, X: ArrayLike, block: int) -> None:
        spectra = as_matrix("X", X)
        n, k = spectra.shape
        if isinstance(block, bool) or not isinstance(block, int | np.integer) or not 1 <= block <= k:
            raise ParameterError(f"block = {block!r}; expected a whole number of points from 1 to {k}.")
        centred = spectra - spectra.mean(axis=0)
        self.block, self.n_points = int(block), k
        starts = range(0, k, self.block)
        self.sums: FloatArray = np.zeros((len(starts) + 1, n, n))
        for number, start in enumerate(starts):
            part = centred[:, start : start + self.block]
            np.add(self.sums[number], part @ part.T, out=self.sums[number + 1])
        self.traces: FloatArray = np.einsum("jii->j", self.sums)

    def __len__(self) -> int:
        return len(self.sums) - 1

    def gram(self, start: int, stop: int) -> Gram:
        """Return the Gram matrix of blocks start, start + 1, ... stop − 1.

        Raises
        ------
        ParameterError
            No such blocks.
        """
        if not 0 <= start < stop <= len(self):
            raise ParameterError(f"blocks {start} to {stop} of {len(self)}; expected 0 ≤ start < stop ≤ {len(self)}.")
        return Gram(self.sums[stop] - self.sums[start], float(self.traces[stop]))

    def points(self, start: int, stop: int) -> slice:
        """Return the points of blocks start ... stop − 1."""
        return slice(start * self.block, min(stop * self.block, self.n_points))

    def every(self) -> Iterator[tuple[int, int]]:
        """Yield (start, stop) of every window of every width, in the order of starts, narrow ones first."""
        for start in range(len(self)):
            for stop in range(start + 1, len(self) + 1):
                yield start, stop
