"""What every test may rely on: no screen, the same random examples each time, and where the project lies."""

import os
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings

os.environ.setdefault("MPLBACKEND", "Agg")  # before anything imports matplotlib

# No deadline, no complaint about slowness: neighbouring workers make times meaningless. Derandomised: a run that fails
# today failed for a reason that tomorrow's run shows too.
settings.register_profile("suite", deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow])
settings.load_profile("suite")


@pytest.fixture(scope="session")
def repository() -> Path:
    """The top of the project."""
    return Path(__file__).resolve().parent.parent
