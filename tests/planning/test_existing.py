import numpy as np
import pytest

from quant.errors import FileFormatError, NotEnoughDataError
from quant.planning.existing import judge_file
from quant.planning.plan import plan

REST = '[mixture]\ntotal = 100\nbalance = "rest"\n[weighing]\nbatch = 10\nmass_uncertainty = 0.0002\n'


@pytest.fixture
def table(tmp_path):
    def write(text: str):
        (tmp_path / "t.csv").write_text(text, encoding="utf-8")
        return tmp_path / "t.csv"

    return write


def test_a_planned_design_is_judged_as_in_the_plan(make_plan, short_search, table):
    wanted = make_plan(2, standards=8, rest=REST)
    result = plan(wanted)
    for found in (judge_file(table(result.to_csv()), wanted), judge_file(table(result.to_csv()))):
        assert found.largest_correlation == pytest.approx(result.judgement.largest_correlation)
        assert found.condition == pytest.approx(result.judgement.condition)
        assert (found.balance, found.n_standards) == ("rest", 8)
        assert [spread.component for spread in found.components] == ["a", "b", "rest"]


def test_the_balance_may_be_missing_when_a_plan_is_given(make_plan, table):
    wanted = make_plan(2, standards=4, rest=REST)
    found = judge_file(table("sample,a,b\n1,1,1\n2,5,1\n3,1,9\n4,5,9\n"), wanted)
    assert found.components[2].component == "rest"
    assert (found.components[2].lowest, found.components[2].highest) == (86, 98)
    assert found.components[0].coverage == pytest.approx(50)
    assert found.unit == "% m/m"


def test_columns_of_text_and_sample_numbers_are_no_components(table):
    found = judge_file(table("id;operator;a;b\n1;X;1,5;1\n2;Y;2,5;4\n3;X;0,5;9\n"), decimal=",")
    assert [spread.component for spread in found.components] == ["a", "b"]
    assert found.components[0].highest == 2.5
    assert found.findings[0].startswith(
        "Columns taken as components, because they hold numbers: a, b; not taken: id, operator. If that is wrong"
    )


@pytest.mark.parametrize(
    ("text", "error", "message"),
    [
        ("sample,x\n1,p\n2,q\n", FileFormatError, "no column of numbers with '.' as decimal sign"),
        ("sample,a,b\n1,1,2\n2,,1\n3,4,4\n", FileFormatError, r"t\.csv, line 3: '' in column 'a', which elsewhere"),
        ("sample,a,b\n1,1,2\n2,nan,1\n3,4,4\n", FileFormatError, "'nan' in column 'a', which elsewhere holds numbers"),
        ("sample,a,900,902\n1,1,2,3\n2,3,1,4\n3,4,4,4\n", FileFormatError, "headed by numbers .900, 902., as spectra"),
        ("sample,a\n", FileFormatError, "no column of numbers"),
        ("sample,a,b\n1,1\n", FileFormatError, "found 2 cells; expected 3"),
        ("sample,a,b\n1,1,2\n2,2,1\n", NotEnoughDataError, r"2 standard\(s\); at least 3"),
    ],
)
def test_tables_that_cannot_be_judged(table, text, error, message):
    with pytest.raises(error, match=message):
        judge_file(table(text))


def test_a_component_of_the_plan_that_is_missing(make_plan, table):
    with pytest.raises(FileFormatError, match="'b'"):
        judge_file(table("sample,a\n1,1\n2,2\n3,3\n"), make_plan(2))
    with pytest.raises(NotEnoughDataError, match="0 standard"):
        judge_file(table("sample,a,b\n"), make_plan(2))


def test_judging_changes_nothing_random(table):
    rows = "".join(f"{i},{x},{y}\n" for i, (x, y) in enumerate(np.random.default_rng(1).random((9, 2)).tolist()))
    one, two = (judge_file(table(f"sample,a,b\n{rows}")).to_json() for _ in range(2))
    assert one == two
