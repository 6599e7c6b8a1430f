"""How a finding prints."""

from quant.inspection.finding import DOUBT, NOTE, STOP, Finding, by_gravity


def finding(gravity=DOUBT, samples=(), advice="Look."):
    return Finding(
        gravity=gravity, code="odd", title="Something odd", samples=samples, evidence="It is odd.", advice=advice
    )


def test_at_most_five_names_and_aligned_lines():
    assert str(finding(samples=tuple("ABCDEFG"))) == (
        "doubt  Something odd\n       A, B, C, D, E and 2 more.\n       It is odd.\n       → Look."
    )


def test_what_is_not_there_takes_no_line():
    assert str(finding(STOP, advice="")) == "stop   Something odd\n       It is odd."


def test_long_lines_are_broken():
    assert max(map(len, str(finding(advice="word " * 60)).splitlines())) <= 110


def test_the_gravest_first_otherwise_in_order():
    first, second = finding(NOTE), finding(NOTE, ("A",))
    assert by_gravity([first, finding(DOUBT), second, finding(STOP)]) == (
        finding(STOP),
        finding(DOUBT),
        first,
        second,
    )
