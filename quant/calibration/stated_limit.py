"""The number behind a recipe's limit: stated, or of the built-in table of residual solvents."""

from quant.chemistry.solvent_limits import solvent_limit
from quant.errors import ParameterError, RecipeError
from quant.recipe.audit_schema import DecisionTable
from quant.recipe.reference_schema import AnalyteTable
from quant.spectra.concentration import convert_concentration

STATED = "stated in the recipe"


def stated_limit(table: DecisionTable, analyte: AnalyteTable) -> tuple[float, str]:
    """Return the limit in the unit of the analyte, and where it comes from.

    Parameters
    ----------
    table : DecisionTable
    analyte : AnalyteTable
        Its unit, and density and molar mass where the unit is no mass fraction.

    Raises
    ------
    RecipeError
        A solvent without a limit in the table, or a unit that the table's mg/kg cannot be converted to.
    """
    if table.limit is not None:
        return table.limit, STATED
    try:
        found = solvent_limit(table.solvent or "", table.dose)
        value = convert_concentration(
            [found.ppm], "mg/kg", analyte.unit, density=analyte.density, molar_mass=analyte.molar_mass
        )
    except ParameterError as problem:
        raise RecipeError(f"[decision] of {analyte.name}: {problem}") from None
    return float(value[0]), str(found)
