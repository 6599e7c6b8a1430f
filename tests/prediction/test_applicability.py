"""Whether the calibration speaks for a spectrum: limits, and how it was recorded."""

import numpy as np
import pytest

from quant.errors import AcquisitionMismatchError, QuantityError
from quant.model.calibration import Limits
from quant.prediction.applicability import acquisition_domain, check_acquisition, judge
from quant.prediction.predict import predict
from quant.spectra.spectra_set import SpectraSet

LIMITS = Limits(
    residual_warn=2.0, residual_stop=5.0, leverage_warn=0.4, leverage_stop=0.8, lowest=1.0, highest=9.0, margin_t=3.0
)
GOOD = {"residual": 1.0, "leverage": 0.2, "value": 5.0, "standard_error": 0.1}


@pytest.mark.parametrize(
    ("changed", "verdict", "reasons"),
    [
        ({}, "applicable", ()),
        ({"residual": 2.0, "leverage": 0.4, "value": 9.0}, "applicable", ()),  # on the limits
        ({"residual": 3.0}, "warning", ("residual spectrum 1.5 times its warning limit",)),
        ({"residual": 5.1}, "not applicable", ("residual spectrum 2.55 times its warning limit",)),
        ({"leverage": 0.6}, "warning", ("leverage 1.5 times its warning limit",)),
        ({"leverage": 1.2}, "not applicable", ("leverage 3 times its warning limit",)),
        ({"value": 9.2}, "warning", ("value outside the calibrated range 1 to 9",)),
        ({"value": 9.4}, "not applicable", ("value outside the calibrated range 1 to 9",)),
        ({"value": 0.8}, "warning", ("value outside the calibrated range 1 to 9",)),
        ({"value": 0.6}, "not applicable", ("value outside the calibrated range 1 to 9",)),
        (
            {"residual": 3.0, "leverage": 1.2},
            "not applicable",
            ("residual spectrum 1.5 times its warning limit", "leverage 3 times its warning limit"),
        ),
    ],
)
def test_each_limit(changed, verdict, reasons):
    found = judge(LIMITS, **{**GOOD, **changed})
    assert (found.verdict, found.reasons) == (verdict, reasons)


def test_good_samples_are_accepted_and_strange_ones_are_not(make_model, new_spectra):
    model = make_model()
    good = new_spectra(np.linspace(2, 8, 40), 7)
    verdicts = [row.applicability for row in predict(model, good).predictions]
    assert verdicts.count("not applicable") <= 3  # 99.9 % bound of 1 % among 40
    values = good.values + 0.05 * np.exp(-(((good.axis.values - 1630) / 8) ** 2))  # a band that no standard has
    strange = predict(model, SpectraSet(values, good.axis, good.sample_ids))
    assert {row.applicability for row in strange.predictions} == {"not applicable"}
    assert not strange.accepted


def test_domain_holds_what_every_spectrum_states():
    notes = [
        {"technique": "ATR", "resolution": "4", "batch": "1", "accessory": "diamond"},
        {"technique": "ATR", "resolution": "8", "batch": "1", "accessory": ""},
    ]
    assert acquisition_domain(notes) == {"technique": ("ATR",), "resolution": ("4", "8")}
    assert acquisition_domain([]) == {}


@pytest.mark.parametrize("same", ["4", "4.0", "4 cm-1", "4.00 CM-1", "4 cm⁻¹", "4 1/cm", ""])
def test_one_resolution_in_other_words(make_model, new_spectra, same):
    model = make_model(notes=[{"resolution": "4"}] * 15)
    check_acquisition(model, new_spectra(np.array([3.0]), 2, notes=[{"resolution": same}]))


@pytest.mark.parametrize(("note", "other"), [("resolution", "8"), ("technique", "transmission"), ("accessory", "ZnSe")])
def test_another_way_of_recording_is_refused(make_model, new_spectra, note, other):
    model = make_model(notes=[{"technique": "ATR", "resolution": "4", "accessory": "diamond"}] * 15)
    own = model.domain[note][0]
    new = new_spectra(np.array([3.0, 4.0, 5.0]), 2, notes=[{note: own}, {note: other}, {note: other}])
    with pytest.raises(
        AcquisitionMismatchError, match=f"{note} is {other} for S02, S03, but the calibration holds for {own}"
    ):
        predict(model, new)


def test_another_quantity_is_refused(make_model, new_spectra):
    with pytest.raises(
        QuantityError, match=r"The spectra are log 1/R, but the model was made from absorbance\. Export"
    ):
        predict(make_model(), new_spectra(np.array([3.0]), 2, quantity="log_reflectance"))
