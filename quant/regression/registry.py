"""The regression methods a recipe can name."""

from quant.later import LaterTable
from quant.regression.method import Method

METHODS: LaterTable[type[Method]] = LaterTable(
    {
        "pls": "quant.regression.pls:PLS",
        "pcr": "quant.regression.pcr:PCR",
        "classical_least_squares": "quant.regression.classical_least_squares:ClassicalLeastSquares",
        "band_area": "quant.regression.band_area:BandArea",
    }
)
"""Regression methods: on factors (PLS, principal components), on pure spectra, and on the area of bands."""
