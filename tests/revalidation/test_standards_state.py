"""Labels, ages, and the sign of losses."""

from collections.abc import Callable

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.errors import SampleMismatchError
from quant.model.calibration import Calibration
from quant.recipe.load import recipe_from_text
from quant.revalidation.standards_state import standards_evidence
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import SampleSet, pair_samples
from quant.spectra.spectra_set import SpectraSet

RECIPE = 'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\nunit = "% m/m"\n'
DAYS = ("2026-03-01", "2026-04-01", "2026-05-01")
Make = Callable[..., SampleSet]


def samples_of(
    values: np.ndarray,
    true: np.ndarray,
    notes: list[dict[str, str]] | None = None,
    *,
    name: str = "acid",
    seed: int = 1,
) -> SampleSet:
    """Samples whose spectra show `true` and whose labels say `values`."""
    rng = np.random.default_rng(seed)
    axis = np.linspace(1800.0, 1600.0, 41)
    bands = np.stack([np.exp(-(((axis - centre) / 15) ** 2)) for centre in (1730.0, 1670.0)])
    spectra = 0.1 * np.stack([true, rng.uniform(4, 6, true.size)], axis=1) @ bands + rng.normal(
        0, 1e-3, (true.size, 41)
    )
    ids = [f"C{i + 1:02d}" for i in range(true.size)]
    table = ReferenceTable(ids, [Analyte(name, "% m/m")], values[:, None], notes)
    dated = SpectraSet(spectra, SpectralAxis(axis, "cm-1"), ids).with_notes({"date": "2026-06-01"})
    return pair_samples(dated, table)


@pytest.fixture(scope="module")
def model() -> Calibration:
    values = np.linspace(1.0, 9.0, 15)
    return calibrate(recipe_from_text(RECIPE + "[regression]\nfactors = 2"), samples_of(values, values)).model


VALUES = np.linspace(2.0, 8.0, 9)
AGED = [{"prepared": DAYS[i % 3]} for i in range(9)]
AGE_SHARE = np.array([1.0, 0.66, 0.34] * 3)


def test_low_and_worse_with_age_is_laid_on_the_standards(model: Calibration) -> None:
    found = standards_evidence(model, samples_of(VALUES, VALUES - 0.3 * AGE_SHARE, AGED, seed=2))
    assert found.all_low
    assert found.loss_suspected
    assert not found.trustworthy
    assert found.age_slope == pytest.approx(-0.3 * 0.66 / 61, rel=0.15)  # over 61 days from the oldest to the youngest
    assert "evaporation" in found.words[0]
    assert found.standards[0].age == 92


def test_low_alone_speaks_for_the_instrument(model: Calibration) -> None:
    found = standards_evidence(model, samples_of(VALUES, VALUES - 0.3, AGED, seed=2))
    assert found.all_low
    assert not found.loss_suspected
    assert found.trustworthy
    assert "speaks for the instrument" in found.words[0]


def test_high_and_rising_with_age_is_no_loss(model: Calibration) -> None:
    found = standards_evidence(model, samples_of(VALUES, VALUES + 0.3 * AGE_SHARE, AGED, seed=2))
    assert not found.loss_suspected
    assert not found.all_low


def test_without_ages_a_loss_cannot_be_told(model: Calibration) -> None:
    found = standards_evidence(model, samples_of(VALUES, VALUES - 0.3, seed=2))
    assert found.age_p is None
    assert "cannot be told from a change of the instrument" in found.words[0]
    assert "No age known for 9 of 9" in found.words[-1]


def test_good_standards_are_seldom_suspected(model: Calibration) -> None:
    suspected = [standards_evidence(model, samples_of(VALUES, VALUES, AGED, seed=s)).loss_suspected for s in range(60)]
    assert sum(suspected) <= 4  # both questions have to answer yes, together far below 5 %


def test_labels(model: Calibration) -> None:
    notes = [{**row, "sealed": "yes"} for row in AGED]
    notes[0] |= {"expires": "2026-05-31"}
    notes[1] |= {"expires": "2026-06-01"}
    notes[2] |= {"sealed": "no"}
    notes[3] |= {"sealed": "no", "reassayed": "2026-05-30"}
    found = standards_evidence(model, samples_of(VALUES, VALUES, notes, seed=2))
    assert [s.expired for s in found.standards[:3]] == [True, False, None]
    assert [s.sealed for s in found.standards[:4]] == [True, True, False, False]
    assert found.standards[3].age == 2  # the later assay counts
    assert not found.trustworthy
    assert "Measured after their use-by date: C01. Have them assayed again" in found.words
    assert "Opened since their value was determined, and not assayed again: C03" in found.words
    assert "C01" in str(found)


def test_what_does_not_fit_is_refused(model: Calibration) -> None:
    with pytest.raises(SampleMismatchError, match="expected acid"):
        standards_evidence(model, samples_of(VALUES, VALUES, name="water"))
    with pytest.raises(SampleMismatchError, match=r"C01: prepared is '31\.12\.26'"):
        standards_evidence(model, samples_of(VALUES, VALUES, [{"prepared": "31.12.26"}] * 9))


def test_few_standards_say_so(model: Calibration) -> None:
    found = standards_evidence(model, samples_of(VALUES[:3], VALUES[:3]))
    assert found.low_p is None
    assert "too few" in found.words[0]
