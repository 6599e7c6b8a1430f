"""Plan the standards of a calibration before anyone weighs them."""

import numpy as np

from quant.arrays import FloatArray
from quant.checks import name_some
from quant.planning.design import design_standards, design_validation
from quant.planning.exchange import random_mixtures
from quant.planning.expected_error import ExpectedError, expected_errors
from quant.planning.judge import judge_design
from quant.planning.judgement import DesignJudgement
from quant.planning.precision import ValidationSize, validation_size
from quant.planning.pure_spectra import read_pure_spectra
from quant.planning.region import Region, region_of
from quant.planning.result import PlanResult
from quant.planning.weighing import WeighingPlan, plan_weighings
from quant.recipe.plan_schema import Plan

CAUTIONS = (
    "Solvents and chemicals: work under extraction, away from ignition sources, with the protection that the safety "
    "data sheets ask for. Check that the components may be mixed at all.",
    "Close vials at once: what evaporates is missing from the standard or from its spectrum. Weigh volatile components "
    "last, into the closed vial where possible, and weigh the vial again.",
    "Purities are taken as 100 %. Correct the masses for assay and water, and write down what was really weighed: the "
    "reference value is the mass weighed, not the mass planned.",
    "Prepare and measure in the order printed: it is random, so that a drift does not look like a concentration.",
    "Validation samples prove something only if they are prepared apart, from other weighings (and other stocks).",
    "Blends do not hold the matrix of process samples. Add process samples with laboratory values before process "
    "samples are predicted.",
    "Plan and calibration support, and do not replace, a qualified person's decision; local codes and the "
    "pharmacopoeia in force rule.",
)
_PROBES = 1500


def plan(plan: Plan) -> PlanResult:
    """Design standards and validation samples.

    The standards decorrelate the components and fill the space that ranges, total and constraints leave, by a seeded
    search (see `quant.planning.exchange`). The order in which the plan lists the components changes nothing but the
    order of the columns.

    Parameters
    ----------
    plan : Plan
        From `load_plan`.

    Returns
    -------
    PlanResult
        The designs, the judgement of the standards, weighings and expected errors.

    Raises
    ------
    RecipeError
        A constraint that cannot be read, or weighings whose unit does not fit.
    ParameterError
        Ranges that the total or the constraints do not allow, or fewer possible mixtures than standards.
    DataError
        Pure spectra that cannot be read, do not fit the components, or cannot be told apart.
    """
    region = region_of(plan)
    varied = design_standards(region, plan.standards, plan.seed)
    between = design_validation(region, plan.validation.samples, varied, plan.seed)
    standards, validation = (_in_plan_order(plan, region, amounts) for amounts in (varied, between))
    judgement = _judge(plan, region, standards)
    weighings = None if plan.weighing is None else plan_weighings(plan, standards, validation)
    expected, basis = _expected(plan, standards, validation, weighings)
    size = validation_size(plan.validation.samples, plan.validation.rmsep_within)
    return PlanResult(
        title=plan.title,
        unit=plan.unit,
        seed=plan.seed,
        components=plan.names,
        sample_ids=_ids("S", len(standards)),
        standards=standards,
        validation_ids=_ids("V", len(validation)),
        validation=validation,
        judgement=judgement,
        weighings=weighings,
        validation_size=size,
        expected=expected,
        expected_basis=basis,
        findings=(*_not_spanned(plan, validation), *_findings(plan, judgement, size, expected)),
        cautions=CAUTIONS,
    )


def _in_plan_order(plan: Plan, region: Region, amounts: FloatArray) -> FloatArray:
    """Put the columns into the plan's order and add the balance component."""
    columns = amounts[:, [region.names.index(table.name) for table in plan.component]]
    if plan.mixture is None:
        return columns
    rest = (plan.mixture.total - columns.sum(axis=1, keepdims=True)).round(12)
    return np.hstack([columns, rest])


def _judge(plan: Plan, region: Region, standards: FloatArray) -> DesignJudgement:
    possible = region.amounts(random_mixtures(region.free_of_levels(), _PROBES, np.random.default_rng([plan.seed, 2])))
    return judge_design(
        standards,
        plan.names,
        ranges=planned_ranges(plan, standards),
        balance=None if plan.mixture is None else plan.mixture.balance,
        unit=plan.unit,
        possible=_in_plan_order(plan, region, possible),
    )


def planned_ranges(plan: Plan, standards: FloatArray) -> FloatArray:
    """Return the ends of each component's range, shape (2, k); those of the balance are what the standards have. [unit]

    Parameters
    ----------
    plan : Plan
    standards : array of shape (n, k)
        Concentrations in the order of `plan.names`. [unit]
    """
    ends = [(table.low, table.high) for table in plan.component]
    if plan.mixture is not None:
        ends.append((float(standards[:, -1].min()), float(standards[:, -1].max())))
    return np.array(ends, dtype=np.float64).T


def _expected(
    plan: Plan, standards: FloatArray, validation: FloatArray, weighings: WeighingPlan | None
) -> tuple[tuple[ExpectedError, ...], str]:
    table = plan.pure_spectra
    if table is None:
        return (), "Not computed: it needs [pure_spectra], one spectrum of each component, and the noise."
    predicted = validation if len(validation) else standards
    found = expected_errors(
        read_pure_spectra(plan, table),
        plan.names,
        standards,
        predicted,
        table.noise,
        _laboratory(plan, weighings),
        closed=plan.mixture is not None,
    )
    basis = (
        f"For {len(plan.component)} factors, {len(standards)} standards, noise {table.noise:g} at a point, mean "
        f"leverage h = {found[0].leverage:.3g} of the {'validation samples' if len(validation) else 'standards'}. "
        "Against the truth: noise part² + shrinkage² + lab²·h; the noise part is about noise/SEN·sqrt(1 + h), the "
        "shrinkage is the pull to the mean that noise in the standards causes. RMSEP against reference values: plus "
        "lab². Baselines, path length, impurities and non-linearity come on top."
    )
    return found, basis


def _laboratory(plan: Plan, weighings: WeighingPlan | None) -> list[tuple[float, str]]:
    """Return the standard error of each component's reference values, and where it comes from."""
    stated = [table.laboratory_error for table in plan.component] + [None] * (plan.mixture is not None)
    if weighings is None:
        by_weight, source = [0.0] * len(stated), "none stated, taken as 0"
    else:
        by_weight = np.sqrt((weighings.uncertainties**2).mean(axis=0)).tolist()
        source = "that of the weighings, where none is stated"
    return [
        (by_weight[c], source) if error is None else (error, "as stated for the component")
        for c, error in enumerate(stated)
    ]


def _not_spanned(plan: Plan, validation: FloatArray) -> list[str]:
    """Tell where validation samples reach less of a range than ASTM E1655 asks for."""
    if not len(validation):
        return []
    width = np.array([table.high - table.low for table in plan.component])
    share = np.ptp(validation[:, : width.size], axis=0) / width
    narrow = [f"{plan.names[c]} ({100 * share[c]:.0f} %)" for c in np.flatnonzero(share < 0.95).tolist()]
    if not narrow:
        return []
    return [f"Validation samples span less than 95 % of the range: {name_some(narrow)}. Take more of them."]


def _findings(
    plan: Plan, judgement: DesignJudgement, size: ValidationSize, expected: tuple[ExpectedError, ...]
) -> tuple[str, ...]:
    found = []
    if size.planned < size.needed:
        found.append(
            f"{size.planned} validation samples; {size.needed} are needed to know RMSEP within ±{size.wanted:g} %."
        )
    if size.planned < judgement.e1655_validation:
        found.append(
            f"{size.planned} validation samples; ASTM E1655 asks for {judgement.e1655_validation} (the greater of 20 "
            "and 4 for each factor, from memory)."
        )
    by_name = {entry.component: entry for entry in expected}
    for table in plan.component:
        entry = by_name.get(table.name)
        if entry is not None and entry.against_reference > (table.high - table.low) / 10:
            found.append(
                f"{table.name}: the expected RMSEP of {entry.against_reference:.3g} {plan.unit} is more than a tenth "
                "of the range. Lower the noise (more scans), use a longer path, or widen the range."
            )
    return tuple(found)


def _ids(letter: str, n: int) -> tuple[str, ...]:
    width = max(2, len(str(n)))
    return tuple(f"{letter}{number:0{width}d}" for number in range(1, n + 1))
