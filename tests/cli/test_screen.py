"""``quant screen``: what it prints and leaves, and its exit codes."""

import json

import numpy as np
import pytest

SCREEN = """
[screen]
chains = [[], [{ step = "snv" }]]
[screen.ranges]
search = "windows"
block = 10
[screen.nested]
folds = 3
repeats = 1
[screen.chance]
permutations = 19
"""


@pytest.fixture
def screening(project):
    path = project.folder / "recipe.toml"
    path.write_text(path.read_text(encoding="utf-8") + SCREEN, encoding="utf-8")
    return project


def test_it_leaves_table_figures_picture_and_a_winner_that_calibrates(screening):
    out = screening.folder / "deep" / "out"
    result = screening.run("screen", screening.folder / "recipe.toml", "--out", out)
    assert result.exit_code == 0
    assert "RMSEP, nested" in result.stdout
    assert f"winner  {out / 'winner.toml'}" in result.stdout
    assert sorted(path.name for path in out.iterdir()) == [
        "candidates.csv",
        "screen.json",
        "windows.svg",
        "winner.toml",
    ]
    figures = json.loads((out / "screen.json").read_text(encoding="utf-8"))
    assert figures["n_candidates"] == 2 * 15
    assert (out / "candidates.csv").read_text(encoding="utf-8").count("\n") == 1 + 2 * 15
    again = screening.run("screen", screening.folder / "recipe.toml", "--out", out, "--workers", 2)
    assert again.stdout == result.stdout
    made = screening.run("calibrate", out / "winner.toml", "--out", out)
    assert made.exit_code == 0
    assert (out / "acid.model").exists()


def test_nothing_to_find_is_exit_code_1(screening):
    path = screening.folder / "reference.csv"
    rows = path.read_text(encoding="utf-8").split()
    values = [row.partition(",")[2] for row in rows[1:]]
    dealt = np.random.default_rng(20261201).permutation(values)
    lines = [f"{row.partition(',')[0]},{value}" for row, value in zip(rows[1:], dealt, strict=True)]
    path.write_text("\n".join([rows[0], *lines]), encoding="utf-8")
    result = screening.run("screen", screening.folder / "recipe.toml", "--out", screening.folder / "out")
    assert result.exit_code == 1
    assert "NOT BETTER THAN CHANCE" in result.stdout


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (("--workers", 0), "workers = 0"),
        (("--analyte", "base"), "No analyte 'base'"),
        (("--cluster", "nonsense"), "Nobody answers at 'nonsense'"),
    ],
)
def test_wrong_usage(screening, arguments, message):
    result = screening.run("screen", screening.folder / "recipe.toml", "--out", screening.folder / "out", *arguments)
    assert result.exit_code == 2
    assert message in result.stderr


def test_a_recipe_without_the_table(project):
    result = project.run("screen", project.folder / "recipe.toml", "--out", project.folder / "out")
    assert result.exit_code == 2
    assert "has no table [screen]" in result.stderr


def test_the_recipe_is_not_written_over_by_the_winner(screening):
    recipe = screening.folder / "winner.toml"
    (screening.folder / "recipe.toml").rename(recipe)
    before = recipe.read_bytes()
    result = screening.run("screen", recipe, "--out", screening.folder)
    assert result.exit_code == 2
    assert "this file is read by the command and would be lost" in result.stderr
    assert recipe.read_bytes() == before


def test_a_folder_that_cannot_be_written_to_is_told_before_the_search(screening, monkeypatch):
    monkeypatch.setattr("quant.screening.screen.screen", lambda *_, **__: pytest.fail("searched"))
    (screening.folder / "file").touch()
    result = screening.run("screen", screening.folder / "recipe.toml", "--out", screening.folder / "file" / "out")
    assert result.exit_code == 2
    assert "cannot be written to" in result.stderr
