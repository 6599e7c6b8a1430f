"""RMSECV of many selections of ranges behind one preprocessing, from Gram matrices."""

from collections.abc import Iterator, Sequence
from functools import partial

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.cross_validation import check_missing_points
from quant.preprocessing.chain import apply_chain, chain_learns, fit_chain
from quant.recipe.pipeline import build_steps
from quant.regression.fast_cross_validation_columns import fold_columns
from quant.regression.fast_cross_validation_gram import Gram, gram_scores
from quant.regression.fast_cross_validation_many import cross_validate_many
from quant.regression.fast_cross_validation_windows import WindowGrams
from quant.screening.pieces import Kept
from quant.screening.problem import Candidate, Problem, measure
from quant.statistics.quantiles import f_quantile

ACCURACY = 1e-6  # suits a ranking whose leaders are scored again: see gram_scores
BLOCK_BYTES = 2**26  # of left-out squared errors and Gram matrices kept at a time where steps learn
F_ALPHA = 0.25  # as in statistics.factor_rules.f_ratio


class PieceGrams:
    """Gram matrices of any selection of pieces of the spectra.

    Parameters
    ----------
    X : array of shape (n, k)
        Behind the preprocessing. Their mean is subtracted here.
    pieces : sequence of slice
        Of points.
    block : int, optional
        Points a piece, where only windows are asked for: their sums are differences of running sums.
    """

    def __init__(self, X: FloatArray, pieces: Sequence[slice], block: int | None) -> None:
        centred = X - X.mean(axis=0)
        self.windows = WindowGrams(centred, block) if block is not None else None
        self.all: FloatArray = centred @ centred.T
        self.parts: list[FloatArray] = []
        if self.windows is None:
            self.parts = [centred[:, piece] @ centred[:, piece].T for piece in pieces]

    def gram(self, kept: Kept) -> FloatArray | Gram:
        """Return the Gram matrix of what is kept. [(unit of X)²]"""
        if not kept:
            return self.all
        if self.windows is not None:
            return self.windows.gram(kept[0], kept[-1] + 1)
        total = self.parts[kept[0]].copy()
        for number in kept[1:]:
            total += self.parts[number]
        return total


class ChainScores:
    """Scores selections of ranges behind one preprocessing; what they share is worked out once.

    Where a step learns from other spectra, it is fitted again in every fold, and every fold has Gram matrices of its
    own; else one set of them serves all folds.

    Parameters
    ----------
    problem : Problem
    chain : int
        Number of the preprocessing.
    """

    def __init__(self, problem: Problem, chain: int) -> None:
        samples, spectra = problem.samples, problem.samples.spectra
        self.problem, self.chain = problem, chain
        recipe = problem.chain_recipe(chain)
        self.steps = build_steps(recipe, spectra.axis, spectra.quantity)
        check_missing_points(samples, self.steps)
        axis, self.pieces = problem.layout(chain)
        self.n_points = axis.size
        self.block = problem.table.ranges.block if problem.table.ranges else None
        self.y = problem.values[samples.sample_index]
        self.labels = [labels[samples.sample_index] for labels in problem.folds.repeats]
        self.most = problem.most_factors(self.n_points)
        self.learns = chain_learns(self.steps)
        if not self.learns:
            processed = fit_chain(self.steps, spectra.values, self.y, samples.weights)[1]
            self.grams = PieceGrams(processed, self.pieces, self.block)

    def candidates(self, selections: Sequence[Kept]) -> list[Candidate]:
        """Return the selections with their scores; those that cannot carry the factors asked for are left out."""
        rmsecv, se = self.errors(selections)
        rule, n = self.problem.recipe.regression.factors, len(self.problem.samples)
        found = []
        for kept, errors, spread in zip(selections, rmsecv, se, strict=True):
            n_points, n_ranges, n_steps = measure(self.problem, self.chain, kept)
            if isinstance(rule, int) and rule > n_points:
                continue
            factors = choose(errors, spread, rule, n)
            found.append(
                Candidate(
                    chain=self.chain,
                    kept=kept,
                    n_points=n_points,
                    n_ranges=n_ranges,
                    n_steps=n_steps,
                    factors=factors,
                    rmsecv=float(errors[factors]),
                    rmsecv_se=float(spread[factors]),
                )
            )
        return found

    def errors(self, selections: Sequence[Kept]) -> tuple[FloatArray, FloatArray]:
        """Return RMSECV and its standard error, each of shape (selections, counts). [unit of the analyte]"""
        if self.learns:
            size = max(1, BLOCK_BYTES // (8 * (self.y.size**2 + 3 * self.y.size * (self.most + 1))))
            blocks = [selections[first : first + size] for first in range(0, len(selections), size)]
            squared = np.concatenate([self._refitted(block) for block in blocks])
            rmsecv = np.sqrt(squared.mean(axis=-1))
            spread = squared.std(axis=-1, ddof=1) / np.sqrt(squared.shape[-1])
            return rmsecv, spread / (2 * np.where(rmsecv > 0, rmsecv, 1.0))
        samples = self.problem.samples
        found = cross_validate_many(
            (partial(self.grams.gram, kept) for kept in selections),
            self.y,
            self.labels,
            self.most,
            samples.weights,
            samples.sample_index,
            accuracy=ACCURACY,
        )
        return found.rmsecv[:, 0], found.rmsecv_se[:, 0]

    def _refitted(self, selections: Sequence[Kept]) -> FloatArray:
        """Squared errors averaged over repeats, shape (selections, counts, samples), steps fitted in every fold."""
        samples = self.problem.samples
        squared = np.zeros((len(selections), self.most + 1, len(samples)))
        columns = fold_columns(self.labels, self.y.size)
        for number, grams in enumerate(self._fold_grams(columns.training)):
            stack, sizes = _stacked([grams.gram(kept) for kept in selections])
            one = columns.take(slice(number, number + 1))
            found = gram_scores(stack, one, self.y[None], self.most, samples.weights, ACCURACY, sizes)
            rows = one.asked[0][one.real[0]]
            predicted = found.predicted()[:, 0][..., one.real[0]]
            index, place = np.unique(samples.sample_index[rows], return_inverse=True)
            averaging = (place[:, None] == np.arange(index.size)) / np.bincount(place)
            squared[..., index] += (predicted @ averaging - self.problem.values[index]) ** 2 / len(self.labels)
        return squared

    def _fold_grams(self, training: np.ndarray[tuple[int, int], np.dtype[np.bool_]]) -> Iterator[PieceGrams]:
        spectra, weights = self.problem.samples.spectra.values, self.problem.samples.weights
        for mask in training:
            fitted, _ = fit_chain(self.steps, spectra[mask], self.y[mask], weights[mask])
            yield PieceGrams(apply_chain(fitted, spectra), self.pieces, self.block)


def _stacked(grams: Sequence[FloatArray | Gram]) -> tuple[FloatArray, FloatArray]:
    stack = np.stack([gram.values if isinstance(gram, Gram) else gram for gram in grams])
    sizes = [gram.size if isinstance(gram, Gram) else float(np.trace(gram)) for gram in grams]
    return stack, np.array(sizes)


def choose(rmsecv: FloatArray, se: FloatArray, rule: str | int, n_samples: int) -> int:
    """Return the number of factors by a rule, from RMSECV and standard error alone; see `statistics.factor_rules`.

    Parameters
    ----------
    rmsecv, se : array of shape (counts,)
        For 0, 1, ... factors. [unit of the analyte]
    rule : {"one_standard_error", "minimum", "f_ratio"} or int
    n_samples : int
    """
    if isinstance(rule, int):
        return rule
    squares = rmsecv**2
    best = 1 + int(np.argmin(squares[1:]))
    limit = squares[best]
    if rule == "one_standard_error":
        limit += 2 * rmsecv[best] * se[best]  # standard error of the mean square
    elif rule == "f_ratio":
        limit *= f_quantile(1 - F_ALPHA, n_samples, n_samples)
    return 1 + int(np.argmax(squares[1:] <= limit))
