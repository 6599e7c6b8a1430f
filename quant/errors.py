"""Every error the program raises on purpose, drawn as a tree.

::

    QuantError (a ValueError)           what was found, what was expected, what to do
    ├── UsageError                      exit code 2: the question is wrong
    │   ├── RecipeError                 the recipe cannot be read or contradicts itself
    │   └── ParameterError              a parameter of a function, step or method is out of bounds
    └── DataError                       exit code 3: the data cannot answer it
        ├── FileFormatError             a file is damaged or of another form
        ├── AxisMismatchError           spectra do not share one axis
        ├── AcquisitionMismatchError    a spectrum was recorded in another way than the calibration's
        ├── QuantityError               transmittance where absorbance is needed, T ≤ 0, ...
        ├── SampleMismatchError         spectra and reference values do not fit together
        ├── NotEnoughDataError          too few samples, or samples that do not differ
        └── ModelFileError              a saved model is damaged, or no longer predicts what it did
"""

from enum import IntEnum
from pathlib import Path


class ExitCode(IntEnum):
    """What the command line returns to its caller."""

    DONE = 0
    NOT_ACCEPTED = 1
    USAGE = 2
    DATA = 3
    INTERRUPTED = 130


class QuantError(ValueError):
    """Any error that is the input's and not the program's."""

    exit_code = ExitCode.DATA


class UsageError(QuantError):
    """The question is wrong: a recipe, an option or a parameter."""

    exit_code = ExitCode.USAGE


class RecipeError(UsageError):
    """A recipe cannot be read, holds an unknown key, or contradicts itself."""


class ParameterError(UsageError):
    """A parameter of a function, a step or a method is out of its bounds."""


class DataError(QuantError):
    """The data cannot answer the question."""


class FileFormatError(DataError):
    """A file is damaged, or is not of the form it was taken for.

    Parameters
    ----------
    path : str or Path
        The file.
    problem : str
        What was found, what was expected, what to do.
    line : int, optional
        The line, counted from 1.
    """

    def __init__(self, path: str | Path, problem: str, line: int | None = None) -> None:
        self.path = Path(path)
        self.line = line
        place = f"{path}, line {line}" if line is not None else f"{path}"
        super().__init__(f"{place}: {problem}")


class AxisMismatchError(DataError):
    """Spectra do not share one axis, or not the model's."""


class AcquisitionMismatchError(DataError):
    """A spectrum was recorded in another way than those of the calibration."""


class QuantityError(DataError):
    """The ordinate is not what the calculation needs."""


class SampleMismatchError(DataError):
    """Spectra and reference values do not fit together."""


class NotEnoughDataError(DataError):
    """Too few samples, or samples that do not differ from each other."""


class ModelFileError(DataError):
    """A saved model is damaged, or no longer predicts what it did."""
