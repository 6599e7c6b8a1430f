"""A candidate fitted to all samples, to predict others."""

from quant.arrays import FloatArray
from quant.calibration.leave_out import fit_pipeline
from quant.preprocessing.chain import apply_chain
from quant.recipe.pipeline import axis_behind, build_method, build_steps
from quant.regression.method import Method
from quant.screening.problem import Candidate, Problem


class FittedCandidate:
    """A candidate fitted to all samples of a problem.

    Parameters
    ----------
    problem : Problem
    candidate : Candidate
    """

    def __init__(self, problem: Problem, candidate: Candidate) -> None:
        recipe, axis = problem.candidate_recipe(candidate), problem.samples.spectra.axis
        steps = build_steps(recipe, axis, problem.samples.spectra.quantity)
        method = build_method(recipe, axis_behind(steps, axis), candidate.factors, problem.analyte)
        self.steps, full, _ = fit_pipeline(problem.samples, problem.values, steps, method)
        self.method: Method = full.with_factors(min(candidate.factors, full.factor_counts_[-1]))

    def predict(self, spectra: FloatArray) -> FloatArray:
        """Predict spectra of shape (n, points) on the problem's axis, one value each. [unit of the analyte]"""
        return self.method.predict(apply_chain(self.steps, spectra))
