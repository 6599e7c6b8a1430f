"""The limit that a model's results are decided against."""

from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True)
class DecisionRule:
    """A limit and the risk accepted.

    The guard band is factor·u, with the factor stored so that predicting needs no quantile.

    Attributes
    ----------
    limit : float
        [unit of the analyte]
    kind : str
        "upper": the true value must not exceed the limit; "lower": it must not fall below it.
    risk : float
        Accepted probability that a result on the edge of acceptance does not conform.
    factor : float
        Student's t at 1 - risk with the model's degrees of freedom.
    name, source : str
        What the limit is called, and where it comes from.
    """

    limit: float
    kind: str
    risk: float
    factor: float
    name: str = ""
    source: str = ""

    def told(self, unit: str) -> str:
        """Return name, side, limit, source and risk in one line.

        Parameters
        ----------
        unit : str
            Unit of the analyte, behind the limit.
        """
        name = f"{self.name}: " if self.name else ""
        source = f" ({self.source})" if self.source else ""
        limit = f"{self.limit:g} {unit}".rstrip()
        return f"{name}{self.kind} limit {limit}{source}, risk {100 * self.risk:g} %"
