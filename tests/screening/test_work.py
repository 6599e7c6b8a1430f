"""Workers: order, the same results on any number of them, interruption, clusters that do not answer."""

import os
import sys

import joblib
import pytest

from quant.errors import ParameterError, UsageError
from quant.screening.work import Workers, workers


def square(number):
    return number * number


def process(_):
    return os.getpid()


def interrupted_at_3(number):
    if number == 3:
        raise KeyboardInterrupt
    return number


def test_results_come_in_order():
    assert Workers().run(square, range(7), "squares") == ([n * n for n in range(7)], False)


def test_two_processes_give_the_same():
    assert Workers(2).run(square, range(7), "squares") == ([n * n for n in range(7)], False)
    assert os.getpid() not in Workers(2).run(process, range(4), "processes")[0]


def test_an_interruption_keeps_what_is_done():
    assert Workers().run(interrupted_at_3, range(7), "numbers") == ([0, 1, 2], True)


def test_other_errors_are_not_kept_quiet():
    with pytest.raises(ZeroDivisionError):
        Workers().run(lambda n: 1 / n, [0], "ratios")


def test_a_terminal_is_told_the_remaining_time(monkeypatch, capfd):
    monkeypatch.setattr(sys.stderr, "isatty", lambda: True)
    monkeypatch.setenv("TERM", "xterm")
    monkeypatch.setattr("rich.console.Console.is_terminal", True)
    assert Workers().run(square, range(30), "squares")[0][-1] == 29 * 29
    told = capfd.readouterr()
    assert "squares" in told.err
    assert told.out == ""


@pytest.mark.parametrize("number", [0, -2, True, 1.5])
def test_a_number_of_workers_that_is_none(number):
    with pytest.raises(ParameterError, match=r"workers = .* expected 1 or more"), workers(number):
        pass


def test_no_extra_for_clusters(monkeypatch):
    monkeypatch.setitem(sys.modules, "distributed", None)
    with pytest.raises(UsageError, match=r"pip install 'quant\[cluster\]'"), workers(1, "tcp://127.0.0.1:1"):
        pass


def test_nobody_answers_at_the_address():
    with pytest.raises(UsageError, match="Nobody answers at 'nonsense'"), workers(1, "nonsense"):
        pass


def test_never_more_processes_than_cores():
    with workers(100_000) as hands:
        assert hands.number == joblib.cpu_count()
