"""The front door: one sorted list of names, each of them there, and nothing public beside it."""

import subprocess
import sys
from pathlib import Path
from types import ModuleType

import pytest

import quant


def name_faults(module: ModuleType) -> list[str]:
    """Return what is wrong with the public names of a module."""
    names = list(getattr(module, "__all__", []))
    faults = [] if names else ["there is no __all__, or it is empty"]
    if names != sorted(set(names)):
        faults.append("__all__ is not sorted, or names something twice")
    faults += [f"{name} is in __all__ but cannot be imported" for name in names if not hasattr(module, name)]
    for name in sorted({*vars(module), *dir(module)}):
        room = isinstance(vars(module).get(name), ModuleType) and f"{module.__name__}.{name}" in sys.modules
        if not name.startswith("_") and name not in names and not room:
            faults.append(f"{name} is public but not in __all__")
    return faults


def test_the_front_door_offers_what_it_lists() -> None:
    assert name_faults(quant) == []


def test_a_name_that_is_not_there_is_refused_by_name() -> None:
    with pytest.raises(AttributeError, match="no_such_name"):
        quant.no_such_name  # noqa: B018 (asking for it is the test)


def test_every_listed_name_is_there_after_import_star(repository: Path) -> None:
    # In a fresh Python: the lazy front door has to load each name by itself.
    script = "import quant\nfrom quant import *\nprint(*sorted(set(quant.__all__) - set(globals())))"
    done = subprocess.run([sys.executable, "-c", script], cwd=repository, capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout.strip()) == (0, ""), done.stderr


def door(**names: object) -> ModuleType:
    """Return a module with these names."""
    module = ModuleType("door")
    vars(module).update(names)
    return module


@pytest.mark.parametrize(
    ("names", "fault"),
    [
        ({"__all__": ["b", "a"], "a": 1, "b": 2}, "__all__ is not sorted, or names something twice"),
        ({"__all__": ["a", "a"], "a": 1}, "__all__ is not sorted, or names something twice"),
        ({"__all__": ["a", "b"], "a": 1}, "b is in __all__ but cannot be imported"),
        ({"__all__": ["a"], "a": 1, "b": 2}, "b is public but not in __all__"),
        ({"__all__": ["a"], "a": 1, "Path": Path}, "Path is public but not in __all__"),
        ({"__all__": ["a"], "a": 1, "sys": sys}, "sys is public but not in __all__"),
        ({"_a": 1}, "there is no __all__, or it is empty"),
    ],
)
def test_each_fault_is_seen(names: dict[str, object], fault: str) -> None:
    assert name_faults(door(**names)) == [fault]


def test_a_good_door_is_left_alone() -> None:
    assert name_faults(door(__all__=["A", "a"], A=1, a=2, _b=3)) == []
