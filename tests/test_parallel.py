"""Progress is shown to a reader and to nobody else."""

import io
import sys

import pytest

from quant.parallel import LONG_ENOUGH, progress


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


@pytest.mark.parametrize("n", [0, 1, LONG_ENOUGH - 1, LONG_ENOUGH, 100])
@pytest.mark.parametrize("kind", [io.StringIO, Terminal])
def test_every_item_comes_once_and_in_order(monkeypatch, n, kind):
    monkeypatch.setattr(sys, "stderr", kind())
    assert list(progress(range(n), "counting")) == list(range(n))


def test_nothing_is_written_to_a_pipe(monkeypatch, capsys):
    stream = io.StringIO()
    monkeypatch.setattr(sys, "stderr", stream)
    list(progress(range(100), "counting"))
    assert stream.getvalue() == ""
    assert capsys.readouterr().out == ""


def test_long_work_is_shown_on_a_terminal_and_short_work_is_not(monkeypatch):
    written = {}
    for n in (LONG_ENOUGH - 1, LONG_ENOUGH):
        stream = Terminal()
        monkeypatch.setattr(sys, "stderr", stream)
        list(progress(range(n), "counting"))
        written[n] = stream.getvalue()
    assert written[LONG_ENOUGH - 1] == ""
    assert "counting" in written[LONG_ENOUGH]
