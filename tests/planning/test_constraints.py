import pytest

from quant.errors import RecipeError
from quant.planning.constraints import parse_inequality

NAMES = ("water", "ethyl acetate", "2-propanol", "acetate")


@pytest.mark.parametrize(
    ("text", "coefficients", "bound"),
    [
        ("water <= 8", {"water": 1}, 8),
        ("water <= 0.5*ethyl acetate", {"water": 1, "ethyl acetate": -0.5}, 0),
        ("water<=0.5 * ethyl acetate + 3", {"water": 1, "ethyl acetate": -0.5}, 3),
        ("water + 2-propanol <= 14", {"water": 1, "2-propanol": 1}, 14),
        ("2*2-propanol >= 3", {"2-propanol": -2}, -3),
        ("acetate - water ≥ -1", {"acetate": -1, "water": 1}, 1),
        ("ethyl acetate / 4 <= 1e-1 + water * 2", {"ethyl acetate": 0.25, "water": -2}, 0.1),
        ("-water <= -.5", {"water": -1}, -0.5),
        ("10 <= water + water", {"water": -2}, -10),
        ("1 + water <= 3", {"water": 1}, 2),
    ],
)
def test_what_a_chemist_writes(text, coefficients, bound):
    found = parse_inequality(text, NAMES)
    assert dict(found.coefficients) == {**dict.fromkeys(NAMES, 0), **coefficients}
    assert found.bound == pytest.approx(bound, abs=1e-15)
    assert found.text == text


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("water = 3", r"has 0 sign\(s\) <= or >="),
        ("1 <= water <= 3", r"has 2 sign\(s\) <= or >="),
        ("watter <= 3", "'watter' is neither a component nor a number. Did you mean 'water'?"),
        ("waters <= 3", "'waters' is neither a component nor a number"),
        ("water <= ", "cannot be read as a sum of terms"),
        ("water * acetate <= 3", "cannot be read as a sum of terms"),
        ("3 / water <= 3", "cannot be read as a sum of terms"),
        ("water / 0 <= 3", "cannot be read as a sum of terms"),
        ("water acetate <= 3", r"two terms without \+ or - between them"),
        ("2 water <= 3", r"two terms without \+ or - between them"),
        ("water <= 1e400", "1e400 is beyond all numbers"),
        ("water - water <= 3", "says nothing of any component"),
        ("(water) <= 3", r"'\(water\)' is neither a component nor a number"),
    ],
)
def test_what_cannot_be_read_is_refused(text, message):
    with pytest.raises(RecipeError, match=message):
        parse_inequality(text, NAMES)
