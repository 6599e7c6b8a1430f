"""What every result can do: documented keys, and a form in JSON."""

import json
from dataclasses import FrozenInstanceError, dataclass, field
from datetime import UTC, datetime
from enum import Enum, IntEnum
from pathlib import Path

import numpy as np
import pytest

from quant.result import Result, documented, field_docs, jsonable


class Verdict(Enum):
    PASS = "pass"


class Code(IntEnum):
    DONE = 0


@dataclass(frozen=True, kw_only=True)
class Inner(Result):
    shift: float = documented("Mean shift", "cm⁻¹")


@dataclass(frozen=True, kw_only=True, eq=False)
class Outer(Result):
    values: object = documented("Any values", "% m/m")
    inner: Inner = documented("The other record")
    count: int = documented("How many", default=3)
    hidden: object = documented("Kept out of the JSON form", default=None, metadata={"json": False})


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        (np.array([[1.0, np.nan], [np.inf, 4.0]]), [[1.0, None], [None, 4.0]]),
        (np.float32(0.5), 0.5),
        (np.int64(3), 3),
        (np.True_, True),
        (float("-inf"), None),
        ((1, "a", None), [1, "a", None]),
        ({Verdict.PASS: {2: Path("/models/octane.model")}}, {"pass": {"2": "octane.model"}}),
        (Code.DONE, 0),
        (frozenset({"b", "a"}), ["a", "b"]),
        (datetime(2024, 2, 29, 12, tzinfo=UTC), "2024-02-29T12:00:00+00:00"),
        (np.array(["x", "y"]), ["x", "y"]),
    ],
)
def test_every_agreed_type_has_its_form_in_json(value, expected):
    record = Outer(values=value, inner=Inner(shift=0.25)).to_dict()
    assert record == {"values": expected, "inner": {"shift": 0.25}, "count": 3}


def test_enumerations_give_plain_values():
    assert type(jsonable(Code.DONE)) is int


def test_the_json_text_reads_back_and_knows_no_nan():
    result = Outer(values=[float("nan"), 1.5], inner=Inner(shift=-1.0), hidden=object())
    text = result.to_json()
    assert "NaN" not in text
    assert json.loads(text) == {"values": [None, 1.5], "inner": {"shift": -1.0}, "count": 3}


def test_a_type_without_agreed_form_is_refused_by_name():
    with pytest.raises(TypeError, match="a complex has no agreed form in JSON"):
        Outer(values=1j, inner=Inner(shift=0.0)).to_dict()


def test_the_documentation_names_exactly_the_keys_of_the_json_form():
    docs = field_docs(Outer)
    assert list(docs) == list(Outer(values=1, inner=Inner(shift=0.0)).to_dict())
    assert docs["values"] == "Any values [% m/m]"
    assert docs["count"] == "How many"


def test_a_field_without_documentation_is_refused_by_name():
    @dataclass(frozen=True, kw_only=True)
    class Bare(Result):
        good: int = documented("Good")
        silent: int = field(default=1)

    with pytest.raises(TypeError, match="Bare has undocumented fields: silent"):
        field_docs(Bare)


def test_results_are_frozen_and_those_without_comparison_are_only_equal_to_themselves():
    one, other = (Outer(values=np.zeros(2), inner=Inner(shift=0.0)) for _ in range(2))
    assert one != other
    assert {one: 1, other: 2}[one] == 1
    assert Inner(shift=1.0) == Inner(shift=1.0)
    with pytest.raises(FrozenInstanceError):
        one.count = 4
