"""Progress of long work: a bar on a terminal, nothing in a pipe."""

import sys
from collections.abc import Iterator, Sequence
from typing import TypeVar

Item = TypeVar("Item")

LONG_ENOUGH = 20  # fewer tasks are done before a bar would be read


def progress(items: Sequence[Item], label: str) -> Iterator[Item]:
    """Yield the items, showing on a terminal how many are done.

    Parameters
    ----------
    items : sequence
        Pieces of work.
    label : str
        What the work is.
    """
    if len(items) < LONG_ENOUGH or not sys.stderr.isatty():
        yield from items
        return
    from rich.console import Console  # deferred: start-up
    from rich.progress import track

    yield from track(items, description=label, console=Console(stderr=True), transient=True)
