"""``quant plan``: what it prints and writes, and how it refuses."""

import json

import pytest

PLAN = """title = "Two solvents"
unit = "% m/m"
standards = 8

[[component]]
name = "acetone"
low = 0.5
high = 5

[[component]]
name = "toluene"
low = 0.5
high = 5

[mixture]
total = 100
balance = "powder"

[validation]
samples = 4
"""


@pytest.fixture
def planned(project, monkeypatch):
    monkeypatch.setattr("quant.planning.exchange._BUDGET", 2e4)
    (project.folder / "plan.toml").write_text(PLAN, encoding="utf-8")
    return project


def test_tables_are_printed_and_written(planned):
    out, validation, figures = (planned.folder / name for name in ("s.csv", "v.csv", "p.json"))
    result = planned.run(
        "plan", planned.folder / "plan.toml", "--out", out, "--validation", validation, "--json", figures
    )
    assert result.exit_code == 0
    assert "Two solvents" in result.stdout
    assert f"standards   {out}" in result.stdout
    assert out.read_text(encoding="utf-8").startswith("sample,origin,acetone,toluene,powder\nS01,blended,")
    assert validation.read_text(encoding="utf-8").count("\n") == 5
    assert json.loads(figures.read_text(encoding="utf-8"))["components"] == ["acetone", "toluene", "powder"]


def test_the_same_plan_gives_the_same_bytes(planned):
    written = []
    for name in ("one.csv", "two.csv"):
        planned.run("plan", planned.folder / "plan.toml", "--out", planned.folder / name)
        written.append((planned.folder / name).read_bytes())
    assert written[0] == written[1]


def test_an_existing_design_is_judged_with_and_without_a_plan(planned):
    table = planned.folder / "have.csv"
    table.write_text("sample,acetone,toluene\n1,1,1\n2,2,2.1\n3,3,3\n4,4,3.9\n", encoding="utf-8")
    alone = planned.run("plan", "--judge", table, "--json", planned.folder / "j.json")
    assert alone.exit_code == 0
    assert "Judgement of have.csv" in alone.stdout
    assert "acetone and toluene (r = +1.00)" in alone.stdout
    assert json.loads((planned.folder / "j.json").read_text(encoding="utf-8"))["n_standards"] == 4
    against = planned.run("plan", planned.folder / "plan.toml", "--judge", table)
    assert "Ranges not spanned to 95 %: acetone (67 %)" in against.stdout


@pytest.mark.parametrize(
    ("arguments", "code", "message"),
    [
        ((), 2, "Missing PLAN; expected a TOML file"),
        (("no.toml",), 3, "no such file"),
        (("--judge", "no.csv"), 3, "no such file"),
        (("--judge", "x.csv", "--out", "y.csv"), 2, "--judge makes no design"),
    ],
)
def test_wrong_usage(planned, arguments, code, message):
    result = planned.run("plan", *arguments)
    assert result.exit_code == code
    assert message in result.stderr


def test_a_wrong_plan(planned):
    planned.replace("plan.toml", "standards", "standard")
    result = planned.run("plan", planned.folder / "plan.toml")
    assert result.exit_code == 2
    assert "unknown key 'standard'. Did you mean 'standards'?" in result.stderr


def test_an_impossible_range(planned):
    planned.replace("plan.toml", "high = 5\n\n[[component]]", "high = 110\n\n[[component]]")
    result = planned.run("plan", planned.folder / "plan.toml")
    assert result.exit_code == 2
    assert "acetone 0.5 to 110: only 0.5 to 99.5 % m/m can be reached" in result.stderr


def test_validation_samples_that_are_not_planned(planned):
    planned.replace("plan.toml", "samples = 4", "samples = 0")
    result = planned.run("plan", planned.folder / "plan.toml", "--validation", planned.folder / "v.csv")
    assert result.exit_code == 2
    assert "the plan has [validation] samples = 0" in result.stderr


@pytest.mark.parametrize("option", ["--out", "--validation", "--json"])
def test_the_plan_is_not_written_over(planned, option):
    plan = planned.folder / "plan.toml"
    result = planned.run("plan", plan, option, plan)
    assert result.exit_code == 2
    assert f"{option} {plan}: this file is read by the command and would be lost." in result.stderr
    assert plan.read_text("utf-8") == PLAN


def test_two_tables_do_not_go_into_one_file(planned):
    table = planned.folder / "t.csv"
    result = planned.run("plan", planned.folder / "plan.toml", "--out", table, "--validation", table)
    assert result.exit_code == 2
    assert "name one file twice; expected a file each." in result.stderr
    assert not table.exists()


def test_a_judged_table_is_not_written_over(planned):
    table = planned.folder / "have.csv"
    table.write_text("sample,a\n1,1\n2,2\n3,3\n", encoding="utf-8")
    result = planned.run("plan", "--judge", table, "--json", table)
    assert result.exit_code == 2
    assert table.read_text("utf-8").startswith("sample,a")


def test_a_binary_file_is_no_plan(planned):
    (planned.folder / "plan.toml").write_bytes(b"PK\x03\x04\x00\x00")
    result = planned.run("plan", planned.folder / "plan.toml")
    assert result.exit_code == 2
    assert "plan.toml holds binary content; expected a recipe, which is a short text file in TOML." in result.stderr
