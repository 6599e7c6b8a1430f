"""One thread of linear algebra a worker: with more, small products wait for each other, at times 100 times over."""

from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache
from typing import Any


@contextmanager
def one_blas_thread() -> Iterator[None]:
    """Keep linear algebra to one thread within the block."""
    with _controller().limit(limits=1, user_api="blas"):
        yield


@cache
def _controller() -> Any:
    from threadpoolctl import ThreadpoolController  # type: ignore[import-untyped]  # deferred: start-up

    return ThreadpoolController()  # looks through all loaded libraries: worth keeping
