"""`lag-too-long`: time constant and delay against a tenth of each motion's time."""

from dataclasses import replace
from fractions import Fraction

from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.checks.judging import check
from wellseq.timeline.timeline import Shape

NAME = "lag-too-long"


def case(make, duration, constant=Fraction(2), delay=Fraction(1), allowances=()):
    us = make.us
    filtered = make.converter("a", time_constant_s=constant * us, delay_s=delay * us)
    trap = make.trap([filtered, make.converter("b")])
    pieces = [make.piece(name, 0 * us, duration * us, 0.0, 1.0) for name in "ab"]
    return make.case(trap, [make.block(trap, pieces)], allowances=allowances)


def test_exactly_a_tenth_passes_and_a_nanosecond_less_time_fails(make):
    assert make.verdicts(case(make, Fraction(30)), NAME) == ["pass", "pass"]
    found = make.findings(case(make, Fraction(29999, 1000)), NAME)
    assert [(one.subject, one.verdict.value) for one in found] == [("a", "fail"), ("b", "pass")]
    assert found[0].message == (
        "a lags 3 us behind (time constant and delay) while it moves; "
        "at most 3 us, a tenth of that motion's time"
    )


def test_an_edge_as_fast_as_its_output_is_not_asked(make):
    short = case(make, Fraction(10))
    edges = [replace(piece, shape=Shape.EDGE) for piece in short.timeline.blocks[0].pieces]
    trap = short.trap
    assert make.verdicts(make.case(trap, [make.block(trap, edges)]), NAME) == []


def test_it_may_be_allowed(make):
    assert check(NAME).WAIVABLE
    short = case(make, Fraction(10), allowances=[make.allow(NAME)])
    assert make.verdicts(short, NAME) == ["allowed", "pass"]


def test_nothing_that_moves_is_clean(make):
    assert make.verdicts(make.case(), NAME) == []


@settings(deadline=None, max_examples=40)
@given(
    duration=st.fractions(Fraction(1, 100), 100, max_denominator=1000),
    constant=st.fractions(0, 10, max_denominator=1000),
    delay=st.fractions(0, 10, max_denominator=1000),
)
def test_the_tenth_is_exact(make, duration, constant, delay):
    fails = "fail" in make.verdicts(case(make, duration, constant, delay), NAME)
    assert fails == (constant + delay > duration / 10)
