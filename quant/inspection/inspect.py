"""Look spectra and reference values over before anything is modelled."""

from dataclasses import dataclass

from quant.inspection.finding import GRAVITIES, STOP, Finding, by_gravity, plural
from quant.inspection.gather import gather
from quant.inspection.picture import InspectionPicture, picture_of
from quant.inspection.summary import SetInspection, summarise
from quant.inspection.table import run_checks
from quant.recipe.pipeline import axis_behind, build_steps
from quant.recipe.schema import Recipe
from quant.result import Result, documented
from quant.spectra.sample_set import SampleSet


@dataclass(frozen=True, kw_only=True, eq=False)
class InspectionResult(Result):
    """What a recipe's files hold, and what is wrong with it."""

    title: str = documented("Title of the recipe")
    sets: tuple[SetInspection, ...] = documented("The calibration samples, then separate validation samples if named")
    pipeline: tuple[str, ...] = documented("Preprocessing steps in order")
    points: str = documented("Points before and after preprocessing")
    findings: tuple[Finding, ...] = documented("What was found, the gravest first")
    picture: InspectionPicture = documented("The numbers behind the pictures", metadata={"json": False})

    @property
    def accepted(self) -> bool:
        """Whether no finding is a stop."""
        return all(finding.gravity != STOP for finding in self.findings)

    def found(self, code: str) -> tuple[Finding, ...]:
        """Return the findings of one kind."""
        return tuple(finding for finding in self.findings if finding.code == code)

    def headline(self) -> str:
        """Say how many findings there are of each gravity: "1 stop, 2 doubts, 3 notes"."""
        return ", ".join(
            plural(sum(finding.gravity == gravity for finding in self.findings), gravity) for gravity in GRAVITIES
        )

    def __str__(self) -> str:
        """Title, the sets, the pipeline, then the findings with the gravest first."""
        steps = " → ".join(self.pipeline) or "none"
        pipeline = f"Preprocessing: {steps}\nPoints: {self.points}"
        return "\n\n".join(
            [self.title, *map(str, self.sets), pipeline, f"Findings: {self.headline()}", *map(str, self.findings)]
        )


def inspect(
    recipe: Recipe, *, samples: SampleSet | None = None, validation: SampleSet | None = None
) -> InspectionResult:
    """Read what a recipe names, without refusing what does not fit, and report what was found.

    Parameters
    ----------
    recipe : Recipe
    samples, validation : SampleSet, optional
        Samples at hand, looked over instead of reading the recipe's files.

    Returns
    -------
    InspectionResult
        `accepted` is false if a calibration from these data would be wrong.

    Raises
    ------
    QuantError
        Nothing can be read, nothing pairs, or the recipe names samples, ranges or steps that do not exist.
    """
    material = gather(recipe, samples, validation)
    axis = material.spectra.axis
    behind = axis_behind(build_steps(recipe, axis, material.spectra.quantity), axis)
    return InspectionResult(
        title=recipe.title,
        sets=tuple(summarise(reading, material.readings) for reading in material.readings),
        pipeline=tuple(str(table["step"]) for table in recipe.preprocessing),
        points=f"{len(axis)} read, {behind.size} behind the preprocessing",
        findings=by_gravity(run_checks(material)),
        picture=picture_of(material, behind),
    )
