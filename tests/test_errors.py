"""The family of errors: each has an exit code, and the tree that is drawn is the one that stands."""

import inspect
import re

import pytest

from quant import errors
from quant.errors import DataError, ExitCode, FileFormatError, QuantError, UsageError

FAMILY = [cls for _, cls in inspect.getmembers(errors, inspect.isclass) if issubclass(cls, QuantError)]


def test_exit_codes():
    assert [(code.name, int(code)) for code in ExitCode] == [
        ("DONE", 0),
        ("NOT_ACCEPTED", 1),
        ("USAGE", 2),
        ("DATA", 3),
        ("INTERRUPTED", 130),
    ]


@pytest.mark.parametrize("cls", FAMILY, ids=lambda cls: cls.__name__)
def test_each_is_a_value_error_of_one_branch(cls):
    assert issubclass(cls, ValueError)
    assert cls.__doc__
    if cls is not QuantError:
        assert issubclass(cls, UsageError) != issubclass(cls, DataError)
    assert cls.exit_code == (ExitCode.USAGE if issubclass(cls, UsageError) else ExitCode.DATA)


def test_the_tree_that_is_drawn_is_complete():
    drawn = re.findall(r"\b\w+Error\b", errors.__doc__.split("::", 1)[1])
    assert sorted(set(drawn) - {"ValueError"}) == sorted(cls.__name__ for cls in FAMILY)


def test_a_file_error_tells_the_place():
    error = FileFormatError("a/b.dx", "cut short", line=7)
    assert str(error) == "a/b.dx, line 7: cut short"
    assert (error.path.name, error.line) == ("b.dx", 7)
    assert str(FileFormatError("a/b.dx", "cut short")) == "a/b.dx: cut short"
