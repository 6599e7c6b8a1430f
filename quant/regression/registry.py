"""The regression methods a recipe can name."""

from quant.regression.band_area import BandArea
from quant.regression.method import Method
from quant.regression.pls import PLS

METHODS: dict[str, type[Method]] = {
    "pls": PLS,
    "band_area": BandArea,
}
