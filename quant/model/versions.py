"""Versions of the programs that make a model."""

import platform
from importlib.metadata import PackageNotFoundError, version

import numpy as np

NOT_INSTALLED = "not installed"  # run from a checkout


def own_version() -> str:
    """Return the version of this program, or "not installed" where it runs from a checkout."""
    try:
        return version("quant")
    except PackageNotFoundError:
        return NOT_INSTALLED


def program_versions() -> dict[str, str]:
    """Return the versions that a model's numbers depend on, by program."""
    return {"quant": own_version(), "numpy": np.__version__, "python": platform.python_version()}
