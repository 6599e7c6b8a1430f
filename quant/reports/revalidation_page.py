"""The page of a revalidation: the answer on one screen, the evidence below."""

import json
from collections.abc import Callable
from typing import Any

from markupsafe import Markup

from quant.plots.revalidation import plot_equivalence, plot_history, plot_remedies, plot_standards
from quant.plots.svg import to_svg
from quant.reports.keys import key_docs
from quant.reports.page import TEMPLATES, page_environment
from quant.reports.pictures import Picture
from quant.result import jsonable
from quant.revalidation.changes import Change
from quant.revalidation.history import ControlChart
from quant.revalidation.result import RevalidationResult
from quant.revalidation.verdict import CANNOT_DECIDE, HOLDS, RULES
from quant.text_table import format_number

REMEDIES_CAPTION = (
    "SEP to expect with each remedy; blue line: validated, dashed: allowed; pale: the model does not apply again."
)
MOST_CHANGES = 4  # on the first screen; the table below names all


def render_revalidation(result: RevalidationResult, history: ControlChart | None = None) -> str:
    """Return the whole page: one file, pictures inside, nothing is loaded and nothing runs.

    Parameters
    ----------
    result : RevalidationResult
    history : ControlChart, optional
        The check sample over the months, for a section of its own.
    """
    style = Markup("".join((TEMPLATES / name).read_text(encoding="utf-8") for name in ("page.css", "revalidation.css")))
    pictures = [
        _draw(plot_standards, result, "standards", "Differences of the standards, the bias allowed.", narrow=True),
        _draw(plot_remedies, result, "remedies", REMEDIES_CAPTION, narrow=True),
    ]
    return (
        page_environment()
        .get_template("revalidation.html")
        .render(
            style=style,
            result=result,
            changed=_changed(result),
            matters=_matters(result),
            provable=_provable(result),
            remedy=_remedy(result),
            strip=_draw(plot_equivalence, result, "strip", "Bias with its 90 % interval.", narrow=False),
            pictures=pictures,
            rules=RULES,
            history=history,
            history_picture=[
                _draw(plot_history, history, "history", "Check sample: single values and EWMA.", narrow=False)
            ]
            if history
            else [],
        )
    )


def revalidation_json(result: RevalidationResult, history: ControlChart | None = None) -> str:
    """Return everything but the pictures as JSON text, with what each key means under "keys".

    Parameters
    ----------
    result : RevalidationResult
    history : ControlChart, optional
    """
    docs = key_docs(RevalidationResult)
    record: dict[str, Any] = {**result.to_dict(), "accepted": result.accepted}
    if history is not None:
        record["history"] = jsonable(history)
        docs |= {"history": "Control chart of the check sample"}
        docs |= {f"history.{path}": doc for path, doc in key_docs(ControlChart).items()}
    record["keys"] = {
        **docs,
        "accepted": "Whether the calibration was shown to hold",
        "keys": "What each key means; [] stands for an entry of a list, * for a name",
    }
    return json.dumps(record, indent=2, ensure_ascii=False, allow_nan=False) + "\n"


Answer = tuple[str, list[str]]


def _changed(result: RevalidationResult) -> Answer:
    found = [change for change in result.changes if change.significant]
    film = list(result.evidence.film.words[:2]) if result.evidence.film else []
    if result.before is None:
        return "Cannot be told without spectra from before", film
    if not found:
        return "No change found", film
    shown: list[Change] = []  # one kind of each class: the others say the same again
    for change in found:
        if not {known.kind for known in shown} & set(change.same_class_as):
            shown.append(change)
    words = [change.words for change in shown[:MOST_CHANGES]]
    more = len(shown) - MOST_CHANGES
    return "Yes", [*words, *([f"and {more} more, see below"] if more > 0 else []), *film]


def _matters(result: RevalidationResult) -> Answer:
    bias, scatter, unit = result.bias, result.scatter, result.unit
    if bias is None or scatter is None:
        return "Cannot be told", []
    told = [
        f"bias {_number(bias.bias)} {unit} ({_number(bias.low)} to {_number(bias.high)}); "
        f"allowed ±{_number(bias.allowed)}",
        f"SEP {_number(scatter.sep)} {unit}, at most {_number(scatter.high)}; allowed {_number(scatter.allowed)}",
    ]
    if result.not_applicable:
        told.append(f"the model does not apply to {result.not_applicable} of {len(result.sample_ids)} standards now")
    if result.verdict == HOLDS:
        return "No: shown to be within what is allowed", told
    return ("Not shown either way" if result.verdict == CANNOT_DECIDE else "Yes"), told


def _provable(result: RevalidationResult) -> Answer:
    power, unit = result.power, result.unit
    if power is None:
        return "Not known", []
    enough = power.needed is not None and power.n_samples >= power.needed
    needed = "more than 200" if power.needed is None else str(power.needed)
    return (
        f"Yes: {power.n_samples} standards are enough"
        if enough
        else f"Not reliably: that nothing changed takes {needed}",
        [
            f"an unchanged instrument would be found to hold in {100 * power.chance_of_holds:.0f} % of visits "
            f"({needed} standards: 90 %)",
            f"a bias of {_number(power.smallest_bias)} {unit} or more would be found in 90 %",
        ],
    )


def _remedy(result: RevalidationResult) -> Answer:
    chosen = next((row for row in result.remedies if row.proposed), None)
    if chosen is not None:
        return f"{chosen.name.replace('_', ' ')}: {chosen.words}", []
    if result.verdict == HOLDS:
        return "None is needed", []
    return ("None helps: calibrate anew" if result.verdict == "rebuild" else "None is proposed yet"), []


def _number(value: float) -> str:
    return format_number(value, 3)


def _draw(plot: Callable[..., Any], record: Any, place: str, caption: str, *, narrow: bool) -> Picture:
    return Picture(Markup(to_svg(plot(record), place, caption)), caption, narrow)
