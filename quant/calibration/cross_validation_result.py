"""What cross-validation leaves."""

from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.result import Result, documented
from quant.text_table import format_columns


@dataclass(frozen=True, kw_only=True, eq=False)
class CrossValidationResult(Result):
    """Left-out predictions of every sample with every number of factors."""

    analyte: str = documented("Name of the analyte")
    unit: str = documented("Unit of the analyte")
    scheme: str = documented("How samples were left out")
    n_samples: int = documented("Number of samples")
    n_units: int = documented("Independent units among them: groups where samples of one group are alike")
    n_folds: int = documented("Number of folds, all repeats together")
    sample_ids: tuple[str, ...] = documented("Sample IDs")
    reference: FloatArray = documented("Reference values, one a sample", "unit of the analyte")
    factor_counts: tuple[int, ...] = documented("Numbers of factors; 0 is the mean of the training samples")
    predicted: FloatArray = documented("Left-out predictions: repeat, number of factors, sample", "unit of the analyte")
    leverage: FloatArray = documented("Left-out leverages, 1/n included: repeat, number of factors, sample")
    residual: FloatArray = documented("Left-out sums of squares of residual spectra: repeat, number of factors, sample")
    replicate_variance: FloatArray = documented("Pooled variance of replicates' predictions, one a number of factors")
    rmsecv: FloatArray = documented(
        "Root mean square error of left-out samples, one a number of factors", "unit of the analyte"
    )
    rmsecv_se: FloatArray = documented("Its standard error over samples", "unit of the analyte")
    q2: FloatArray = documented("1 - PRESS/SST, one a number of factors")
    choices: dict[str, int] = documented("Number of factors that each rule chooses (empty without factors to choose)")
    guard_notes: tuple[str, ...] = documented("Where factors ended as numerical noise, and in how many folds")

    def __str__(self) -> str:
        """RMSECV against the number of factors, and what each rule chooses."""
        marks = {
            count: ", ".join(rule.replace("_", " ") for rule, c in self.choices.items() if c == count)
            for count in self.factor_counts
        }
        rows = [
            (count, rmsecv, se, q2, marks[count])
            for count, rmsecv, se, q2 in zip(self.factor_counts, self.rmsecv, self.rmsecv_se, self.q2, strict=True)
        ]
        title = f"Cross-validation of {self.analyte} [{self.unit}]: {self.n_samples} samples, {self.scheme}"
        table = format_columns(("factors", "RMSECV", "std error", "Q²", "chosen by"), rows)
        return "\n".join([title, table, *self.guard_notes])

    def squared_errors(self) -> FloatArray:
        """Squared errors averaged over repeats, shape (n_counts, n_samples). [(unit of the analyte)²]"""
        return np.asarray(np.mean((self.predicted - self.reference) ** 2, axis=0))

    def left_out_predictions(self, factors: int) -> FloatArray:
        """Left-out predictions averaged over repeats, shape (n_samples,). [unit of the analyte]"""
        return np.asarray(np.mean(self.at(factors)[0], axis=0))

    def at(self, factors: int) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Predictions, leverages and residuals at a number of factors, each of shape (n_repeats, n_samples)."""
        position = self.factor_counts.index(factors)
        return self.predicted[:, position], self.leverage[:, position], self.residual[:, position]
