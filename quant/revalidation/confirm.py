"""Writing what a revalidation calls for: the model with a remedy, or the provisional model confirmed."""

from dataclasses import replace

from quant.checks import name_some
from quant.errors import ParameterError, SampleMismatchError
from quant.model.calibration import Calibration, ModelState
from quant.model.identity import as_ancestor
from quant.model.lineage import Lineage, took_part
from quant.revalidation.remedies.apply import NOT_CONFIRMED, PROVISIONAL, apply_remedy
from quant.revalidation.result import RevalidationResult
from quant.revalidation.standards import files_among

PROPOSED = "proposed"


def correct_model(result: RevalidationResult, remedy: str = PROPOSED) -> Calibration:
    """Return the new, numbered model that a remedy makes; its state is provisional.

    Parameters
    ----------
    result : RevalidationResult
    remedy : str
        Name of the remedy; "proposed" is the one that the result proposes.

    Raises
    ------
    ParameterError
        None is proposed, an unknown remedy, or one that could not be fitted.
    """
    name = result.proposed if remedy == PROPOSED else remedy
    if not name:
        raise ParameterError(f"No remedy is proposed, since the verdict is: {result.verdict}. Name one to apply it.")
    return apply_remedy(result.standards, result.judged, name, verdict=result.told_verdict, sources=result.files)


def confirm_model(result: RevalidationResult) -> Calibration:
    """Return the new, numbered model that is provisional no longer.

    Its state is the one that its nearest ancestor had that was not provisional. That takes the verdict "holds" on
    standards that had no part in the remedy.

    Parameters
    ----------
    result : RevalidationResult
        Of the provisional model.

    Raises
    ------
    ParameterError
        The model is not provisional, or was not shown to hold.
    SampleMismatchError
        Standards, or files, that the model was made from.
    """
    model = result.standards.model
    own, standards = model.lineage, result.standards
    earlier = [entry.state.partition(" ")[0] for entry in own.ancestors]
    lifted = next((state for state in reversed(earlier) if state != PROVISIONAL), None)
    if model.state.name != PROVISIONAL or lifted is None:
        raise ParameterError(f"The model's state is {model.state.name}; only a provisional one is confirmed.")
    if not result.accepted:
        raise ParameterError(f"The verdict is: {result.verdict}; a model is confirmed only when it holds.")
    made_it = took_part(own)
    again = [sample for sample in result.sample_ids if sample in made_it]
    again += files_among(standards.after_spectra, (*own.made_from, *model.training))
    if again:
        raise SampleMismatchError(
            f"{name_some(again)} had a part in making the model; expected standards that had none. Measure others."
        )
    why = model.state.why.removesuffix(NOT_CONFIRMED)
    state = ModelState(
        name=lifted,
        why=f"{why}; confirmed by {len(result.sample_ids)} independent standards",
    )
    return replace(
        model,
        state=state,
        lineage=Lineage(
            number=own.number + 1,
            made_by="confirmation",
            verdict=result.told_verdict,
            made_from=result.files,
            samples=result.sample_ids,
            ancestors=(*own.ancestors, as_ancestor(model)),
        ),
    )
