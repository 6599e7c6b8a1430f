"""Spectra behind the first steps of a preprocessing, kept for the next one that begins alike."""

from itertools import takewhile

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.cross_validation import check_missing_points
from quant.preprocessing.chain import fit_chain
from quant.screening.problem import Problem


class FirstSteps:
    """Applies the steps of preprocessings up to the first that learns from other spectra.

    What is behind each of them but the last stays: neighbours in the table of a search often begin alike.

    Parameters
    ----------
    problem : Problem
    """

    def __init__(self, problem: Problem) -> None:
        self.problem = problem
        self._missing = bool(np.isnan(problem.samples.spectra.values).any())
        self._words: list[str] = []
        self._behind: list[FloatArray] = [problem.samples.spectra.values]

    def count(self, chain: int) -> int:
        """Return how many steps of a preprocessing come before the first that learns."""
        return len(list(takewhile(lambda step: not step.learns, self.problem.layout(chain).steps)))

    def behind(self, chain: int) -> FloatArray:
        """Return the spectra behind these steps, shape (spectra, points), free to be overwritten. [any unit]

        Raises
        ------
        QuantityError
            Points are missing that no step leaves out first.
        """
        if self._missing:
            check_missing_points(self.problem.samples, self.problem.layout(chain).steps)
        steps = self.problem.layout(chain).steps[: self.count(chain)]
        words = [repr(table) for table in self.problem.chains[chain].steps[: len(steps)]]
        same = len(list(takewhile(lambda pair: pair[0] == pair[1], zip(words[:-1], self._words, strict=False))))
        del self._behind[same + 1 :]
        for step in steps[same:-1]:
            self._behind.append(fit_chain([step], self._behind[-1])[1])
        self._words = words[:-1]
        found = fit_chain(steps[-1:], self._behind[-1])[1]
        return found.copy() if np.may_share_memory(found, self._behind[-1]) else found
