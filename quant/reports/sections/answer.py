"""The answer first: what the calibrations predict, how well, and what to beware of."""

from typing import Any

from quant.calibration.indirect import INDIRECT
from quant.calibration.result import NOT_PROVEN, AnalyteResult, CalibrationResult
from quant.calibration.split import INDEPENDENT
from quant.checks import name_some
from quant.prediction.applicability import NOT_APPLICABLE
from quant.regression.band_area import BandArea
from quant.regression.classical_least_squares import ClassicalLeastSquares
from quant.regression.factor_regression import FactorRegression
from quant.text_table import format_number

# Numbers of samples below which a multivariate calibration rests on little: ASTM E1655 (from memory).
FEWEST_SAMPLES, SAMPLES_A_FACTOR = 24, 6  # calibration: 24, and 6 for each factor and the mean
FEWEST_VALIDATION = 20


def context(result: CalibrationResult) -> dict[str, Any]:
    """Return the title and one answer an analyte."""
    return {
        "title": result.title,
        "answers": [
            {
                "analyte": analyte.analyte,
                "headline": headline(analyte),
                "rows": answer_rows(analyte),
                "warnings": warnings_of(analyte),
            }
            for analyte in result.analytes
        ],
    }


def headline(result: AnalyteResult) -> str:
    """Say in one line how large the errors are on new samples, or that nobody knows."""
    checked = result.validation
    if checked is None:
        return NOT_PROVEN
    figures = checked.figures
    interval = f"{format_number(figures.rmse_low, 3)} to {format_number(figures.rmse_high, 3)}"
    error = f"{format_number(figures.rmse, 3)} {result.unit}".rstrip()
    return f"RMSEP {error} (95 %: {interval}) on {figures.n_samples} samples, {checked.kind}"


def answer_rows(result: AnalyteResult) -> list[tuple[str, str]]:
    """Return the few lines that matter first."""
    limits, checked = result.limits, result.validation
    rows = [
        ("calibrated range", f"{limits.lowest:g} to {limits.highest:g} {result.unit}".rstrip()),
        ("method", method(result)),
        ("calibration samples", f"{result.n_samples} ({result.n_spectra} spectra)"),
    ]
    if checked is None:
        rows.append(("validation", NOT_PROVEN))
    else:
        held = f"{int(checked.inside.sum())} of {checked.inside.size} reference values"
        rows += [
            ("validation", f"{checked.kind}: {checked.how}"),
            ("bias", bias_verdict(result)),
            ("95 % intervals held", held),
        ]
    if result.criteria:
        rows.append(("criteria of acceptance", "met" if result.accepted else "not met: see there"))
    if result.audit.decision is not None:
        rows.append(("decides against", result.audit.decision.told))
    return [*rows, ("state of the model", str(result.model.state))]


def method(result: AnalyteResult) -> str:
    """Name the regression and its size."""
    regression = result.model.method
    if isinstance(regression, BandArea):
        kind = "straight line" if regression.curve == "line" else regression.curve
        weights = "" if regression.line_weights == "equal" else f", weights {regression.line_weights}"
        return f"band area, {kind}{' through the origin' if regression.through_origin else ''}{weights}"
    if isinstance(regression, ClassicalLeastSquares):
        return f"classical least squares, {result.rule}"
    return f"{type(regression).__name__}, {result.factors} factor{'s' if result.factors != 1 else ''} ({result.rule})"


def bias_verdict(result: AnalyteResult) -> str:
    """Return the bias of the validation samples and whether it is more than chance."""
    if result.validation is None:
        return "not tested: no validation samples"
    figures = result.validation.figures
    value = f"{format_number(figures.bias, 3)} {result.unit}".rstrip()
    test = figures.bias_test
    if test is None:
        return f"{value}, not tested: too few samples"
    return f"{value}, {'significant' if test.significant else 'not significant'} (p = {format_number(test.p, 2)})"


def warnings_of(result: AnalyteResult) -> list[str]:
    """Return what a reader has to know before trusting the figures."""
    return [*_about_calibration(result), *_about_validation(result)]


def _about_calibration(result: AnalyteResult) -> list[str]:
    crossed, n, factors = result.cross_validation, result.n_samples, result.factors
    found = []
    if isinstance(result.model.method, FactorRegression):
        wanted = max(FEWEST_SAMPLES, SAMPLES_A_FACTOR * (factors + 1))
        if n < wanted:
            found.append(f"Few samples: {n} for {factors} factors; at least {wanted} would be usual.")
        if len(crossed.choices) and factors == crossed.factor_counts[-1]:
            found.append(f"{factors} is the largest number of factors looked at; raise max_factors and look again.")
    limit = result.audit.decision
    if limit is not None and limit.remark:
        why = limit.remark if limit.decidable else f"this method cannot decide this limit: {limit.remark}"
        found.append(f"{why[:1].upper()}{why[1:]}.")
    behind = result.chemistry
    if behind is not None and behind.verdict == INDIRECT:
        found.append(f"The calibration {behind.statement}: {behind.reason}.")
    named = [row.sample for row in result.audit.diagnostics.outstanding]
    if named:
        found.append(f"Calibration samples that stand out: {name_some(named)}. See the diagnostics.")
    return [*found, *(f"{note[:1].upper()}{note[1:].rstrip('.')}." for note in crossed.guard_notes)]


def _about_validation(result: AnalyteResult) -> list[str]:
    checked = result.validation
    if checked is None:
        return ["Not validated: the errors on new material are not known. Prepare or sample validation material."]
    figures, found = checked.figures, []
    seal = result.audit.seal
    if seal is not None and not seal.independent:
        found.append(f"{seal.statement[:1].upper()}{seal.statement[1:]}.")
    if checked.kind != INDEPENDENT:
        found.append(
            "Internal test, no independent validation: its samples come from the set that was calibrated with."
        )
    if figures.n_samples < FEWEST_VALIDATION:
        found.append(f"{figures.n_samples} validation samples; {FEWEST_VALIDATION} or more would be usual.")
    if figures.bias_test is not None and figures.bias_test.significant:
        found.append(f"The bias is significant: {bias_verdict(result)}.")
    line = figures.line_test
    if line is not None and (line.slope_significant or line.intercept_significant):
        found.append(f"The line of {line.direction} differs from slope 1 and intercept 0: see the tests.")
    pairs = zip(checked.sample_ids, checked.applicability, strict=True)
    strange = [sample for sample, verdict in pairs if verdict == NOT_APPLICABLE]
    if strange:
        count = f"{len(strange)} of {len(checked.sample_ids)} validation samples"
        found.append(f"The calibration does not apply to {count}: {name_some(strange)}.")
    return found
