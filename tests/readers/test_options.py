"""Reading options: what is refused, and the way into a saved model and back."""

import pytest

from quant.errors import ParameterError
from quant.readers.options import ReadingOptions


@pytest.mark.parametrize(
    ("keywords", "words"),
    [
        ({"format": "binary"}, "format = 'binary'"),
        ({"separator": "|"}, "separator = '|'"),
        ({"decimal": "'"}, "decimal ="),
        ({"axis_unit": "furlong"}, "axis unit|axis_unit"),
        ({"quantity": "colour"}, "percent_transmittance"),
        ({"separator": ",", "decimal": ","}, "two different signs"),
        ({"sample_column": "a", "sample_label": "b"}, "sample_column and sample_label"),
        ({"resample": "yes"}, "true or false"),
        ({"notes": "ATR"}, "names and texts"),
    ],
)
def test_wrong_values_are_refused(keywords: dict[str, object], words: str) -> None:
    with pytest.raises(ParameterError, match=words):
        ReadingOptions(**keywords)


def test_only_what_was_set_is_kept_and_comes_back() -> None:
    options = ReadingOptions(format="matrix", sample_column="ID", notes={"resolution": 4}, resample=True)
    kept = options.to_dict()
    assert kept == {"format": "matrix", "sample_column": "ID", "notes": {"resolution": "4"}, "resample": True}
    assert ReadingOptions.from_dict(kept) == options
    assert ReadingOptions().to_dict() == {}
    assert hash(options) == hash(ReadingOptions.from_dict(kept))


def test_an_unknown_option_is_refused() -> None:
    with pytest.raises(ParameterError, match="No reading option seperator; expected one of format"):
        ReadingOptions.from_dict({"seperator": ";"})


def test_the_notes_given_are_copied() -> None:
    notes = {"technique": "ATR"}
    options = ReadingOptions(notes=notes)
    notes["technique"] = "other"
    assert options.notes == {"technique": "ATR"}
