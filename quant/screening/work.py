"""Pieces of work, one after the other, on several cores, or on a cluster; what is done when interrupted is kept."""

import sys
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from functools import partial
from typing import Any, TypeVar

from joblib import Parallel, cpu_count, delayed, parallel_config

from quant.errors import ParameterError, UsageError
from quant.regression.fast_cross_validation_threads import keep_freed_memory, one_blas_thread

Task = TypeVar("Task")
Found = TypeVar("Found")


@dataclass(frozen=True)
class Workers:
    """Who does the work.

    Attributes
    ----------
    number : int
        Processes, each with one thread of linear algebra; −1: one a core. 1: this one. On a cluster: ignored.
    cluster : bool
        Whether joblib's backend is a cluster.
    """

    number: int = 1
    cluster: bool = False

    def run(self, function: Callable[[Task], Found], tasks: Sequence[Task], label: str) -> tuple[list[Found], bool]:
        """Return what the function makes of the tasks, in order, and whether the user interrupted.

        Each task is worked on by one thread of linear algebra, so that results do not depend on who does it.

        Parameters
        ----------
        function : callable
            That can be sent to another process.
        tasks : sequence
        label : str
            What a terminal is told beside done, all, and the remaining time.
        """
        found: list[Found] = []
        try:
            for one in _shown(self._each(function, tasks), len(tasks), label):
                found.append(one)
        except KeyboardInterrupt:
            return found, True
        return found, False

    def _each(self, function: Callable[[Task], Found], tasks: Sequence[Task]) -> Iterable[Found]:
        if not self.cluster and (self.number == 1 or len(tasks) < 2):
            return map(partial(_alone, function), tasks)
        parallel = Parallel(n_jobs=-1 if self.cluster else self.number, return_as="generator", batch_size=1)
        each: Iterable[Found] = parallel(delayed(_alone)(function, task) for task in tasks)
        return each


def _alone(function: Callable[[Task], Found], task: Task) -> Found:
    keep_freed_memory()
    with one_blas_thread():
        return function(task)


@contextmanager
def workers(number: int = 1, cluster: str | None = None) -> Iterator[Workers]:
    """Yield workers: processes of this machine, or those of a Dask cluster that runs at an address.

    Parameters
    ----------
    number : int
        Processes, −1: one a core; never more than cores.
    cluster : str, optional
        Address of the scheduler, such as "tcp://10.0.0.5:8786". Its workers need the same versions of everything.

    Raises
    ------
    ParameterError
        No such number of workers.
    UsageError
        The extra for clusters is not installed, or nobody answers at the address.
    """
    if isinstance(number, bool) or not isinstance(number, int) or (number < 1 and number != -1):
        raise ParameterError(f"workers = {number!r}; expected 1 or more, or -1 for one a core.")
    if cluster is None:
        yield Workers(min(number, cpu_count()))  # more processes than cores would only take memory
        return
    client = _client(cluster)
    try:
        with parallel_config(backend="dask"):
            yield Workers(number, cluster=True)
    finally:
        client.close()


def _client(address: str) -> Any:
    try:
        from distributed import Client  # deferred: start-up
    except ImportError:
        raise UsageError(
            f"The cluster at {address} cannot be used: distributed is not installed. Install it by "
            "pip install 'quant[cluster]', or leave --cluster out."
        ) from None
    try:
        client: Any = Client  # it states no types
        return client(address, timeout=10)
    except (OSError, ValueError) as problem:
        raise UsageError(
            f"Nobody answers at {address!r} ({problem}); expected the address of a running Dask scheduler, such as "
            "tcp://10.0.0.5:8786. Check it, or leave --cluster out."
        ) from None


def _shown(items: Iterable[Found], total: int, label: str) -> Iterator[Found]:
    """Yield the items, on a terminal with a bar and the remaining time."""
    if not sys.stderr.isatty():
        yield from items
        return
    from rich.console import Console  # deferred: start-up
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeRemainingColumn

    columns = (TextColumn("{task.description}"), BarColumn(), MofNCompleteColumn(), TimeRemainingColumn())
    with Progress(*columns, console=Console(stderr=True), transient=True) as bar:
        yield from bar.track(items, total=total, description=label)
