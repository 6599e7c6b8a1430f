"""The number behind a recipe's limit: stated, or of the built-in table of residual solvents."""

from quant.recipe.audit_schema import DecisionTable

STATED = "stated in the recipe"


def stated_limit(table: DecisionTable, unit: str) -> tuple[float, str]:
    """Return the limit in the unit of the analyte, and where it comes from.

    Parameters
    ----------
    table : DecisionTable
    unit : str
        Unit of the analyte.
    """
    if table.limit is not None:
        return table.limit, STATED
    raise NotImplementedError
