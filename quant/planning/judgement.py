"""What a design of standards is worth, as a record that prints itself."""

from dataclasses import dataclass

from quant.result import Result, documented
from quant.text_table import Row, format_columns, format_rows


@dataclass(frozen=True, kw_only=True)
class ComponentSpread(Result):
    """How the standards lie in the range of one component."""

    component: str = documented("Name of the component")
    lowest: float = documented("Lowest value of a standard", "unit")
    highest: float = documented("Highest value of a standard", "unit")
    coverage: float = documented("Share of the planned range that the standards span", "%")
    values: int = documented("Number of different values")
    largest_gap: float = documented(
        "Widest gap between neighbouring values, the ends of the range counted", "% of range"
    )
    inflation: float | None = documented(
        "Variance inflation: 1/(1 - R²) of this component on the other varied ones; 1 is best; none if it is infinite"
    )


@dataclass(frozen=True, kw_only=True)
class Correlation(Result):
    """Correlation of two components among the standards."""

    components: tuple[str, str] = documented("The two components")
    r: float = documented("Pearson correlation")
    unavoidable: float | None = documented(
        "With the balance component: what it has to be if the others are uncorrelated and as spread as here; else none"
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class DesignJudgement(Result):
    """What a set of standards is worth."""

    n_standards: int = documented("Number of standards")
    unit: str = documented("Unit of the components")
    balance: str | None = documented("Component that makes up a fixed total, if any")
    total: float | None = documented("The fixed total, if any", "unit")
    components: tuple[ComponentSpread, ...] = documented("One entry a component, the balance last")
    correlations: tuple[Correlation, ...] = documented("Every pair of components, the largest avoidable one first")
    largest_correlation: float | None = documented("Largest |r| between components other than the balance, if two vary")
    condition: float | None = documented("Condition number of the standardised varied components; none if infinite")
    nearest: float = documented("Smallest distance between two standards; every range counts 1")
    largest_hole: float = documented("Largest distance from a possible mixture to the nearest standard; same scale")
    random_hole: float = documented("The same for as many random mixtures, for comparison")
    factors: int = documented("Number of components that vary independently: the factors a calibration needs at least")
    e1655_standards: int = documented(
        "Standards that ASTM E1655 asks for that many factors, mean-centred (from memory)"
    )
    e1655_validation: int = documented("Validation samples that it asks for (from memory)")
    findings: tuple[str, ...] = documented("What is wrong or should be known, the gravest first")

    def rows(self) -> list[Row]:
        """The figures of the whole design."""
        return [
            ("standards", self.n_standards, ""),
            ("ASTM E1655 asks for", self.e1655_standards, f"standards, {self.e1655_validation} validation samples"),
            ("factors needed at least", self.factors, ""),
            ("largest |r| that could be avoided", self.largest_correlation, ""),
            ("condition number", "infinite" if self.condition is None else self.condition, ""),
            ("nearest two standards", self.nearest, "(every range = 1)"),
            ("largest hole", self.largest_hole, f"(random mixtures: {self.random_hole:.4g})"),
        ]

    def __str__(self) -> str:
        """Rows, one line a component, one line a correlation, findings."""
        spreads = format_columns(
            ("component", "lowest", "highest", "unit", "spans %", "values", "gap %", "inflation"),
            [
                (
                    *(s.component, s.lowest, s.highest, self.unit, f"{s.coverage:.1f}".rjust(7)),
                    *(s.values, f"{s.largest_gap:.1f}".rjust(5), s.inflation),
                )
                for s in self.components
            ],
        )
        pairs = format_columns(
            ("components", "r", "remark"),
            [
                (
                    " and ".join(pair.components),
                    f"{pair.r:+.3f}",
                    "" if pair.unavoidable is None else f"unavoidable with a fixed total: {pair.unavoidable:+.3f}",
                )
                for pair in self.correlations
            ],
        )
        parts = [format_rows(self.rows()), spreads, *([pairs] if self.correlations else [])]
        if self.findings:
            parts.append("\n".join(f"! {finding}" for finding in self.findings))
        return "\n\n".join(parts)
