"""Recipes that are wrong: each with its exit code and the whole of its message."""

import pytest

USAGE, DATA = 2, 3
STEPS = (
    "absorbance, keep_ranges, leave_out_ranges, resample, snv, msc, emsc, unit_length, unit_area, normalise_band, "
    "savitzky_golay, gap_derivative, straight_baseline, detrend, asymmetric_baseline, orthogonal_removal, mean_centre, "
    "scale_columns"
)


def with_step(text: str) -> str:
    return f"[[preprocessing]]\n{text}\n\n[regression]"


def with_regression(text: str) -> tuple[str, str]:
    return "max_factors = 4", text


# What the recipe says instead, exit code, message.
RECIPES = {
    "misspelt key": (
        ("max_factors", "max_factor"),
        USAGE,
        "recipe.toml, [regression]: unknown key 'max_factor'. Did you mean 'max_factors'?",
    ),
    "key unlike any": (
        ("max_factors = 4", "zzz = 4"),
        USAGE,
        "recipe.toml, [regression]: unknown key 'zzz'. Keys there are: method, max_factors, factors, components, "
        "background, baseline, non_negative, bands, reference_band, through_origin, curve, line_weights, sd_column.",
    ),
    "missing key": (
        ('title = "Acid in a powder"\n', ""),
        USAGE,
        "recipe.toml: the key 'title' is missing. Add it.",
    ),
    "no TOML": (
        ("max_factors = 4", "max_factors ="),
        USAGE,
        "recipe.toml is no valid TOML: Invalid value (at line 18, column 14). Check quotes and brackets at that place.",
    ),
    "wrong type": (
        ("max_factors = 4", 'max_factors = "four"'),
        USAGE,
        "recipe.toml, [regression]: max_factors = 'four'; expected a valid integer or 'auto'.",
    ),
    "two problems at once": (
        ("max_factors = 4", 'method = "mlr"\nmax_factors = 0'),
        USAGE,
        "recipe.toml, [regression]: method = 'mlr'; expected 'pls', 'pcr', 'classical_least_squares' or 'band_area'.\n"
        "recipe.toml, [regression]: max_factors = 0; expected greater than or equal to 1 or 'auto'.",
    ),
    "unknown step": (
        ("[regression]", with_step('step = "snvv"')),
        USAGE,
        f"recipe.toml, [[preprocessing]] number 1: unknown step 'snvv'. Did you mean 'snv'? Steps there are: {STEPS}.",
    ),
    "no step": (
        ("[regression]", with_step("window = 9")),
        USAGE,
        f"recipe.toml, [[preprocessing]] number 1: no key 'step'. Steps there are: {STEPS}.",
    ),
    "unknown option of a step": (
        ("[regression]", with_step('step = "savitzky_golay"\nwindw = 9')),
        USAGE,
        "recipe.toml, [[preprocessing]] number 1, step 'savitzky_golay': unknown key 'windw'. Did you mean 'window'?",
    ),
    "option of a step that has none": (
        ("[regression]", with_step('step = "snv"\nwindow = 9')),
        USAGE,
        "recipe.toml, [[preprocessing]] number 1, step 'snv': unknown key 'window'. There are no keys here.",
    ),
    "wrong type of an option": (
        ("[regression]", with_step('step = "savitzky_golay"\nwindow = "9"')),
        USAGE,
        "recipe.toml, [[preprocessing]] number 1, step 'savitzky_golay': window = '9'; expected a valid integer.",
    ),
    "even window": (
        ("[regression]", with_step('step = "savitzky_golay"\nwindow = 8')),
        USAGE,
        "savitzky_golay: window = 8; expected an odd number of points, so that one is in the middle. Use 7 or 9.",
    ),
    "too many factors": (
        ("max_factors = 4", "max_factors = 12"),
        USAGE,
        "12 factors asked for under [regression], but the smallest training set has 11 samples of 41 points; at most "
        "10 are possible. Lower factors or max_factors, or add samples.",
    ),
    "bands missing": (
        with_regression('method = "band_area"'),
        USAGE,
        'recipe.toml, [regression]: method = "band_area" needs bands = [{ signal = "area", range = [from, to] }].',
    ),
    "factors for a band": (
        with_regression('method = "band_area"\nfactors = 3\nbands = [{ range = [1700, 1760] }]'),
        USAGE,
        'recipe.toml, [regression]: factors does not belong to method = "band_area"; remove it.',
    ),
    "bands for PLS": (
        with_regression("bands = [{ range = [1700, 1760] }]"),
        USAGE,
        'recipe.toml, [regression]: bands does not belong to method = "pls"; remove it.',
    ),
    "two ways to validate": (
        ("[regression]", '[validation]\nsamples = ["S01"]\nsplit = "random"\n\n[regression]'),
        USAGE,
        "recipe.toml, [validation]: samples and split given; expected exactly one of samples, note, files, split.",
    ),
    "one analyte twice": (
        ("[regression]", '[[analyte]]\nname = "acid"\n\n[regression]'),
        USAGE,
        "recipe.toml: more than one [[analyte]] is called acid; expected one each.",
    ),
    "one file for two models": (
        ("[regression]", '[[analyte]]\nname = "Acid!"\ncolumn = "acid"\n\n[regression]'),
        USAGE,
        "The models of 'acid', 'Acid!' would have one file name (acid.model); expected names that differ in letters "
        "or digits. Rename one [[analyte]].",
    ),
    "no group named": (
        ("[regression]", '[cross_validation]\nscheme = "leave_one_group_out"\n\n[regression]'),
        USAGE,
        'scheme = "leave_one_group_out" under [cross_validation] needs group = "<note>", such as group = "batch".',
    ),
    "no spectra": (
        ("spectra.csv", "spectre.csv"),
        DATA,
        "{folder}/spectre.csv: no such file. Check the path (recipes count paths from their own folder).",
    ),
    "excluded sample unknown": (
        ("[regression]", '[[exclude]]\nsamples = ["S11..S14"]\nreason = "spilt"\n\n[regression]'),
        DATA,
        "[[exclude]] names what is not among the 12 paired samples: S13, S14. Expected some of S01, S02, S03, S04, "
        "S05 and 7 more. Check the spelling.",
    ),
    "validation sample unknown": (
        ("[regression]", '[validation]\nsamples = ["S11..S14"]\n\n[regression]'),
        DATA,
        "No sample S13, S14 among the 12 paired samples (S01, S02, S03, S04, S05 and 7 more). Check the spelling of "
        "the sample IDs.",
    ),
    "everything for validation": (
        ("[regression]", '[validation]\nsamples = ["S01..S12"]\n\n[regression]'),
        DATA,
        "[validation] picks 12 of 12 samples; expected some, but not all.",
    ),
}


@pytest.mark.parametrize("case", RECIPES)
def test_recipes(project, case: str) -> None:
    (old, new), code, message = RECIPES[case]
    project.replace("recipe.toml", old, new)
    result = project.calibrate()
    assert result.stderr == f"Error: {message.format(folder=project.folder) if '{folder}' in message else message}\n"
    assert result.exit_code == code
    assert result.stdout == ""
    assert not (project.folder / "out").exists()
