"""Left-out models come back as they were, and parts that do not fit together are refused."""

from dataclasses import replace

import numpy as np
import pytest

from quant.errors import ModelFileError, ParameterError
from quant.model.decision_rule import DecisionRule
from quant.model.storage import load_model, save_model


@pytest.fixture
def banded(model):
    if model.left_out is None:
        assert model.left_out_note.startswith("a preprocessing step learns")
        pytest.fail("asked of the wrong model")
    return model


@pytest.mark.parametrize("model", ["band_area"], indirect=True)
def test_they_come_back(banded, tmp_path):
    loaded = load_model(save_model(banded, tmp_path / "a.model"))
    for name in ("vectors", "offsets", "fold", "residuals", "left_out", "level"):
        ours, again = getattr(banded.left_out, name), getattr(loaded.left_out, name)
        assert again.tobytes() == ours.tobytes()
    assert loaded.left_out.note == banded.left_out.note


@pytest.mark.parametrize("model", ["band_area"], indirect=True)
@pytest.mark.parametrize(
    "changes",
    [
        {"fold": np.arange(12) + 1},
        {"residuals": np.zeros(11)},
        {"offsets": np.zeros(3)},
        {"vectors": np.full((12, 1), np.nan, dtype=np.float32)},
        {"level": np.zeros(2)},
    ],
)
def test_parts_that_do_not_fit_are_refused(banded, changes):
    with pytest.raises(ParameterError, match="left-out models"):
        replace(banded.left_out, **changes)


@pytest.mark.parametrize("model", ["band_area"], indirect=True)
def test_a_damaged_file_is_refused(banded, tmp_path):
    broken = replace(banded.left_out)
    object.__setattr__(broken, "offsets", np.zeros(3))
    path = save_model(replace(banded, left_out=broken), tmp_path / "a.model")
    with pytest.raises(ModelFileError, match="do not fit together"):
        load_model(path)


def test_a_rule_comes_back(model, tmp_path):
    rule = DecisionRule(limit=0.5, kind="upper", risk=0.05, factor=1.7, name="IPC 3", source="process description")
    told = replace(model, decision=rule, smallest_decidable=0.2, smallest_from="limit of quantification")
    loaded = load_model(save_model(told, tmp_path / "a.model"))
    assert loaded.decision == rule
    assert (loaded.smallest_decidable, loaded.smallest_from) == (0.2, "limit of quantification")
    assert rule.told("% m/m") == "IPC 3: upper limit 0.5 % m/m (process description), risk 5 %"
