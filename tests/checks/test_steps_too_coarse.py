"""`steps-too-coarse`: what is played against the wish, and half a code against the depth."""

import math
from fractions import Fraction

import pytest

from wellseq.checks.judging import check
from wellseq.model.trap import Margins
from wellseq.timeline.shipped import Stray

NAME = "steps-too-coarse"


def ramps(make, volts, allowances=()):
    trap = make.trap(margins=Margins(staircase_V=0.03))
    block = make.block(trap)
    strays = [Stray(0, "a", 0 * make.us, make.us, volts, 7)]
    shipped = make.shipped(trap, block, strays=strays)
    return make.case(trap, [block], shipped=shipped, allowances=allowances)


def depths(make, half_code_V, best_V):
    held = make.held(make.side(9.0, best_V, half_code_V=half_code_V), 9.0)
    return make.verdicts(make.case(wells=make.wells(held)), NAME)


def test_a_ramp_played_exactly_at_the_staircase_and_one_float_off(make, beyond):
    assert make.verdicts(ramps(make, 0.0), NAME) == ["pass"]
    assert make.verdicts(ramps(make, 0.03), NAME) == ["pass"]
    assert make.verdicts(ramps(make, beyond.up(0.03)), NAME) == ["fail"]
    (found,) = make.findings(ramps(make, 0.5), NAME)
    assert found.message == (
        "a is played up to 500 mV off the written ramp in 7 rows, at most 30 mV"
    )


def test_half_a_code_of_exactly_a_tenth_of_the_depth_and_one_float_more(make, beyond):
    assert depths(make, 0.2, 2.0) == ["pass"]
    assert sorted(depths(make, beyond.up(0.2), 2.0)) == ["fail", "pass"]
    assert check(NAME).SHARE_OF_DEPTH == 0.1


@pytest.mark.parametrize("bad", [(math.nan, 2.0), (0.1, math.nan)])
def test_what_is_not_known_is_unsure(make, bad):
    assert make.verdicts(ramps(make, math.nan), NAME) == ["unsure"]
    assert sorted(depths(make, *bad)) == ["pass", "unsure"]


def test_a_ramp_too_fast_for_its_clock_is_found_in_real_rows(make):
    trap = make.trap([make.converter("a")])

    def verdicts(duration_us):
        piece = make.piece("a", 0 * make.us, Fraction(duration_us) * make.us, 0.0, 20.0)
        return make.verdicts(make.case(trap, [make.block(trap, [piece])]), NAME)

    assert verdicts(100) == ["fail"]
    assert verdicts(100_000) == ["pass"]


def test_it_may_be_allowed(make):
    assert check(NAME).WAIVABLE
    assert make.verdicts(ramps(make, 0.5, [make.allow(NAME)]), NAME) == ["allowed"]
