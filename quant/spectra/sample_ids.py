"""Sample IDs: ranges of them, and finding them in file names."""

import re
from collections.abc import Iterable
from pathlib import PurePath

from quant.errors import ParameterError

LONGEST_RANGE = 100_000  # IDs

_DASH = re.compile(r"^(?P<head>.*?)(?P<first>\d+) *[-–—:] *(?P=head)(?P<last>\d+)$")
_RANGE = re.compile(r"^(?P<head>.*?)(?P<first>\d+)\.\.(?P=head)(?P<last>\d+)$")


def expand_ids(items: Iterable[object]) -> list[str]:
    """Write out ranges of sample IDs, ``"S08..S11"`` being S08, S09, S10, S11; other items stay as they are.

    Raises
    ------
    ParameterError
        A range that runs backwards or over more than 100 000 IDs.
    """
    ids: list[str] = []
    for item in items:
        text = str(item).strip()
        match = _RANGE.match(text)
        if match is None:
            ids.append(text)
            continue
        first, last = int(match["first"]), int(match["last"])
        if not first <= last <= first + LONGEST_RANGE:
            raise ParameterError(
                f"Sample range {text!r} runs from {first} to {last}; expected a rising range of at most "
                f"{LONGEST_RANGE} samples."
            )
        ids.extend(f"{match['head']}{number:0{len(match['first'])}d}" for number in range(first, last + 1))
    return ids


def range_hint(missing: Iterable[str]) -> str:
    """Return a sentence on how ranges are written if an ID that was not found looks like one, else nothing.

    >>> range_hint(["51-60"])
    " A range of samples is written '51..60'."
    """
    for name in missing:
        match = _DASH.match(name)
        if match and int(match["first"]) < int(match["last"]):
            head = match["head"]
            return f" A range of samples is written '{head}{match['first']}..{head}{match['last']}'."
    return ""


def notes_from_name(path: str | PurePath, pattern: str) -> dict[str, str]:
    r"""Return the named groups that a pattern finds in a file's name; the group ``sample`` is the sample ID.

    Parameters
    ----------
    path : str or path
        The file; only its name counts.
    pattern : str
        Regular expression with named groups, such as ``(?P<sample>[A-Z]+\d+)_(?P<replicate>\d+)``. It has to match
        from the start of the name.

    Raises
    ------
    ParameterError
        The pattern is no regular expression, has no group ``sample``, or does not match this name.
    """
    try:
        compiled = re.compile(pattern)
    except re.error as problem:
        raise ParameterError(f"sample_pattern {pattern!r} is no regular expression: {problem}.") from problem
    if "sample" not in compiled.groupindex:
        raise ParameterError(
            f"sample_pattern {pattern!r} has no group (?P<sample>...); expected one that marks the ID."
        )
    name = PurePath(path).name
    match = compiled.match(name)
    if match is None or not match["sample"]:
        raise ParameterError(
            f"sample_pattern {pattern!r} does not match the file name {name!r}; widen the pattern or leave the "
            "file out."
        )
    return {key: value for key, value in match.groupdict().items() if value is not None}
