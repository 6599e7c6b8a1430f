"""From a result to one page of HTML."""

from dataclasses import dataclass
from itertools import groupby
from pathlib import Path
from typing import Any

from jinja2 import Environment, FileSystemLoader, StrictUndefined
from markupsafe import Markup

from quant.calibration.result import CalibrationResult
from quant.reports.contents import SECTIONS, Section
from quant.text_table import format_number

TEMPLATES = Path(__file__).parent / "templates"


@dataclass(frozen=True)
class Part:
    """A rendered section: its anchor, number, heading and HTML."""

    anchor: str
    number: int
    heading: str
    html: Markup


@dataclass(frozen=True)
class Block:
    """Sections that stand together: those of one analyte, or of the whole report (no title)."""

    anchor: str
    title: str
    parts: tuple[Part, ...]


def render_page(result: CalibrationResult) -> str:
    """Return the whole page."""
    environment = page_environment()
    style = Markup((TEMPLATES / "page.css").read_text(encoding="utf-8"))
    return environment.get_template("page.html").render(title=result.title, style=style, blocks=_blocks(result))


def render_section(section: Section, result: CalibrationResult, analyte: int = 0) -> Markup:
    """Return the HTML of one section, without its heading.

    Parameters
    ----------
    section : Section
    result : CalibrationResult
    analyte : int
        Position of the analyte, for a section about one.
    """
    values: dict[str, Any]
    if section.each_analyte:
        values = section.context(result, result.analytes[analyte], f"a{analyte + 1}")
    else:
        values = section.context(result)
    return Markup(page_environment().get_template(f"{section.name}.html").render(values))


def _blocks(result: CalibrationResult) -> list[Block]:
    several, blocks = len(result.analytes) > 1, []
    for each_analyte, group in groupby(enumerate(SECTIONS, start=1), key=lambda pair: pair[1].each_analyte):
        sections = list(group)
        for i, analyte in enumerate(result.analytes if each_analyte else result.analytes[:1]):
            prefix = f"a{i + 1}-" if each_analyte else ""
            parts = tuple(
                Part(prefix + section.name, number, section.heading, render_section(section, result, i))
                for number, section in sections
            )
            blocks.append(
                Block(f"a{i + 1}" if each_analyte else "", analyte.analyte if each_analyte and several else "", parts)
            )
    return blocks


def page_environment() -> Environment:
    """Return what renders templates: everything is escaped, and a missing value is an error."""
    environment = Environment(
        loader=FileSystemLoader(TEMPLATES),
        autoescape=True,  # sample IDs and titles are hostile input
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    environment.filters["number"] = format_number
    return environment
