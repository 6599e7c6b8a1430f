"""The marked regression vector."""

from dataclasses import replace

from quant.calibration.band_shares import ANALYTE, NOWHERE, RegionShare
from quant.calibration.chemistry import ChemistryResult
from quant.plots.chemistry import plot_marked_vector


def behind(*regions):
    shares = tuple(
        RegionShare(region=name, bands=(), ranges=ranges, n_points=1, n_contested=0, share=0.5)
        for name, ranges in regions
    )
    return ChemistryResult(verdict="", through="", reason="", shares=shares, declared=True, test=None, remarks=())


def test_known_regions_are_shaded_and_named_once(pls):
    given = behind((ANALYTE, ((1010.0, 1020.0), (1030.0, 1040.0))), (NOWHERE, ((990.0, 1000.0),)))
    ax = plot_marked_vector(replace(pls, chemistry=given))
    spans = [patch.get_extents().width for patch in ax.patches]
    assert len(spans) == 2
    assert [text.get_text() for text in ax.get_legend().get_texts()].count(ANALYTE) == 1


def test_without_chemistry_there_is_the_vector_alone(pls):
    ax = plot_marked_vector(replace(pls, chemistry=None))
    assert len(ax.patches) == 0
    assert len(ax.lines) >= 1
