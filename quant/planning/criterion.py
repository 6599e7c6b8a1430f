"""What makes a design good: standards far apart, components that do not rise together, ranges spanned.

The score of a design, to be made small, is

    ln(E)/(2q) + 10·Σ max(0, |r| − 0.05) + 10·Σ missing + 2·Σ uneven,   E = Σ (d² + ε)^(−q) over pairs,   q = 5.

The first term is the logarithm of the φ_p criterion of Morris and Mitchell (p = 2q = 10): a tenth less means distances
about 10 % larger. Distances d are Euclidean with every range scaled to 1; ε keeps equal mixtures finite. The second
sums over pairs of components, the others over components: the share of the reachable range that is not spanned, and
the mean distance of the sorted values from evenly spaced ones (else inequalities would drive mixtures to the borders).
"""

from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray, IntArray

GOAL = 0.05  # correlations below this are left alone: space filling matters more
WEIGHT = 10.0
_UNEVEN = 0.2  # relative to WEIGHT
_EPSILON = 1e-3  # squared distance, (3 % of a range)²; much less would drown all others in one pair's rounding


def energy(squared: FloatArray) -> FloatArray:
    """Return (d² + ε)^(−5) of squared distances; the infinite distance of a point to itself gives 0."""
    inverse = 1.0 / (squared + _EPSILON)
    twice = inverse * inverse
    return np.asarray(twice * twice * inverse)


def squared_distances(a: FloatArray, b: FloatArray) -> FloatArray:
    """Squared Euclidean distances between rows, shape (n_a, n_b)."""
    difference = a[:, None, :] - b[None, :, :]
    return np.asarray(np.einsum("ijk,ijk->ij", difference, difference))


def correlations(points: FloatArray) -> FloatArray:
    """Pearson correlations between columns, shape (k, k); 0 with a column that does not vary."""
    centred = points - points.mean(axis=0)
    size = np.linalg.norm(centred, axis=0)
    size = np.where(size > 1e-12, size, np.inf)
    matrix = np.asarray(centred.T @ centred / np.outer(size, size))
    np.fill_diagonal(matrix, 1.0)
    return matrix


def largest_correlation(points: FloatArray) -> float:
    """Largest absolute correlation between two columns; 0 with a single column."""
    matrix = np.abs(correlations(points))
    np.fill_diagonal(matrix, 0.0)
    return float(matrix.max(initial=0.0))


@dataclass(eq=False)
class State:
    """A design during the search, with all that changing one value needs.

    Parameters
    ----------
    points : array of shape (n, k)
        Scaled mixtures, changed in place.
    fixed : array of shape (m, k)
        Mixtures to keep away from that do not change.
    targets : array of shape (n, k), optional
        Evenly spaced values of each component over the range to be spanned, sorted; None where the moves cannot lose
        them.
    """

    points: FloatArray
    fixed: FloatArray
    targets: FloatArray | None = None

    def __post_init__(self) -> None:
        self.squared = squared_distances(self.points, self.points)
        np.fill_diagonal(self.squared, np.inf)
        self.squared_fixed = squared_distances(self.points, self.fixed)
        self.total = self._energy()
        self.excess = self._excess_of_columns()

    @property
    def score(self) -> float:
        """The score, to be made small."""
        spread = sum(self._unspread(self.points[None, :, c], c)[0] for c in range(self.points.shape[1]))
        return float(np.log(self.total) / 10 + WEIGHT * (np.triu(self.excess, 1).sum() + spread))

    def swap_changes(self, i: int, c: int, partners: IntArray) -> tuple[FloatArray, FloatArray]:
        """Energy and correlation excess if row `i` exchanges its value in column `c` with each of some rows.

        Returns
        -------
        tuple of arrays of shape (n_partners,)
            Total energy, and sum of the excess correlations of column `c`.
        """
        j, column = partners, self.points[:, c]
        own, theirs = column[i], column[j]
        to_own, to_theirs = (own - column) ** 2, (theirs[:, None] - column) ** 2  # (n,), (p, n)
        before = energy(self.squared[i]) + energy(self.squared[j])  # (p, n)
        row_i = np.maximum(self.squared[i] - to_own + to_theirs, 0.0)
        row_j = np.maximum(self.squared[j] - to_theirs + to_own, 0.0)
        change = energy(row_i) + energy(row_j) - before
        change[:, i] = 0.0  # the distance between the two stays
        change[np.arange(j.size), j] = 0.0
        total = self.total + change.sum(axis=1)
        if self.fixed.size:
            away = self.fixed[:, c]
            from_own, from_theirs = (own - away) ** 2, (theirs[:, None] - away) ** 2
            total += (
                energy(np.maximum(self.squared_fixed[i] - from_own + from_theirs, 0.0))
                + energy(np.maximum(self.squared_fixed[j] - from_theirs + from_own, 0.0))
                - energy(self.squared_fixed[i])
                - energy(self.squared_fixed[j])
            ).sum(axis=1)
        centred = self.points - self.points.mean(axis=0)
        products = centred[:, c] @ centred + (theirs - own)[:, None] * (centred[i] - centred[j])  # (p, k)
        size = np.linalg.norm(centred, axis=0)
        return total, _excess(products, size[c] * size, c)

    def value_changes(self, i: int, c: int, values: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Energy, and penalty of column `c`, if row `i` took each of some values there; both of shape (n_values,)."""
        column = self.points[:, c]
        moved = self.squared[i] - (column[i] - column) ** 2 + (values[:, None] - column) ** 2  # (v, n)
        total = self.total + (energy(np.maximum(moved, 0.0)) - energy(self.squared[i])).sum(axis=1)
        if self.fixed.size:
            away = self.fixed[:, c]
            near = self.squared_fixed[i] - (column[i] - away) ** 2 + (values[:, None] - away) ** 2
            total += (energy(np.maximum(near, 0.0)) - energy(self.squared_fixed[i])).sum(axis=1)
        columns = np.repeat(column[None, :], values.size, axis=0)
        columns[:, i] = values
        centred = self.points - self.points.mean(axis=0)
        shifted = columns - columns.mean(axis=1, keepdims=True)
        size = np.linalg.norm(shifted, axis=1)[:, None] * np.linalg.norm(centred, axis=0)
        return total, _excess(shifted @ centred, size, c) + self._unspread(columns, c)

    def column_penalty(self, c: int) -> float:
        """Excess correlations of column `c` with the others, and how badly it spans and fills its range."""
        return float(self.excess[c].sum() + self._unspread(self.points[None, :, c], c)[0])

    def update(self, rows: list[int]) -> None:
        """Follow a change of some rows of `points`."""
        for i in rows:
            distances = squared_distances(self.points[[i]], self.points)[0]
            distances[i] = np.inf
            self.squared[i], self.squared[:, i] = distances, distances
            self.squared_fixed[i] = squared_distances(self.points[[i]], self.fixed)[0]
        self.total = self._energy()  # not from the change: rounding would gather
        self.excess = self._excess_of_columns()

    def _energy(self) -> float:
        return float(energy(self.squared).sum() / 2 + energy(self.squared_fixed).sum())

    def _excess_of_columns(self) -> FloatArray:
        excess = np.maximum(np.abs(correlations(self.points)) - GOAL, 0.0)
        np.fill_diagonal(excess, 0.0)
        return np.asarray(excess)

    def _unspread(self, columns: FloatArray, c: int) -> FloatArray:
        """Missing and uneven range for versions of column `c`, one a row."""
        if self.targets is None:
            return np.zeros(len(columns))
        target, ordered = self.targets[:, c], np.sort(columns, axis=1)
        missing = np.maximum(ordered[:, 0] - target[0], 0.0) + np.maximum(target[-1] - ordered[:, -1], 0.0)
        return np.asarray(missing + _UNEVEN * np.abs(ordered - target).mean(axis=1))


def _excess(products: FloatArray, sizes: FloatArray, c: int) -> FloatArray:
    """Sum of the excess correlations of column c with the others, one for each row of scalar products."""
    with np.errstate(invalid="ignore", divide="ignore"):
        size = np.where(sizes > 1e-12, np.abs(products) / sizes, 0.0)
    excess = np.maximum(size - GOAL, 0.0)
    excess[:, c] = 0.0
    return np.asarray(excess.sum(axis=1))
