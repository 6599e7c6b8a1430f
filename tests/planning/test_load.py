import pytest

from quant.errors import FileFormatError, RecipeError
from quant.planning.load import load_plan, plan_from_text

SMALLEST = 'title = "t"\nunit = "g/L"\nstandards = 6\n[[component]]\nname = "a"\nlow = 0\nhigh = 1\n'


def test_a_file(tmp_path):
    (tmp_path / "plan.toml").write_text(SMALLEST, encoding="utf-8")
    plan = load_plan(tmp_path / "plan.toml")
    assert plan.names == ("a",)
    assert plan.folder == str(tmp_path)


def test_no_file(tmp_path):
    with pytest.raises(FileFormatError, match="no such file"):
        load_plan(tmp_path / "plan.toml")


def test_no_toml():
    with pytest.raises(RecipeError, match=r"mine is no valid TOML: .* Check quotes and brackets"):
        plan_from_text("title = ", name="mine")
