"""RMSECV of many candidates, each a Gram matrix: in blocks, on all cores, in bounded memory."""

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import chain, islice
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray, IntArray
from quant.checks import as_matrix
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.estimator.input import check_weights
from quant.regression.fast_cross_validation_columns import Columns, check_factors, check_samples, fold_columns
from quant.regression.fast_cross_validation_gram import ACCURACY, Gram, gram_scores
from quant.regression.fast_cross_validation_threads import keep_freed_memory, one_blas_thread, scratch

BLOCK_BYTES = 2**23  # of Gram matrices and scores of a block; measured best at n = 100 with 10 folds: 36 candidates

Candidate: TypeAlias = FloatArray | Gram | Callable[[], FloatArray | Gram]


@dataclass(frozen=True, kw_only=True)
class ManyErrors:
    """Cross-validation errors of candidates; counts are 0, 1, ... n_factors.

    Attributes
    ----------
    rmsecv, rmsecv_se : array of shape (candidates, responses, counts)
        Over samples, of squared errors averaged over repeats; standard error as in a full cross-validation. [unit of y]
    stopped : array of shape (candidates, responses, folds)
        Number of factors found in each fold; beyond it the fold's predictions stay those of its last factor.
    predicted : array of shape (candidates, responses, repeats, counts, samples), or None
        Only where asked for. [unit of y]
    """

    rmsecv: FloatArray
    rmsecv_se: FloatArray
    stopped: IntArray
    predicted: FloatArray | None


def cross_validate_many(
    candidates: Iterable[Candidate],
    y: ArrayLike,
    fold_labels: Sequence[ArrayLike],
    n_factors: int,
    weight: ArrayLike | None = None,
    sample_index: ArrayLike | None = None,
    *,
    accuracy: float = ACCURACY,
    n_jobs: int = 1,
    keep_predicted: bool = False,
) -> ManyErrors:
    """Cross-validate PLS for every candidate; mean-centred in every fold, never column-scaled.

    Parameters
    ----------
    candidates : iterable
        Of Gram matrices of shape (n, n), plain or as `Gram`, or of functions without arguments that return one: then
        the worker forms it, and all cores are of use. Taken only as far as workers are free, so that memory does not
        grow with their number. Subtract the mean spectrum before forming them. [(unit of X)²]
    y : array of shape (n,) or (responses, n)
        Reference values of each spectrum; more rows for more analytes, or for permutations.
    fold_labels : sequence of arrays of shape (n,)
        One a repeat: equal whole numbers, 0 or more, for spectra left out together.
    n_factors : int
        The most factors; those that a candidate does not carry are left out, see `ManyErrors.stopped`.
    weight, sample_index : arrays of shape (n,), optional
        As in `fast_left_out`.
    accuracy : float
        Share of a score that may be rounding error before a fold stops; see `gram_scores`. 1e-6 suits a ranking that
        is rescored.
    n_jobs : int
        Workers, each with one thread of linear algebra; −1: one a core. Through joblib: processes for functions,
        threads for matrices, or a backend chosen outside.
    keep_predicted : bool
        Whether to return left-out predictions: these do grow with the number of candidates.

    Returns
    -------
    ManyErrors
        The same for any number of workers.

    Raises
    ------
    ParameterError
        Arguments that cannot be used, no candidate, or a Gram matrix of another shape.
    SampleMismatchError
        Lengths that differ, or a sample in two folds.
    """
    blocks = list(
        each_block(
            candidates,
            y,
            fold_labels,
            n_factors,
            weight,
            sample_index,
            accuracy=accuracy,
            n_jobs=n_jobs,
            keep_predicted=keep_predicted,
        )
    )
    if not blocks:
        raise ParameterError("There is no candidate; give at least one Gram matrix.")
    return ManyErrors(
        rmsecv=np.concatenate([block.rmsecv for block in blocks]),
        rmsecv_se=np.concatenate([block.rmsecv_se for block in blocks]),
        stopped=np.concatenate([block.stopped for block in blocks]),
        predicted=np.concatenate([block.predicted for block in blocks]) if keep_predicted else None,
    )


def each_block(
    candidates: Iterable[Candidate],
    y: ArrayLike,
    fold_labels: Sequence[ArrayLike],
    n_factors: int,
    weight: ArrayLike | None = None,
    sample_index: ArrayLike | None = None,
    *,
    accuracy: float = ACCURACY,
    n_jobs: int = 1,
    keep_predicted: bool = False,
) -> Iterator[ManyErrors]:
    """Yield the errors of one block of candidates after the other, in order: for progress, and to keep what is done.

    Parameters, and what is raised, are those of `cross_validate_many`.
    """
    plan = _plan(y, fold_labels, n_factors, weight, sample_index, accuracy, keep_predicted=keep_predicted)
    blocks = _in_blocks(candidates, plan.block_size())
    if n_jobs == 1:
        yield from (_errors(block, plan) for block in blocks)
        return
    from joblib import Parallel, delayed  # deferred: start-up

    keep_freed_memory()
    # Threads wait for the interpreter's lock between their many small steps, so that two do little more than one. But
    # matrices cost as much to send to another process. Two blocks a worker are out at once, however busy the machine.
    first = next(blocks, [])
    prefer = "processes" if first and callable(first[0]) else "threads"
    parallel = Parallel(n_jobs=n_jobs, prefer=prefer, return_as="generator", pre_dispatch="2*n_jobs", batch_size=1)
    with one_blas_thread():
        yield from parallel(delayed(_errors)(block, plan) for block in chain([first], blocks) if block)


@dataclass(frozen=True, kw_only=True)
class _Plan:
    """All that is common to the candidates; of P responses and F folds, columns are P times F."""

    columns: Columns  # F
    y: FloatArray  # (P, n)
    n_factors: int
    weight: FloatArray | None
    samples: IntArray | None  # (n,); None: each spectrum is a sample
    places: IntArray  # (repeats, n): where among folds times slots the prediction of a row is
    accuracy: float
    keep_predicted: bool

    def block_size(self) -> int:
        responses, n = self.y.shape
        scores = responses * len(self.columns) * (self.n_factors + 4) * n
        return max(1, BLOCK_BYTES // int(8 * (n * n + scores)))


def _plan(
    y: ArrayLike,
    fold_labels: Sequence[ArrayLike],
    n_factors: int,
    weight: ArrayLike | None,
    sample_index: ArrayLike | None,
    accuracy: float,
    *,
    keep_predicted: bool,
) -> _Plan:
    values = as_matrix("y", np.atleast_2d(np.asarray(y, dtype=np.float64)))
    n = values.shape[1]
    samples = check_samples(sample_index, fold_labels, n)
    if samples.max() < 1:
        raise NotEnoughDataError(f"{samples.max() + 1} sample(s); at least 2 are needed.")
    if not 0 < accuracy < 1:
        raise ParameterError(f"accuracy = {accuracy!r}; expected a share between 0 and 1, such as 1e-8.")
    columns = fold_columns(fold_labels, n)
    weights = check_weights(weight, n)
    places = np.empty((int(columns.repeat[-1]) + 1, n), dtype=np.intp)
    column, slot = np.nonzero(columns.real)
    places[columns.repeat[column], columns.asked[column, slot]] = column * columns.asked.shape[1] + slot
    return _Plan(
        columns=columns,
        y=values,
        n_factors=check_factors(n_factors, columns, weights, n),
        weight=None if (weights == 1.0).all() else weights,
        samples=None if sample_index is None else samples,
        places=places,
        accuracy=accuracy,
        keep_predicted=keep_predicted,
    )


def _in_blocks(candidates: Iterable[Candidate], size: int) -> Iterator[list[Candidate]]:
    source = iter(candidates)
    while block := list(islice(source, size)):
        yield block


def _errors(block: Sequence[Candidate], plan: _Plan) -> ManyErrors:
    keep_freed_memory()
    with one_blas_thread():
        responses, n = plan.y.shape
        F, counts = len(plan.columns), plan.n_factors + 1
        grams, sizes = _stack(block, n)
        c = len(block)
        columns = plan.columns.take(np.tile(np.arange(F), responses)) if responses > 1 else plan.columns
        targets = np.repeat(plan.y, F, axis=0) if responses > 1 else plan.y
        found = gram_scores(grams, columns, targets, plan.n_factors, plan.weight, plan.accuracy, sizes)
        predicted = np.moveaxis(found.predicted(), 2, 0).reshape(counts, c, responses, -1)  # as it lies in memory
        predicted = predicted.take(plan.places, axis=-1)  # (counts, c, responses, repeats, n)
        reference = plan.y
        if plan.samples is not None:
            predicted, reference = predicted @ _averaging(plan.samples), plan.y @ _averaging(plan.samples)
        error = predicted - reference[:, None]
        squared = np.square(error, out=error).mean(axis=-2)
        mean = squared.mean(axis=-1)
        squared -= mean[..., None]
        spread = np.sqrt(np.vecdot(squared, squared) / (squared.shape[-1] - 1) / squared.shape[-1])
        rmsecv = np.sqrt(mean)
        return ManyErrors(
            rmsecv=np.moveaxis(rmsecv, 0, -1),
            rmsecv_se=np.moveaxis(spread / (2 * np.where(rmsecv > 0, rmsecv, 1.0)), 0, -1),
            stopped=found.stopped.reshape(c, responses, F),
            predicted=np.moveaxis(predicted, 0, 3) if plan.keep_predicted else None,
        )


def _stack(block: Sequence[Candidate], n: int) -> tuple[FloatArray, FloatArray]:
    (grams,) = scratch("grams", (len(block), n, n))
    known = {}
    for number, candidate in enumerate(block):
        formed: Any = candidate() if callable(candidate) else candidate
        matrix = formed.values if isinstance(formed, Gram) else np.asarray(formed, dtype=np.float64)
        if matrix.shape != (n, n):
            raise SampleMismatchError(
                f"A Gram matrix has shape {matrix.shape}; expected {(n, n)}, one row a value of y."
            )
        grams[number] = matrix
        if isinstance(formed, Gram):
            known[number] = formed.size
    sizes = np.einsum("cii->c", grams)  # traces
    sizes[list(known)] = list(known.values())
    return grams, sizes


def _averaging(samples: IntArray) -> FloatArray:
    """Return the matrix, shape (n, samples), that averages over the spectra of each sample."""
    same = samples[:, None] == np.arange(samples.max() + 1)
    shares: FloatArray = same / same.sum(axis=0)
    return shares
