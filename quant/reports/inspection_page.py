"""The page of an inspection: findings first, then pictures, then what was read."""

import json
from collections.abc import Callable
from itertools import combinations
from typing import Any

from markupsafe import Markup

from quant.checks import name_some
from quant.inspection.finding import GRAVITIES
from quant.inspection.inspect import InspectionResult
from quant.inspection.picture import InspectionPicture
from quant.plots.inspection import correlation, plot_overlaid, plot_range, plot_together
from quant.plots.svg import to_svg
from quant.reports.keys import key_docs
from quant.reports.page import TEMPLATES, page_environment
from quant.reports.pictures import Picture

MOST_NAMES = 40  # samples of a finding; the JSON names all
MOST_ANALYTES = 6  # with pictures
MOST_PAIRS = 6  # of analytes drawn against each other, those that vary together most


def render_inspection(result: InspectionResult) -> str:
    """Return the whole page: one file, pictures inside, nothing is loaded and nothing runs."""
    style = Markup("".join((TEMPLATES / name).read_text(encoding="utf-8") for name in ("page.css", "inspection.css")))
    return (
        page_environment()
        .get_template("inspection.html")
        .render(
            title=result.title,
            style=style,
            headline=result.headline(),
            accepted=result.accepted,
            gravities=GRAVITIES,
            findings=[(finding, name_some(finding.samples, MOST_NAMES)) for finding in result.findings],
            spectra=_spectra(result.picture),
            ranges=_ranges(result.picture),
            together=_together(result.picture),
            sets=result.sets,
            pipeline=" → ".join(result.pipeline) or "none",
            points=result.points,
            name_some=name_some,
        )
    )


def inspection_json(result: InspectionResult) -> str:
    """Return everything but the pictures as JSON text, with what each key means under "keys"."""
    docs = {path: doc for path, doc in key_docs(InspectionResult).items() if path.partition(".")[0] != "picture"}
    record: dict[str, Any] = {
        **result.to_dict(),
        "accepted": result.accepted,
        "keys": {
            **docs,
            "accepted": "Whether no finding is a stop",
            "keys": "What each key means; [] stands for an entry of a list, * for a name",
        },
    }
    return json.dumps(record, indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def _spectra(picture: InspectionPicture) -> list[Picture]:
    shaded = "" if picture.used.all() else " Shaded: the ranges that the recipe uses."
    drawn = []
    for i, (name, _) in enumerate(picture.analytes[:MOST_ANALYTES]):
        caption = f"Mean spectra, coloured by {name}.{shaded}"
        drawn.append(_draw(plot_overlaid, picture, f"s{i}", caption, narrow=False, analyte=i))
        if picture.processed is not None:
            caption = f"The same after preprocessing, coloured by {name}."
            drawn.append(_draw(plot_overlaid, picture, f"p{i}", caption, narrow=False, analyte=i, processed=True))
    return drawn


def _ranges(picture: InspectionPicture) -> list[Picture]:
    return [
        _draw(plot_range, picture, f"r{i}", f"How the values of {name} fill their range.", narrow=True, analyte=i)
        for i, (name, _) in enumerate(picture.analytes[:MOST_ANALYTES])
    ]


def _together(picture: InspectionPicture) -> list[Picture]:
    pairs = list(combinations(range(len(picture.analytes)), 2))
    pairs.sort(key=lambda pair: -abs(correlation(picture, pair) or 0.0))
    return [
        _draw(
            plot_together,
            picture,
            f"t{a}-{b}",
            f"{picture.analytes[b][0]} against {picture.analytes[a][0]}.",
            narrow=True,
            pair=(a, b),
        )
        for a, b in pairs[:MOST_PAIRS]
    ]


def _draw(
    plot: Callable[..., Any], picture: InspectionPicture, place: str, caption: str, *, narrow: bool, **options: Any
) -> Picture:
    return Picture(Markup(to_svg(plot(picture, **options), place, caption)), caption, narrow)
