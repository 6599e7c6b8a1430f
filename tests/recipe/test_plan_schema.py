"""What a plan may say, and how it is refused."""

import pytest

from quant.errors import RecipeError
from quant.planning.load import plan_from_text
from quant.recipe.plan_schema import Plan, PureSpectraTable

HEAD = 'title = "t"\nunit = "% m/m"\nstandards = 6\n'
A = '[[component]]\nname = "a"\nlow = 0\nhigh = 1\n'
B = A.replace('"a"', '"b"')
MIXTURE = '[mixture]\ntotal = 100\nbalance = "rest"\n'


def test_the_smallest_plan():
    plan = plan_from_text(HEAD + A)
    assert (plan.names, plan.seed, plan.mixture, plan.weighing) == (("a",), 1, None, None)
    assert (plan.validation.samples, plan.validation.rmsep_within) == (20, 30.0)


def test_the_balance_comes_last():
    plan = plan_from_text(HEAD + A + B + MIXTURE)
    assert plan.names == ("a", "b", "rest")
    assert plan.mixture.most == 100


def test_reading_options_are_those_of_a_recipe():
    table = PureSpectraTable(files=["x"], concentration=1.0, noise=0.1, axis_unit="nm", notes={"k": "v"})
    assert (table.options().axis_unit, table.options().notes) == ("nm", {"k": "v"})


def test_every_key_is_described():
    schema = Plan.model_json_schema()
    tables = [schema, *schema["$defs"].values()]
    bare = [f"{table['title']}.{key}" for table in tables for key, entry in table["properties"].items() if not entry]
    assert not bare
    for table in schema["$defs"].values():
        assert all("description" in entry for entry in table["properties"].values()), table["title"]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (HEAD + A.replace("high", "hihg"), r"\[component\] number 1: unknown key 'hihg'. Did you mean 'high'\?"),
        (HEAD + A.replace("low = 0\n", ""), r"\[component\] number 1: the key 'low' is missing"),
        (HEAD + A.replace("high = 1", "high = 0.0\n"), "high = 0.0; expected greater than 0"),
        (HEAD + A.replace("low = 0", "low = 2"), "low = 2 and high = 1 of 'a'; expected low below high"),
        (HEAD + A.replace("high = 1", "high = inf"), "high = inf; expected a finite number"),
        (HEAD + A + A, "more than one component is called a; expected one each"),
        (HEAD + A + MIXTURE.replace("rest", "a"), "more than one component is called a; expected one each"),
        (HEAD + A.replace('"a"', '"Sample"'), "a component is called Sample, as a column of the design is"),
        (HEAD.replace("6", "3") + A + B, "standards = 3 for 2 components; expected at least 4"),
        (HEAD + A + "levels = 7\n", "levels = 7 of 'a' but standards = 6; expected no more levels than standards"),
        (HEAD + A + "levels = 1\n", "levels = 1; expected greater than or equal to 2"),
        (HEAD + A + MIXTURE + "balance_low = 60\nbalance_high = 40\n", "expected them in rising order"),
        (HEAD + A + MIXTURE + "balance_high = 140\n", "balance_high = 140, total = 100; expected them in rising order"),
        (HEAD + A + "[validation]\nsamples = 1\n", "samples = 1; expected 0 for none, or at least 2"),
        (HEAD + A + "[weighing]\nbatch = 10\n", r"\[weighing\]: the key 'mass_uncertainty' is missing"),
        (
            HEAD + A + "[pure_spectra]\nfiles = ['x']\nconcentration = 1\nnoise = 0\n",
            "noise = 0; expected greater than 0",
        ),
        (
            HEAD + A + "[pure_spectra]\nfiles = ['x']\nconcentration = 1\nnoise = 1\nquantity = 'transmittance'\n",
            "quantity = 'transmittance'; expected 'absorbance', 'log_reflectance' or 'arbitrary'",
        ),
    ],
)
def test_what_is_wrong_is_told(text, message):
    with pytest.raises(RecipeError, match=message):
        plan_from_text(text)
