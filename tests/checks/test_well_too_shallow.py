"""`well-too-shallow`: certified passes, a shallow wish fails, between is unsure."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.checks.judging import check

NAME = "well-too-shallow"


def verdicts(make, *sides):
    return make.verdicts(make.case(wells=make.wells(make.held(*sides, floor=0.7))), NAME)


def test_both_sides_deep_enough_pass_and_keep_their_margins(make):
    case = make.case(wells=make.wells(make.held(0.9, 2.0, floor=0.7)))
    left, right = make.findings(case, NAME)
    assert (left.verdict, left.subject, left.value) == ("pass", "pool, left", 0.9)
    assert left.margin == pytest.approx(0.2)
    assert right.margin == pytest.approx(1.3)
    assert left.place == make.place(0)


def test_a_wish_that_is_too_shallow_fails_and_names_the_largest_loss(make):
    side = make.side(0.4, 0.6, calibration_V=0.05, lag_V=0.15)
    (found, _) = make.findings(make.case(wells=make.wells(make.held(side, 2.0))), NAME)
    assert found.verdict == "unsure"
    assert found.message == (
        "the well of pool is 400 mV deep on its left side, 500 mV demanded; "
        "200 mV is taken off, most of it (150 mV) for lag behind the filters"
    )
    assert verdicts(make, make.side(0.4, 0.6), 2.0) == ["fail", "pass"]


def test_exactly_at_the_floor_passes_and_the_next_float_below_does_not(make, beyond):
    for best in (0.7, 0.7000000001, 0.9, 1234.5):
        assert verdicts(make, make.side(0.7, best)) == ["pass", "pass"]
        low = make.side(beyond.down(0.7), best)
        assert verdicts(make, low) == ["unsure", "unsure"]
    low = beyond.down(0.7)
    assert verdicts(make, make.side(low, low)) == ["fail", "fail"]


@pytest.mark.parametrize("bad", [(math.nan, 1.0), (1.0, math.nan), (math.nan, math.nan)])
def test_a_depth_that_is_not_known_is_unsure(make, bad):
    assert verdicts(make, make.side(*bad), 2.0) == ["unsure", "pass"]


def test_a_lowered_floor_is_the_one_that_counts(make):
    case = make.case(wells=make.wells(make.held(0.05, floor=0.048)))
    assert make.verdicts(case, NAME) == ["pass", "pass"]


def test_a_bunch_counts_from_ground(make):
    held = make.held(900.0, floor=1000.0, energetic=True)
    (found, _) = make.findings(make.case(wells=make.wells(held)), NAME)
    assert "900 V deep from ground on its left side" in found.message


def test_of_many_stretches_the_worst_of_a_failing_step_and_the_least_pass_are_kept(make):
    stretches = [
        make.held(depth, 9.0, number=number, start=make.us * n, end=make.us * (n + 1))
        for n, (depth, number) in enumerate([(1.0, 0), (0.9, 0), (0.3, 1), (0.2, 1), (0.1, 2)])
    ]
    spans = [(make.us * n, make.us * (n + 1)) for n in range(3)]
    trap = make.trap()
    case = make.case(trap, [make.block(trap, spans=spans)], wells=make.wells(*stretches))
    found = [(f.value, f.place.line) for f in make.findings(case, NAME) if "left" in f.subject]
    assert found == [(0.9, 1), (0.2, 2), (0.1, 3)]


def test_it_may_be_allowed(make):
    case = make.case(wells=make.wells(make.held(0.1)), allowances=[make.allow(NAME)])
    assert check(NAME).WAIVABLE
    assert make.verdicts(case, NAME) == ["allowed", "allowed"]


@settings(deadline=None, max_examples=40)
@given(low=st.floats(-1e3, 1e3), more=st.floats(0, 1e3), deeper=st.floats(0, 1e3))
def test_a_deeper_well_is_never_judged_worse(make, low, more, deeper):
    order = ["fail", "unsure", "pass"]
    before = verdicts(make, make.side(low, low + more))[0]
    after = verdicts(make, make.side(low + deeper, low + more + deeper))[0]
    assert order.index(after) >= order.index(before)
