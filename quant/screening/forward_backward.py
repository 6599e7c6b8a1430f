"""Intervals added and taken out one by one."""

from collections.abc import Callable, Sequence

from quant.screening.pieces import EVERYTHING, Kept
from quant.screening.problem import Candidate


def forward_backward(
    score: Callable[[Sequence[Kept]], list[Candidate]], n_pieces: int, most: int, budget: int
) -> list[Candidate]:
    """Look for intervals that do well together, starting with none.

    The interval is added that lowers RMSECV most; then intervals are taken out as long as what remains does better
    than anything of its size before. At each size the best is remembered, so that no selection comes up twice and the
    search ends.

    Parameters
    ----------
    score : callable
        Scores selections.
    n_pieces : int
        Number of intervals.
    most : int
        The most intervals kept together.
    budget : int
        No further step is begun once so many were scored.

    Returns
    -------
    list of Candidate
        Everything that was scored, all points first.

    References
    ----------
    .. [1] P. Pudil, J. Novovičová, J. Kittler, Floating search methods in feature selection, Pattern Recognition
       Letters 15 (1994) 1119 (from memory).
    """
    seen: dict[Kept, Candidate] = {one.kept: one for one in score([EVERYTHING])}
    best: dict[int, Candidate] = {}
    current: Kept = ()

    def look(selections: list[Kept]) -> Candidate | None:
        unknown = [kept for kept in selections if kept not in seen]
        seen.update({one.kept: one for one in (score(unknown) if unknown else [])})
        return min((seen[kept] for kept in selections if kept in seen), key=lambda one: one.order, default=None)

    while len(current) < min(most, n_pieces) and len(seen) < budget:
        added = look([tuple(sorted((*current, piece))) for piece in range(n_pieces) if piece not in current])
        if added is None:
            break
        size = len(added.kept)
        if size not in best or added.rmsecv < best[size].rmsecv:
            best[size] = added
        current = best[size].kept
        while len(current) > 2 and len(seen) < budget:
            less = look([tuple(piece for piece in current if piece != out) for out in current])
            if less is None or less.rmsecv >= best[len(less.kept)].rmsecv:
                break
            best[len(less.kept)] = less
            current = less.kept
    return list(seen.values())
