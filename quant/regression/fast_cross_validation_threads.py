"""What a worker keeps: one thread of linear algebra, and its working memory.

With more threads of linear algebra, small products wait for each other, at times a hundred times over.
"""

import threading
from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache
from math import prod
from typing import Any

import numpy as np

from quant.arrays import FloatArray

LARGEST_BLOCK = 31 * 2**20  # bytes, see `keep_freed_memory`
KEPT_BYTES = 2**24  # of working memory of each kind, by each thread


@cache  # once is enough
def keep_freed_memory() -> None:
    """Let freed arrays be used again: pages fresh from the system cost more than preprocessing a set of spectra.

    The C library of Linux gives freed memory back where a block, or twice as much at the end, is larger than the
    largest it was ever given to free, up to 32 MB. So it is given one, that nobody writes to. Elsewhere, and where the
    environment sets MALLOC_TRIM_THRESHOLD_, as on Dask's workers: no effect.
    """
    np.empty(LARGEST_BLOCK, dtype=np.uint8)


@contextmanager
def one_blas_thread() -> Iterator[None]:
    """Keep linear algebra to one thread within the block."""
    with _controller().limit(limits=1, user_api="blas"):
        yield


@cache
def _controller() -> Any:
    from threadpoolctl import ThreadpoolController  # type: ignore[import-untyped]  # deferred: start-up

    return ThreadpoolController()  # looks through all loaded libraries: worth keeping


_kept = threading.local()


def scratch(kind: str, *shapes: tuple[int, ...]) -> list[FloatArray]:
    """Return arrays of any content, from memory that each thread keeps: fresh pages cost more than the arithmetic.

    Parameters
    ----------
    kind : str
        Whose memory: the next call with the same word hands the same memory out again.
    *shapes : tuple of int
        One an array.
    """
    sizes = [prod(shape) for shape in shapes]
    whole: FloatArray = getattr(_kept, kind, np.empty(0))
    if whole.size < sum(sizes):
        whole = np.empty(sum(sizes))
        if whole.nbytes <= KEPT_BYTES:
            setattr(_kept, kind, whole)
    ends = np.cumsum(sizes)
    return [whole[end - size : end].reshape(shape) for shape, size, end in zip(shapes, sizes, ends, strict=True)]
