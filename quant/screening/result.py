"""What a search leaves."""

import csv
import io
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from quant.arrays import FloatArray
from quant.recipe.schema import Recipe
from quant.result import Result, documented
from quant.screening.chance import ChanceResult
from quant.screening.near_ties import NearTie
from quant.screening.nested import NestedResult
from quant.screening.ready import recipe_text
from quant.text_table import Row, format_columns, format_number, format_rows

SIGNIFICANT = 0.05
SHOWN = 10  # rows of the table that print
HEADER = ("rank", "preprocessing", "ranges", "points", "factors", "RMSECV", "std error")


@dataclass(frozen=True, kw_only=True, eq=False)
class ScreenRow(Result):
    """One candidate of the table."""

    rank: int = documented("Place by RMSECV; those scored by refitting come first")
    preprocessing: str = documented("Steps with their options, in order, before ranges are kept")
    ranges: tuple[tuple[float, float], ...] = documented("Ranges kept behind them; empty: all points", "axis unit")
    n_points: int = documented("Points kept")
    factors: int = documented("Number of factors by the recipe's rule")
    rmsecv: float = documented("Root mean square error of left-out samples", "unit of the analyte")
    rmsecv_se: float = documented("Its standard error over samples", "unit of the analyte")
    refitted: bool = documented("Scored by refitting the pipeline in every fold; else from Gram matrices")
    winner: bool = documented("Whether it is the winner")

    def cells(self) -> tuple[object, ...]:
        """Return what the table shows: see `HEADER`."""
        return (
            f"{self.rank}{' *' if self.winner else ''}",
            self.preprocessing,
            ", ".join(f"{first:g}..{last:g}" for first, last in self.ranges) or "all",
            self.n_points,
            self.factors,
            self.rmsecv,
            self.rmsecv_se,
        )


@dataclass(frozen=True, kw_only=True, eq=False)
class WindowMap(Result):
    """RMSECV of windows behind the winner's preprocessing."""

    edges: FloatArray = documented("Where windows can start and end, one more than blocks", "axis unit")
    start: tuple[int, ...] = documented("First block of each window")
    stop: tuple[int, ...] = documented("Block behind the last of each window")
    rmsecv: FloatArray = documented("RMSECV of each window", "unit of the analyte")


@dataclass(frozen=True, kw_only=True, eq=False)
class ScreenResult(Result):
    """Candidates compared, the winner, and what its score is worth."""

    title: str = documented("Title of the recipe")
    analyte: str = documented("Name of the analyte")
    unit: str = documented("Unit of the analyte")
    axis_unit: str = documented("Unit of the spectral axis")
    scheme: str = documented("How samples were left out")
    rule: str = documented("How the number of factors was chosen")
    prefer: str = documented("How the winner was chosen: simpler within one standard error, or the lowest")
    n_samples: int = documented("Number of samples that took part; validation samples did not")
    n_candidates: int = documented("Candidates scored")
    n_possible: int = documented("Candidates there are (of forward_backward: at least)")
    rows: tuple[ScreenRow, ...] = documented(
        "All candidates: the refitted ones, then the others", metadata={"json": False}
    )
    leaders: tuple[ScreenRow, ...] = documented("Candidates scored by refitting")
    winner: ScreenRow = documented("The winner")
    naive_q2: float = documented("1 - PRESS/SST of the winner in the search that chose it: too good")
    nested: NestedResult | None = documented("How the search does on samples that took no part in it")
    chance: ChanceResult | None = documented("How the search does where there is nothing to find")
    near_ties: tuple[NearTie, ...] = documented("Leaders that cannot be told from the winner")
    compared_on: str = documented("On what near-ties were compared")
    windows: WindowMap | None = documented("Windows behind the winner's preprocessing, if windows were searched")
    interrupted: bool = documented("Whether the user interrupted; then it is what was found until then")
    winner_recipe: Recipe = documented("The winner's recipe", metadata={"json": False})

    @property
    def better_than_chance(self) -> bool:
        """Whether nothing speaks against the winner: nested Q² above 0, and p at most 0.05, where they are known.

        Of fewer than 19 permutations p cannot be so low, whatever they find; then it does not count.
        """
        nested_fails = self.nested is not None and self.nested.q2 <= 0
        return not (nested_fails or (self._chance_can_tell and self.chance_p > SIGNIFICANT))

    @property
    def chance_p(self) -> float:
        """Share p of the chance level; NaN where it was not worked out."""
        return float("nan") if self.chance is None else self.chance.p

    @property
    def _chance_can_tell(self) -> bool:
        return self.chance is not None and 1 / (1 + self.chance.lowest.size) <= SIGNIFICANT

    def headline(self) -> list[Row]:
        """Return what stands at the top: the nested error first, the naive one beside it."""
        rows: list[Row] = []
        if self.nested is not None:
            rows.append(("RMSEP, nested (the whole search repeated without the samples)", self.nested.mean, self.unit))
            if self.nested.rmsep.size > 1:
                rows.append((f"  spread over {self.nested.rmsep.size} repeats", self.nested.spread, self.unit))
            rows.append(("  Q²", self.nested.q2, f"± {format_number(self.nested.q2_se, 2)}"))
        rows.append(("RMSECV of the winner (took part in choosing: too good)", self.winner.rmsecv, self.unit))
        if self.nested is not None:
            rows.append(("  looks better than it is by", 100 * (1 - self.winner.rmsecv / self.nested.mean), "%"))
        if self.chance is not None:
            rows += [
                (
                    f"lowest RMSECV by chance, mean of {self.chance.lowest.size}",
                    float(self.chance.lowest.mean()),
                    self.unit,
                ),
                (
                    f"  p of the search ({self.chance.over}: lowest {format_number(self.chance.observed)})",
                    self.chance.p,
                    "",
                ),
            ]
        return rows

    def __str__(self) -> str:
        """Headline, the table's first rows, near-ties, verdict."""
        parts = [
            f"Screening for {self.analyte} [{self.unit}]: {self.n_samples} samples, {self.scheme}; "
            f"{self.n_candidates} candidates"
            + (f" of {self.n_possible}" if self.n_possible > self.n_candidates else ""),
            *(["Interrupted: this is what was found until then."] if self.interrupted else []),
            format_rows(self.headline()),
            "",
            f"Leading candidates, scored by refitting (* winner, {self.prefer}; factors by {self.rule}):",
            format_columns(HEADER, [row.cells() for row in self._shown()]),
            "",
            self._ties_told(),
            self._verdict(),
        ]
        return "\n".join(parts)

    def _shown(self) -> list[ScreenRow]:
        return [row for row in self.leaders if row.rank <= SHOWN or row.winner]

    def _ties_told(self) -> str:
        if not self.near_ties:
            return "No other leader is within the noise of the winner."
        header = ("rank", "p", "rms difference", "largest difference")
        rows = [(tie.rank, tie.p, tie.rms_difference, tie.largest_difference) for tie in self.near_ties[:SHOWN]]
        return (
            f"{len(self.near_ties)} of {len(self.leaders) - 1} other leaders cannot be told from the winner "
            f"(p > 0.05); their predictions differ from its on {self.compared_on} by [{self.unit}]:\n"
            + format_columns(header, rows)
        )

    def _verdict(self) -> str:
        if self.nested is None and not self._chance_can_tell:
            return (
                "Neither nested validation nor a chance level of 19 permutations: the winner's RMSECV is no statement "
                "of performance."
            )
        if self.better_than_chance:
            return "The winner does better than chance; prove it on an independent validation."
        return "NOT BETTER THAN CHANCE: do not use the winner. The spectra may hold nothing of this analyte."

    def to_csv(self) -> str:
        """Return the whole table as CSV text, one candidate a row, numbers in full."""
        out = io.StringIO()
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(
            ["rank", "winner", "preprocessing", "ranges", "points", "factors", "rmsecv", "rmsecv_se", "score"]
        )
        for row in self.rows:
            ranges = "; ".join(f"{first!r}..{last!r}" for first, last in row.ranges) or "all"
            score = "refitted" if row.refitted else "Gram matrix"
            writer.writerow([row.rank, "yes" if row.winner else "no", row.preprocessing, ranges, row.n_points,
                             row.factors, repr(row.rmsecv), repr(row.rmsecv_se), score])  # fmt: skip
        return out.getvalue()

    def recipe_text(self, folder: str | Path = ".") -> str:
        """Return the winner as a recipe for `calibrate`, its paths counted from a folder."""
        lines = [
            f"{self.title}: winner of a search among {self.n_candidates} candidates.",
            *format_rows(self.headline()).splitlines(),
        ]
        if not self.better_than_chance:
            lines.append(self._verdict())
        return recipe_text(self.winner_recipe, folder, "\n".join(lines))


def window_edges(axis: FloatArray, block: int) -> FloatArray:
    """Return the ends of blocks of points on an axis, half-way between points. [axis unit]"""
    middles = np.concatenate([axis[:1], (axis[1:] + axis[:-1]) / 2, axis[-1:]])
    return np.append(middles[:-1:block], middles[-1])
