"""`voltage-out-of-range`: the reach of a converter is its range through its calibration."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.checks.judging import check

NAME = "voltage-out-of-range"


def case(make, volts, start_V=0.0, **facts):
    trap = make.trap([make.converter("a", **facts)])
    piece = make.piece("a", 0 * make.us, 100 * make.us, start_V, volts)
    block = make.block(trap, [piece], volts={"a": start_V})
    quiet = make.block(trap)
    return make.case(trap, [block], shipped=make.shipped(trap, quiet))


def verdicts(make, *volts, **facts):
    return make.verdicts(case(make, *volts, **facts), NAME)


def test_inside_both_ends_pass_with_their_margins(make):
    low, high = sorted(make.findings(case(make, 60.0, -20.0), NAME), key=lambda f: f.limit)
    assert (low.verdict, low.value, low.margin) == ("pass", -20.0, 80.0)
    assert (high.verdict, high.value, high.margin) == ("pass", 60.0, 40.0)


@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_exactly_at_the_end_and_one_float_beyond(make, beyond, sign):
    assert set(verdicts(make, sign * 100.0)) == {"pass"}
    assert sorted(verdicts(make, sign * beyond.up(100.0))) == ["fail", "pass", "pass"]


def test_where_an_output_stands_at_first_counts_too(make):
    assert "fail" in verdicts(make, 0.0, 101.0)


def test_the_reach_is_that_of_the_calibration(make):
    facts = {"gain_with_spread": (0.99, 0.001), "offset_with_spread_V": (0.5, 0.1)}
    reach = 0.99 * 100.0 + 0.5
    assert set(verdicts(make, reach, **facts)) == {"pass"}
    (found,) = (f for f in make.findings(case(make, 99.9, **facts), NAME) if f.blocks)
    assert found.message == "a is asked for 99.9 V, at most 99.5 V is possible"
    assert found.hint == "a reaches from -98.5 V to 99.5 V at the electrode"


def test_a_voltage_that_is_not_known_is_unsure(make):
    assert "unsure" in verdicts(make, math.nan)


def test_it_may_not_be_allowed(make):
    assert not check(NAME).WAIVABLE


@settings(deadline=None, max_examples=40)
@given(volts=st.floats(-1e4, 1e4))
def test_it_fails_just_where_the_converter_cannot_go(make, volts):
    assert ("fail" in verdicts(make, volts)) == (abs(volts) > 100.0)
