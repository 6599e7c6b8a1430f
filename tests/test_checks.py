"""Checks of arguments: what passes comes back as numbers, what does not is told."""

import numpy as np
import pytest

from quant.checks import as_matrix, as_vector, name_some, one_of, paired_vectors
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError


@pytest.mark.parametrize(
    ("n", "most", "expected"),
    [(0, 5, ""), (1, 5, "0"), (5, 5, "0, 1, 2, 3, 4"), (6, 5, "0, 1, 2, 3, 4 and 1 more"), (9, 2, "0, 1 and 7 more")],
)
def test_at_most_so_many_are_named(n, most, expected):
    assert name_some(range(n), most) == expected
    assert name_some((str(i) for i in range(n)), most) == expected


def test_vectors():
    found = as_vector("x", [1, 2, 3])
    assert (found.dtype, found.tolist()) == (np.float64, [1, 2, 3])
    with pytest.raises(ParameterError, match=r"^x has shape \(1, 2\); expected one row of numbers, shape \(n,\)\.$"):
        as_vector("x", [[1, 2]])
    with pytest.raises(
        ParameterError, match=r"^x holds 2 value\(s\) that are not finite numbers, at position\(s\) 1, 2; "
    ):
        as_vector("x", [1, np.nan, -np.inf])


def test_matrices():
    assert as_matrix("x", [[1, 2]]).shape == (1, 2)
    with pytest.raises(ParameterError, match=r"^x has shape \(2,\); expected a table of numbers, shape \(n, k\)\.$"):
        as_matrix("x", [1, 2])
    with pytest.raises(
        ParameterError, match=r"^x holds numbers that are not finite, in row\(s\) 0, 2 \(counted from 0\)\.$"
    ):
        as_matrix("x", [[1, np.nan], [1, 2], [np.inf, 1]])


def test_pairs():
    a, b = paired_vectors("a", [1, 2], "b", [3, 4], least=2)
    assert (a.tolist(), b.tolist()) == ([1, 2], [3, 4])
    with pytest.raises(SampleMismatchError, match=r"^1 values of a but 2 of b; one each is expected\.$"):
        paired_vectors("a", [1], "b", [3, 4])
    with pytest.raises(NotEnoughDataError, match=r"^1 pair\(s\) of a and b; at least 2 are needed\.$"):
        paired_vectors("a", [1], "b", [3], least=2)
    with pytest.raises(ParameterError, match=r"^b holds"):
        paired_vectors("a", [1], "b", [np.nan])


def test_words():
    assert one_of("unit", "nm", ("nm", "um")) == "nm"
    with pytest.raises(ParameterError, match=r"^unit = 'mm'; expected one of 'nm', 'um'\.$"):
        one_of("unit", "mm", ("nm", "um"))
