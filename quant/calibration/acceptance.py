"""The recipe's own criteria of acceptance, against what validation found."""

from quant.arrays import BoolArray
from quant.calibration.requirement import Requirement, fulfilled, judged
from quant.recipe.audit_schema import AcceptanceTable
from quant.statistics.figures import Figures

SOURCE = "recipe, [acceptance]"


def check_acceptance(table: AcceptanceTable, figures: Figures, inside: BoolArray) -> tuple[Requirement, ...]:
    """Return one line for each criterion of the recipe.

    Parameters
    ----------
    table : AcceptanceTable
    figures : Figures
        Of the validation samples.
    inside : array of bool, shape (n_samples,)
        Whether each reference value lies inside its 95 % interval.
    """
    unit = figures.unit
    slope = None if figures.slope is None else abs(figures.slope - 1)
    share = float(inside.mean())
    at_most = [
        ("RMSEP", figures.rmse, table.max_rmsep, unit),
        ("bias, sign gone", abs(figures.bias), table.max_bias, unit),
        ("SEP", figures.sep, table.max_sep, unit),
        ("distance of the slope from 1", slope, table.slope_within, ""),
    ]
    at_least = [
        ("R² (determination)", figures.r2_determination, table.min_r2, ""),
        ("RPD", figures.rpd, table.min_rpd, ""),
        ("validation samples", figures.n_samples, table.min_samples, ""),
        ("share inside the 95 % interval", share, table.min_inside, ""),
    ]
    rows = [
        *(_row(name, found, f"at most {most:g}", judged(found, most=most), unit)
          for name, found, most, unit in at_most if most is not None),
        *(_row(name, found, f"at least {least:g}", judged(found, least=least), unit)
          for name, found, least, unit in at_least if least is not None),
    ]  # fmt: skip
    if table.bias_not_significant:
        test = figures.bias_test
        verdict = fulfilled(met=None if test is None else not test.significant)
        rows.append(_row("p of the bias", None if test is None else test.p, "not significant", verdict, ""))
    return tuple(rows)


def _row(criterion: str, found: float | None, required: str, verdict: str, unit: str) -> Requirement:
    return Requirement(criterion=criterion, found=found, required=required, verdict=verdict, unit=unit, source=SOURCE)
