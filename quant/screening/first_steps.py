"""Spectra behind the first steps of a preprocessing, kept for the next one that begins alike."""

from itertools import takewhile

from quant.arrays import FloatArray
from quant.preprocessing.chain import fit_chain
from quant.screening.problem import Problem


class FirstSteps:
    """Applies the steps of preprocessings up to the first that learns from other spectra.

    What is behind each step of the last preprocessing stays; neighbours in the table of a search often begin alike.

    Parameters
    ----------
    problem : Problem
    """

    def __init__(self, problem: Problem) -> None:
        self.problem = problem
        self._words: list[str] = []
        self._behind: list[FloatArray] = [problem.samples.spectra.values]

    def count(self, chain: int) -> int:
        """Return how many steps of a preprocessing come before the first that learns."""
        return len(list(takewhile(lambda step: not step.learns, self.problem.layout(chain).steps)))

    def behind(self, chain: int) -> FloatArray:
        """Return the spectra behind these steps, shape (spectra, points); not to be written to. [any unit]"""
        number = self.count(chain)
        words = [repr(table) for table in self.problem.chains[chain].steps[:number]]
        same = len(list(takewhile(lambda pair: pair[0] == pair[1], zip(words, self._words, strict=False))))
        del self._behind[same + 1 :]
        for step in self.problem.layout(chain).steps[same:number]:
            self._behind.append(fit_chain([step], self._behind[-1])[1])
        self._words = words
        return self._behind[-1]
