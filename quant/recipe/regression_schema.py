"""The [regression] table of a recipe: the method and what belongs to it."""

from collections.abc import Sequence
from typing import Literal

from pydantic import Field, model_validator

from quant.recipe.table import DEFAULTS, Positive, Table, Text

_OWN_KEYS = {
    "pls": {"max_factors", "factors"},
    "pcr": {"max_factors", "factors"},
    "classical_least_squares": {"components", "background", "baseline", "non_negative"},
    "band_area": {"bands", "reference_band", "through_origin", "curve", "line_weights", "sd_column"},
}
_NO_SUMS = (
    "snv",
    "msc",
    "emsc",
    "unit_length",
    "unit_area",
    "mean_centre",
)  # steps after which spectra are no sums of pure spectra
_OWN = DEFAULTS["regression"]


class BandTable(Table):
    """A band: where its signal is taken, and above which baseline."""

    signal: Literal["area", "height", "height_at"] = Field(
        "area", description="Area, greatest height, or height at a position."
    )
    range: list[float] | None = Field(None, min_length=2, max_length=2, description="From, to. [axis unit]")
    position: float | None = Field(None, description="height_at: the position. [axis unit]")
    baseline: list[float] | None = Field(
        None,
        min_length=2,
        max_length=2,
        description="Two positions that carry the straight baseline; none: no baseline. [axis unit]",
    )


class RegressionTable(Table):
    """[regression]: the method and its size."""

    method: Literal["pls", "pcr", "classical_least_squares", "band_area"] = Field(
        _OWN["method"],
        description="PLS, principal component regression, classical least squares (Beer-Lambert), or band area.",
    )
    max_factors: Positive | Literal["auto"] = Field(
        _OWN["max_factors"], description="pls, pcr: largest number of factors looked at."
    )
    factors: Positive | Literal["one_standard_error", "minimum", "f_ratio", "randomisation"] = Field(
        _OWN["factors"],
        description="pls, pcr: the rule that chooses the number of factors, or the number.",
    )
    components: list[Text] = Field(
        default_factory=list,
        description="classical_least_squares: columns of the reference table with the contents of all that varies "
        "besides the analytes.",
    )
    background: bool = Field(
        _OWN["background"],
        description="classical_least_squares: fit a spectrum that all samples share (solvent, matrix).",
    )
    baseline: Literal["none", "offset", "slope", "quadratic"] = Field(
        _OWN["baseline"], description="classical_least_squares: baseline fitted to each spectrum beside the components."
    )
    non_negative: bool = Field(
        _OWN["non_negative"],
        description="classical_least_squares: hold contents below zero at zero; results near zero are then biased.",
    )
    bands: list[BandTable] | None = Field(None, description="band_area: bands whose signals are summed.")
    reference_band: BandTable | None = Field(
        None, description="band_area: band whose signal divides (internal standard, path)."
    )
    through_origin: bool = Field(_OWN["through_origin"], description="band_area: line through the origin.")
    curve: Literal["line", "quadratic"] = Field(
        _OWN["curve"], description="band_area: straight line, or quadratic that does not turn within the range."
    )
    line_weights: Literal["equal", "1/x", "1/x^2", "1/s^2"] = Field(
        _OWN["line_weights"],
        description="band_area: weights of the standards; 1/s^2 takes the standard deviations in sd_column.",
    )
    sd_column: Text | None = Field(
        None, description="band_area: column (or note) with the standard deviation of each standard's signal."
    )

    @property
    def on_factors(self) -> bool:
        """Whether cross-validation chooses a number of factors."""
        return self.method in ("pls", "pcr")

    def fixed_terms(self, n_analytes: int) -> tuple[int, str]:
        """Return the number of terms besides the mean, and its reason, of a method that leaves no choice.

        Parameters
        ----------
        n_analytes : int
            Analytes of the recipe.
        """
        if self.method == "band_area":
            if self.curve == "quadratic":
                return 2, "a quadratic"
            return int(not self.through_origin), "a straight line"
        n = n_analytes + len(self.components)
        named = f"{n} component{'s' if n > 1 else ''}{' and a background' if self.background else ''}"
        return n - 1 + self.background, named

    @model_validator(mode="after")
    def _belongs_together(self) -> "RegressionTable":
        given = self.model_fields_set
        if self.method == "band_area" and not self.bands:
            raise ValueError('method = "band_area" needs bands = [{ signal = "area", range = [from, to] }]')
        foreign = given & set().union(*_OWN_KEYS.values()) - _OWN_KEYS[self.method]
        if foreign:
            raise ValueError(f'{", ".join(sorted(foreign))} does not belong to method = "{self.method}"; remove it')
        if self.curve == "quadratic" and self.through_origin:
            raise ValueError('through_origin = true does not go with curve = "quadratic"; remove one of the two')
        if (self.line_weights == "1/s^2") != (self.sd_column is not None):
            raise ValueError('line_weights = "1/s^2" and sd_column = "name of the column" go together')
        return self


def check_regression(table: RegressionTable, analytes: Sequence[str], steps: Sequence[str]) -> None:
    """Refuse what classical least squares cannot work with.

    Raises
    ------
    ValueError
        A component that is an analyte or named twice, or a step after which spectra are no sums of pure spectra.
    """
    if table.method != "classical_least_squares":
        return
    names = [*analytes, *table.components]
    twice = sorted({name for name in names if names.count(name) > 1})
    if twice:
        raise ValueError(f"components name {', '.join(twice)} twice; every [[analyte]] is a component already")
    wrong = [step for step in steps if step in _NO_SUMS]
    if wrong:
        raise ValueError(
            f"classical_least_squares takes spectra as sums of pure spectra, which {', '.join(wrong)} undoes; remove "
            "the step, or choose another method (a baseline can be fitted by baseline, a shared spectrum by background)"
        )
