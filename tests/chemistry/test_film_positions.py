"""Polystyrene film: positions found on public pages; tolerances from memory of the pharmacopoeias."""

import pytest

from quant.chemistry.film_positions import EDITIONS, FilmBand, film_positions
from quant.errors import ParameterError


def test_seven_bands_from_high_to_low():
    positions = [band.position for band in film_positions().bands]
    assert positions == [3060.0, 2849.5, 1942.9, 1601.2, 1583.0, 1154.5, 1028.3]


def test_the_rules_differ_in_one_band_only():
    pairs = list(zip(film_positions("ph_eur").bands, film_positions("jp").bands, strict=True))
    assert [pair for pair in pairs if pair[0] != pair[1]] == [(FilmBand(2849.5, 2.0), FilmBand(2849.5, 1.5))]
    assert [band.tolerance for band in film_positions("jp").bands] == [1.5, 1.5, 1.5, 1.0, 1.0, 1.0, 1.0]


def test_every_rule_is_to_be_confirmed():
    assert all("to be confirmed against the edition in force" in words for words in EDITIONS.values())
    with pytest.raises(ParameterError, match="'ph_eur', 'jp'"):
        film_positions("usp")
