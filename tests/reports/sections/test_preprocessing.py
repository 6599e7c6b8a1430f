"""Steps in the words of a report."""

import numpy as np
import pytest

from quant.preprocessing.emsc import EMSC
from quant.preprocessing.normalise import NormaliseBand
from quant.preprocessing.ranges import KeepRanges
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.preprocessing.snv import SNV
from quant.reports.sections.preprocessing import describe_step

AXIS = np.arange(9.0)


@pytest.mark.parametrize(
    ("step", "words"),
    [
        (SNV(), "SNV"),
        (SavitzkyGolay(9, 2, 2, AXIS), "savitzky golay: derivative 2, polynomial 2, window 9"),
        (KeepRanges([(1800, 1700.5), (1650, 1600)], AXIS), "keep ranges: 1800 to 1700.5 and 1650 to 1600"),
        (
            NormaliseBand("area", (1620, 1590), baseline=(1620, 1590), axis=AXIS),
            "normalise band: baseline 1620 to 1590, range 1620 to 1590, signal area",
        ),
        (
            EMSC(1, np.ones((1, 9)), np.ones((2, 9)), AXIS),
            "EMSC: analytes 2 spectra, interferents 1 spectrum, polynomial 1",
        ),
    ],
)
def test_options_are_told(step, words):
    assert describe_step(step) == words
