#!/usr/bin/env python3
"""The main job on the demo sets, on a fresh clone too: `python3 demo_sets/run.py`.

The first start makes the project's virtual environment (see environment.py); later ones begin at once. Each command is
shown as you would type it at the top of the project, then run; what they write goes to demo_sets/results.
"""

from __future__ import annotations

import shlex
import sys
from dataclasses import dataclass

import environment

DONE, NOT_ACCEPTED = 0, 1  # exit codes of the command line
RESULTS = "demo_sets/results"


@dataclass(frozen=True)
class Step:
    """One command of the demo.

    Parameters
    ----------
    purpose : str
        What the command is for, in one sentence.
    command : str
        As typed at the top of the project; a word with * stands for the files it matches.
    writes : str
        A file that the command has to write; exit code 1 alone could also come from a crash.
    expected : int
        The exit code with which the command has to end.
    remark : str
        What to say about that exit code.
    """

    purpose: str
    command: str
    writes: str = ""
    expected: int = DONE
    remark: str = ""


ODD_SAMPLE = (
    "Exit code 1 is as it should be: one of these samples is odd on purpose, and quant says that the calibration\n"
    "does not apply to it. Nobody could defend its figure: it is not to be reported."
)


def steps_for(demo_set: str, title: str, model: str, new_samples: str) -> list[Step]:
    """Return the three commands of the everyday job: look, calibrate, predict."""
    recipe, results = f"configs/{demo_set}.toml", f"{RESULTS}/{demo_set}"
    return [
        Step(f"{title}: look over the spectra and the reference values", f"quant inspect {recipe}"),
        Step(
            f"{title}: calibrate, cross-validate, validate",
            f"quant calibrate {recipe} --out {results}",
            writes=f"{results}/{model}",
        ),
        Step(
            f"{title}: predict new samples",
            f"quant predict {results}/{model} {new_samples} --out {results}/new_samples.csv",
            writes=f"{results}/new_samples.csv",
            expected=NOT_ACCEPTED,
            remark=ODD_SAMPLE,
        ),
    ]


CHANGED = (
    "Exit code 1 is as it should be: the calibration no longer holds as it is. The page says what changed, whether it\n"
    "matters, whether these standards can show it, and the least that restores it; the corrected model is provisional."
)


def steps_after_service() -> list[Step]:
    """Return the two commands after a service visit: verdict and correction, then confirmation by other standards."""
    files, results, model = "demo_sets/service_visit", f"{RESULTS}/service_visit", "ethyl-acetate"
    record = f"--film {files}/film_after.dx --film-before {files}/film_before.dx"
    blank = f"--blank {files}/blank_after.dx --blank-before {files}/blank_before.dx"
    return [
        Step(
            "After the service visit: does the calibration still hold, and what restores it?",
            f"quant revalidate {RESULTS}/dryer_solvent/{model}.model --before {files}/before --after {files}/after "
            f"--reference {files}/reference.csv {record} {blank} --recipe configs/dryer_solvent.toml "
            f"--apply proposed --out {results}",
            writes=f"{results}/{model}-2.model",
            expected=NOT_ACCEPTED,
            remark=CHANGED,
        ),
        Step(
            "After the service visit: confirm the corrected model by standards that had no part in it",
            f"quant revalidate {results}/{model}-2.model --after {files}/confirmation "
            f"--reference {files}/confirmation.csv --out {results}/confirmation",
            writes=f"{results}/confirmation/{model}-3.model",
        ),
    ]


STEPS = [
    *steps_for(
        "dryer_solvent", "Residual solvent from the dryer", "ethyl-acetate.model", "demo_sets/dryer_solvent/new/*.dx"
    ),
    *steps_for(
        "starting_material", "Unreacted starting material", "nitrile-P1.model", "demo_sets/starting_material/new.csv"
    ),
    *steps_after_service(),
]

CLOSING = f"""\
Done. Open the reports in a browser; tables and models lie beside them:
    {{reports}}

What to try next:
    - Change a recipe in configs/ (another range, another step, fewer factors) and calibrate again.
    - {{activate}} makes quant a command of your shell; then: quant --help
    - Your own data: copy the recipe that is nearest, and name your files in it.
{RESULTS} may be deleted at any time.
"""


def main() -> int:
    """Run every step, and return 0 when each ended as it has to."""
    place = environment.prepared()
    (place.root / RESULTS).mkdir(exist_ok=True)
    for number, step in enumerate(STEPS, start=1):
        print(f"\n[{number}/{len(STEPS)}] {step.purpose}\n$ {step.command}", flush=True)
        problem, code = problem_with(step, place)
        if problem:
            print(f"\nThe demo stops here: {problem}.", file=sys.stderr)
            return code or NOT_ACCEPTED
        if step.remark:
            print(step.remark)
    reports = sorted((place.root / RESULTS).rglob("*.html"))
    scripts = place.programs.relative_to(place.root)
    activate = f"{scripts}\\activate" if sys.platform == "win32" else f"source {scripts}/activate"
    print("\n" + CLOSING.format(reports="\n    ".join(map(str, reports)), activate=activate), end="")
    return DONE


def problem_with(step: Step, place: environment.Environment) -> tuple[str, int]:
    """Run one step; return what went otherwise than expected (empty where nothing did) and the exit code."""
    written = place.root / step.writes if step.writes else None
    if written:
        written.unlink(missing_ok=True)  # else that of an earlier run would pass for this one's
    code = place.run(words_of(step.command))
    if code != step.expected:
        return f"exit code {code}, where {step.expected} was expected", code
    if written and not written.is_file():
        return f"exit code {code} was expected, but {step.writes} was not written", code
    return "", code


def words_of(command: str) -> list[str]:
    """Return the words of a command, those with * replaced by the files they match (as a shell does)."""
    words: list[str] = []
    for word in shlex.split(command):
        if "*" in word:
            matches = sorted(path.relative_to(environment.ROOT).as_posix() for path in environment.ROOT.glob(word))
            words += matches or [word]  # no match: the word itself, as in a shell; quant names the missing file
        else:
            words.append(word)
    return words


if __name__ == "__main__":
    sys.exit(main())
