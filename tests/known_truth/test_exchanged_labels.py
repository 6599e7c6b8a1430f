"""Exchanged labels are named, and clean sets hardly ever are suspected, on sets of the drying demo with known truth."""

from dataclasses import dataclass

import numpy as np
import pytest

from quant.inspection.exchange import exchange_statistic
from quant.inspection.gather import gather
from quant.inspection.left_out import make_smoothers
from quant.inspection.values import check_values
from quant.recipe.load import load_recipe
from quant.spectra.reference_table import ReferenceTable
from quant.spectra.sample_set import pair_samples

SEED = 20261201  # fixed before the first run, the one that `keep_result` writes down
N = 36  # standards
NOMINAL = 0.02


@dataclass
class Counts:
    """Sets in which something was said."""

    sets: int = 0
    named_first: int = 0  # exchanged pair: it, and before any other
    alarms: int = 0  # clean set: any pair
    taken_for_exchange: int = 0  # one wrong value: any pair
    naive: int = 0  # control, clean set: any exchange at all makes PRESS smaller


@pytest.fixture(scope="module")
def count(drying, repository):
    recipe = load_recipe(repository / "configs" / "dryer_solvent.toml").model_copy(update={"validation": None})

    def pairs_named(part, values):
        table = ReferenceTable(part.reference.sample_ids, part.reference.analytes, values, part.reference.notes)
        material = gather(recipe, pair_samples(part.spectra, table))
        findings = [finding for finding in check_values(material) if finding.code == "exchanged_labels"]
        return material, [set(finding.samples) for finding in findings]

    def count(n_sets: int) -> Counts:
        counts = Counts(sets=n_sets)
        for number in range(n_sets):
            rng = np.random.default_rng([SEED, number])
            part = drying.draw_set(rng, N, 4, 4).standards
            clean, ids = part.reference.values, part.reference.sample_ids
            material, named = pairs_named(part, clean)
            counts.alarms += bool(named)
            counts.naive += any_exchange_helps(material, clean[:, 0])
            third = np.ptp(clean) / 3
            i, j = rng.choice(np.argwhere(np.abs(clean - clean.T) >= third))
            exchanged = clean.copy()
            exchanged[[i, j]] = clean[[j, i]]
            _, named = pairs_named(part, exchanged)
            counts.named_first += named[:1] == [{ids[i], ids[j]}]
            wrong = clean.copy()
            wrong[i] += third
            counts.taken_for_exchange += bool(pairs_named(part, wrong)[1])
        return counts

    return count


def any_exchange_helps(material, values) -> bool:
    spectra = material.calibration.mean_by_sample(material.processed)
    smoothers = make_smoothers(spectra, np.arange(N))
    _, (i, j) = exchange_statistic(smoothers, values)
    swapped = values.copy()
    swapped[[i, j]] = values[[j, i]]
    press = [min(float(np.sum((each.errors @ y) ** 2)) for each in smoothers) for y in (values, swapped)]
    return press[1] < press[0]


def test_an_exchanged_pair_is_named_and_clean_sets_are_not_suspected(count, bounds):
    counts = count(30)
    assert counts.named_first >= bounds(30, 0.95)[0]
    most = bounds(30, NOMINAL)[1]
    assert counts.alarms <= most
    assert counts.taken_for_exchange <= most
    assert counts.naive > most  # known-bad control: to name whatever helps


@pytest.mark.long
def test_200_exchanged_pairs_and_200_clean_sets(count, keep_result):
    counts = count(200)
    keep_result(
        "exchanged_labels",
        {
            "sets": counts.sets,
            "named_first": counts.named_first,
            "clean_sets": counts.sets,
            "alarms": counts.alarms,
            "one_wrong_value_taken_for_exchange": counts.taken_for_exchange,
            "naive_alarms": counts.naive,
        },
    )
    assert counts.named_first >= 190
    assert counts.alarms <= 10
    assert counts.naive > 10
