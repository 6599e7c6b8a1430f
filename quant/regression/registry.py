"""The regression methods a recipe can name."""

from quant.regression.band_area import BandArea
from quant.regression.classical_least_squares import ClassicalLeastSquares
from quant.regression.method import Method
from quant.regression.pcr import PCR
from quant.regression.pls import PLS

METHODS: dict[str, type[Method]] = {
    "pls": PLS,
    "pcr": PCR,
    "classical_least_squares": ClassicalLeastSquares,
    "band_area": BandArea,
}
"""Regression methods: on factors (PLS, principal components), on pure spectra, and on the area of bands."""
