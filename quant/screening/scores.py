"""RMSECV of many selections of ranges behind one preprocessing, from Gram matrices."""

from collections.abc import Callable, Iterable, Sequence
from functools import partial

import numpy as np

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.preprocessing.chain import apply_chain, chain_learns, fit_chain
from quant.regression.fast_cross_validation_columns import fold_columns
from quant.regression.fast_cross_validation_gram import Gram, centred_gram, gram_scores
from quant.regression.fast_cross_validation_many import cross_validate_many
from quant.regression.fast_cross_validation_windows import WindowGrams
from quant.screening.first_steps import FirstSteps
from quant.screening.pieces import EVERYTHING, Kept
from quant.screening.problem import Candidate, Problem, measure
from quant.statistics.quantiles import f_quantile

ACCURACY = 1e-6  # suits a ranking whose leaders are scored again: see gram_scores
BLOCK_BYTES = 2**26  # of left-out squared errors and Gram matrices kept at a time where steps learn
STACK_BYTES = 2**23  # of Gram matrices of several folds worked on at a time where steps learn
F_ALPHA = 0.25  # as in statistics.factor_rules.f_ratio


class PieceGrams:
    """Gram matrices of any selection of pieces of the spectra.

    Parameters
    ----------
    X : array of shape (n, k)
        Behind the preprocessing. Their mean is subtracted here, in place.
    pieces : sequence of slice
        Of points.
    block : int, optional
        Points a piece, where only windows are asked for: their sums are differences of running sums.
    """

    def __init__(self, X: FloatArray, pieces: Sequence[slice], block: int | None) -> None:
        self.all = centred_gram(X)
        self.windows = WindowGrams(X, block) if block is not None else None
        self.parts = [X[:, piece] @ X[:, piece].T for piece in pieces] if self.windows is None else []

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
    first : FirstSteps
        Of the problem.
    """

    def __init__(self, problem: Problem, chain: int, first: FirstSteps) -> None:
        self.problem, self.chain = problem, chain
        layout = problem.layout(chain)
        self.pieces, self.n_points = layout.pieces, layout.axis.size
        self.block = problem.table.ranges.block if problem.table.ranges else None
        self.most = problem.most_factors(self.n_points)
        self.spectra = first.behind(chain)
        self.learning = layout.steps[first.count(chain) :]  # and what comes behind
        if not self.learning:
            self.grams = PieceGrams(self.spectra, self.pieces, self.block)  # overwrites the spectra

    def candidates(self, selections: Sequence[Kept]) -> list[Candidate]:
        """Return the selections with their scores; those that cannot carry the factors asked for are left out."""
        rmsecv, se = self.errors(selections)
        return scored(self.problem, [(self.chain, kept) for kept in selections], rmsecv, se)

    def errors(self, selections: Sequence[Kept]) -> tuple[FloatArray, FloatArray]:
        """Return RMSECV and its standard error, each of shape (selections, counts). [unit of the analyte]"""
        if not self.learning:
            return gram_errors(self.problem, (partial(self.grams.gram, kept) for kept in selections), self.most)
        n = self.spectra.shape[0]
        size = max(1, BLOCK_BYTES // (8 * (n**2 + 3 * n * (self.most + 1))))
        blocks = [selections[first : first + size] for first in range(0, len(selections), size)]
        squared = np.concatenate([self._refitted(block) for block in blocks])
        rmsecv = np.sqrt(squared.mean(axis=-1))
        spread = squared.std(axis=-1, ddof=1) / np.sqrt(squared.shape[-1])
        return rmsecv, spread / (2 * np.where(rmsecv > 0, rmsecv, 1.0))

    def _refitted(self, selections: Sequence[Kept]) -> FloatArray:
        """Squared errors averaged over repeats, shape (selections, counts, samples), steps fitted in every fold."""
        samples, n = self.problem.samples, self.spectra.shape[0]
        y, labels = by_spectrum(self.problem)
        squared = np.zeros((len(selections), self.most + 1, len(samples)))
        columns = fold_columns(labels, n)
        for block in columns.blocks(8 * n**2 * len(selections), STACK_BYTES):
            some = columns.take(block)
            stack, sizes = self._fold_grams(some.training, y, selections)
            found = gram_scores(stack, some, y[None], self.most, samples.weights, ACCURACY, sizes)
            every = found.predicted()
            for number, (rows, real) in enumerate(zip(some.asked, some.real, strict=True)):
                index, place = np.unique(samples.sample_index[rows[real]], return_inverse=True)
                averaging = (place[:, None] == np.arange(index.size)) / np.bincount(place)
                error = every[:, number][..., real] @ averaging - self.problem.values[index]
                squared[..., index] += error**2 / len(labels)
        return squared

    def _fold_grams(
        self, training: BoolArray, y: FloatArray, selections: Sequence[Kept]
    ) -> tuple[FloatArray, FloatArray]:
        """Gram matrices of each selection in each fold, shape (selections, folds, n, n), and their sizes."""
        weights, (folds, n) = self.problem.samples.weights, training.shape
        stack, sizes = np.empty((len(selections), folds, n, n)), np.empty((len(selections), folds))
        for fold, mask in enumerate(training):
            fitted, _ = fit_chain(self.learning, self.spectra[mask], y[mask], weights[mask])
            grams = PieceGrams(apply_chain(fitted, self.spectra), self.pieces, self.block)
            for number, kept in enumerate(selections):
                one = grams.gram(kept)
                stack[number, fold] = one.values if isinstance(one, Gram) else one
                sizes[number, fold] = one.size if isinstance(one, Gram) else np.trace(one)
        return stack, sizes


def score_whole(problem: Problem, chains: Sequence[int], first: FirstSteps) -> list[Candidate]:
    """Score all points behind each of some preprocessings; those that do not learn in one batch."""
    found, batches = [], dict[int, list[int]]()
    for chain in chains:
        layout = problem.layout(chain)
        if chain_learns(layout.steps):
            found += ChainScores(problem, chain, first).candidates([EVERYTHING])
        else:
            batches.setdefault(problem.most_factors(layout.axis.size), []).append(chain)
    for most, batch in batches.items():
        rmsecv, se = gram_errors(problem, (partial(whole_gram, first, chain) for chain in batch), most)
        found += scored(problem, [(chain, EVERYTHING) for chain in batch], rmsecv, se)
    return found


def whole_gram(first: FirstSteps, chain: int) -> FloatArray:
    """Return the Gram matrix of all points behind a preprocessing that does not learn. [(unit of X)²]"""
    return centred_gram(first.behind(chain))


def by_spectrum(problem: Problem) -> tuple[FloatArray, list[IntArray]]:
    """Return the reference value of each spectrum, and its fold label in each repeat, arrays of shape (n_spectra,)."""
    index = problem.samples.sample_index
    return problem.values[index], [labels[index] for labels in problem.folds.repeats]


def gram_errors(
    problem: Problem, grams: Iterable[Callable[[], FloatArray | Gram]], most: int
) -> tuple[FloatArray, FloatArray]:
    """Return RMSECV and its standard error for each Gram matrix, shape (matrices, counts). [unit of the analyte]"""
    samples, (y, labels) = problem.samples, by_spectrum(problem)
    found = cross_validate_many(grams, y, labels, most, samples.weights, samples.sample_index, accuracy=ACCURACY)
    return found.rmsecv[:, 0], found.rmsecv_se[:, 0]


def scored(problem: Problem, places: Sequence[tuple[int, Kept]], rmsecv: FloatArray, se: FloatArray) -> list[Candidate]:
    """Return candidates, each a preprocessing with what it keeps; without those that cannot carry the factors."""
    rule, n = problem.recipe.regression.factors, len(problem.samples)
    found = []
    for (chain, kept), errors, spread in zip(places, rmsecv, se, strict=True):
        n_points, n_ranges, n_steps = measure(problem, chain, kept)
        if isinstance(rule, int) and rule > n_points:
            continue
        factors = choose(errors, spread, rule, n)
        found.append(
            Candidate(
                chain=chain,
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
