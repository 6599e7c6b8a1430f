"""The reasons of a verdict, in order: what decided, what was shown, found, could have been shown, and what helps."""

from collections.abc import Iterator, Sequence

from quant.checks import name_some
from quant.revalidation.change_words import NOISE
from quant.revalidation.changes import Change
from quant.revalidation.judgements import Power, RemedyRow
from quant.revalidation.verdict import CANNOT_DECIDE, HOLDS, REBUILD, Facts, Rule


def reasons(
    rule: Rule,
    facts: Facts,
    power: Power,
    changes: tuple[Change, ...],
    *,
    outside: int,
    known: Sequence[str],
    film_failed: bool,
    unit: str,
    note: str,
) -> tuple[str, ...]:
    """Put into words why the verdict is what it is.

    Parameters
    ----------
    rule : Rule
        The one that decided.
    facts : Facts
    power : Power
    changes : tuple of Change
    outside : int
        Standards to which the model does not apply now.
    known : sequence of str
        Standards that took part in making the model.
    film_failed : bool
        Whether a film was given, and is out of tolerance.
    unit : str
        Of the analyte.
    note : str
        Why changes could not be told; may be empty.
    """
    told = [rule.words]
    if film_failed:
        told.append("the film is out of tolerance: the instrument fails its own test, whatever the calibration does")
    if known:
        told.append(
            f"{name_some(known)} took part in making the model: such standards show smaller errors than others would"
        )
    if facts.standards_in_doubt and rule.verdict == CANNOT_DECIDE:
        told.append("have the standards assayed again, or prepare new ones, and measure them before and after a visit")
    if facts.off_before is not None:
        told.append(
            f"before the visit already, results lay {facts.off_before:+.3g} {unit} off the reference values: look at "
            "these, their unit and labels first"
        )
    told += [*_shown(facts, unit), *_found(facts, outside)]
    if rule.verdict == CANNOT_DECIDE:
        needed = f"{power.needed} standards" if power.needed else "no number of standards up to 200"
        enough = power.needed is not None and power.needed <= facts.n_standards
        told.append(
            f'{facts.n_standards} standards let "holds" be said of an unchanged instrument in '
            f"{100 * power.chance_of_holds:.0f} % of visits" + ("" if enough else f"; {needed} would in 90 %")
        )
    if facts.proposed is not None and rule.verdict not in (HOLDS, CANNOT_DECIDE):
        told += _helps(facts.proposed, unit, rebuild=rule.verdict == REBUILD)
    noisy = any(change.kind == NOISE and change.significant and change.size > 0 for change in changes)
    if rule.verdict == REBUILD and noisy:
        told.append(
            "noise has grown, which no correction takes back: before anything is rebuilt, measure with more scans, or "
            "have light and detector looked at"
        )
    return tuple([*told, note] if note else told)


def _shown(facts: Facts, unit: str) -> Iterator[str]:
    bias, scatter = facts.bias, facts.scatter
    if bias is not None and scatter is not None:
        large = bias.low > bias.allowed or bias.high < -bias.allowed
        told = "too large" if large else "small enough"
        yield (
            f"bias {bias.bias:+.3g} {unit}, 90 % interval {bias.low:.3g} to {bias.high:.3g}, allowed "
            f"±{bias.allowed:.3g}: {f'shown to be {told}' if large or bias.shown else 'not shown either way'}"
        )
        yield (
            f"SEP {scatter.sep:.3g} {unit}, at most {scatter.high:.3g}, allowed {scatter.allowed:.3g}: "
            f"{'shown to be small enough' if scatter.shown else 'not shown to be small enough'}"
        )


def _found(facts: Facts, outside: int) -> Iterator[str]:
    if outside:
        yield f"the model does not apply to the spectra of {outside} of {facts.n_standards} standards as measured now"
    found = [test.name for test in facts.tests if test.significant]
    if facts.tests:
        yield f"chance does not explain: {', '.join(found)}" if found else "no test of the family finds a change"
    if facts.costly:
        yield "what was found in the spectra costs, by itself, more bias or scatter than is allowed"


def _helps(proposed: RemedyRow, unit: str, *, rebuild: bool) -> Iterator[str]:
    name = proposed.name.replace("_", " ")
    left = f"leaves an RMSE of {proposed.rmse:.3g} {unit} on left-out standards"
    expected = f"a SEP of {proposed.expected_sep:.3g} {unit} is to be expected"
    yield f"{'even the best' if rebuild else 'proposed'}: {name} {left}; {expected}"
    if not rebuild and not proposed.qualifies:
        yield (
            "spectra stay unlike those of the calibration, so its limits of applicability are widened as well: it then "
            "sees less of what does not belong into a sample"
        )
