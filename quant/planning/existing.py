"""Judge standards that exist already: a table of their concentrations."""

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from quant.arrays import FloatArray
from quant.checks import name_some
from quant.errors import FileFormatError
from quant.files import decode_text, read_bytes
from quant.planning.judge import judge_design
from quant.planning.judgement import DesignJudgement
from quant.planning.plan import planned_ranges
from quant.readers import delimited
from quant.recipe.plan_schema import Plan


def judge_file(path: str | Path, plan: Plan | None = None, *, decimal: str = ".") -> DesignJudgement:
    """Judge the standards of a CSV file: one row a sample, one column a component.

    Parameters
    ----------
    path : str or Path
        Delimited text with a header.
    plan : Plan, optional
        What the standards should have been: its components are the columns, its ranges should be spanned; the column of
        the balance component may be missing. Without a plan every column of numbers counts, apart from the masses and
        uncertainties that ``quant plan`` itself writes, and the first finding names them; ranges are what the standards
        span.
    decimal : {".", ","}, optional
        Decimal sign.

    Raises
    ------
    FileFormatError
        The file cannot be read, a column is missing or holds numbers only in part, or there is no column of numbers
        that is named after a component.
    NotEnoughDataError
        Fewer than three standards, or a component that does not vary.
    """
    file = Path(path)
    text = decode_text(file, read_bytes(file))
    rows = delimited.read_rows(file, text, delimited.separator_of(text.lstrip().partition("\n")[0], decimal))
    headings = [cell.strip() for cell in rows[0][1]]
    for row in rows[1:]:
        delimited.check_width(file, row, len(headings))
    if plan is None:
        names = _columns_of_numbers(file, headings, rows[1:], decimal)
    else:
        balance = None if plan.mixture is None else plan.mixture.balance
        names = [name for name in plan.names if name != balance or name in headings]
    places = [delimited.find_column(file, headings, name, "concentrations") for name in names]
    amounts = np.array(
        [
            delimited.numbers_from(file, line, [cells[place] for place in places], names, decimal, missing=())
            for line, cells in rows[1:]
        ],
        dtype=np.float64,
    ).reshape(-1, len(names))
    if plan is None:
        found = judge_design(amounts, names)
        return replace(found, findings=(_told(names, headings), *found.findings))
    return _judge_against(plan, amounts, names)


def _judge_against(plan: Plan, amounts: FloatArray, names: list[str]) -> DesignJudgement:
    mixture = plan.mixture
    if mixture is not None and mixture.balance not in names:
        rest = (mixture.total - amounts.sum(axis=1, keepdims=True)).round(12)
        names, amounts = [*names, mixture.balance], np.hstack([amounts, rest])
    return judge_design(
        amounts,
        names,
        ranges=planned_ranges(plan, amounts) if len(amounts) else None,
        balance=None if mixture is None else mixture.balance,
        unit=plan.unit,
    )


def _columns_of_numbers(path: Path, headings: list[str], rows: Sequence[delimited.Row], decimal: str) -> list[str]:
    names = []
    for place, heading in enumerate(headings):
        if heading.lower() in delimited.SAMPLE_COLUMNS or heading.endswith(" [g]") or heading.startswith("u("):
            continue
        odd = [(line, cells[place]) for line, cells in rows if delimited.number_from(cells[place], decimal) is None]
        if len(odd) < len(rows):
            _refuse_gap(path, heading, odd)
            names.append(heading)
    if not names:
        raise FileFormatError(
            path,
            f"no column of numbers with {decimal!r} as decimal sign; expected one column of concentrations a "
            "component. State the decimal sign, or mend the table.",
        )
    spectral = [name for name in names if delimited.number_from(name, decimal) is not None]
    if spectral:
        raise FileFormatError(
            path,
            f"{len(spectral)} columns of numbers are headed by numbers ({name_some(spectral)}), as spectra are; "
            "expected columns named after components. Give a plan that names the components, or leave the others out.",
        )
    return names


def _refuse_gap(path: Path, heading: str, odd: Sequence[tuple[int, str]]) -> None:
    """Refuse a column of numbers in which some cells hold none."""
    if odd:
        line, cell = odd[0]
        raise FileFormatError(
            path,
            f"{cell.strip()!r} in column {heading!r}, which elsewhere holds numbers; expected a concentration of every "
            "standard. Mend the table, leave the column out, or give a plan that names the components.",
            line=line,
        )


def _told(names: Sequence[str], headings: Sequence[str]) -> str:
    """Say which columns were taken, since nothing but their numbers speaks for them."""
    others = [name for name in headings if name not in names]
    rest = f"; not taken: {name_some(others)}" if others else ""
    return (
        f"Columns taken as components, because they hold numbers: {name_some(names, 20)}{rest}. If that is wrong, give "
        "a plan that names the components."
    )
