"""Plans small enough to be looked through."""

from collections.abc import Callable

import pytest

from quant.planning import exchange
from quant.planning.load import plan_from_text
from quant.recipe.plan_schema import Plan


def plan_of(k: int = 3, standards: int = 12, low: float = 1, high: float = 9, top: str = "", rest: str = "") -> Plan:
    """Return a plan of components a, b, c ...; `top` goes before its tables, `rest` behind them."""
    head = f'title = "Test"\nunit = "g/L"\nstandards = {standards}\n{top}\n'
    body = "".join(f'[[component]]\nname = "{name}"\nlow = {low}\nhigh = {high}\n' for name in "abcdefgh"[:k])
    return plan_from_text((head + body + rest).replace('"g/L"', '"% m/m"' if "[mixture]" in rest else '"g/L"'))


@pytest.fixture(scope="session")
def make_plan() -> Callable[..., Plan]:
    return plan_of


@pytest.fixture
def short_search(monkeypatch: pytest.MonkeyPatch) -> None:
    """Search for a few hundredths of a second: enough where the quality of the design is not the question."""
    monkeypatch.setattr(exchange, "_BUDGET", 2e4)
