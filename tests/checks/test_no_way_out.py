"""`no-way-out`: how much an outgoing particle climbs again beyond the barrier."""

import math

import pytest

from wellseq.checks.judging import check
from wellseq.wells.wells import Trouble, Unproved, WayOut

NAME = "no-way-out"


def verdicts(make, climb_V, uncertainty_V=0.0):
    way = WayOut("pool", 0, 0, 1e-6, climb_V, uncertainty_V)
    return make.verdicts(make.case(wells=make.wells(ways_out=(way,))), NAME)


def test_a_way_that_falls_all_along_passes(make):
    assert verdicts(make, 0.0) == ["pass"]


def test_a_hill_beyond_the_barrier_fails(make):
    way = WayOut("pool", 0, 0, 1e-6, 0.25, 0.0)
    (found,) = make.findings(make.case(wells=make.wells(ways_out=(way,))), NAME)
    assert found.verdict == "fail"
    assert found.message.startswith("what leaves the well of pool has to climb 250 mV again")


def test_exactly_at_the_limit_and_one_float_beyond(make, beyond):
    limit = check(NAME).LIMIT.value
    assert verdicts(make, limit) == ["pass"]
    assert verdicts(make, beyond.up(limit)) == ["fail"]
    assert verdicts(make, limit, 1e-9) == ["unsure"]


@pytest.mark.parametrize(("climb", "uncertainty"), [(math.nan, 0.0), (0.0, math.nan)])
def test_a_climb_that_is_not_known_is_unsure(make, climb, uncertainty):
    assert verdicts(make, climb, uncertainty) == ["unsure"]


@pytest.mark.parametrize(("sure", "verdict"), [(True, "fail"), (False, "unsure")])
def test_a_proof_that_ended_for_it(make, sure, verdict):
    end = Unproved(Trouble.NO_WAY_OUT, "pool", 0, 0, 0.0, 1e-6, 0.02, "shut in", sure=sure)
    assert make.verdicts(make.case(wells=make.wells(unproved=(end,))), NAME) == [verdict]


def test_it_may_be_allowed_and_nothing_let_out_is_clean(make):
    assert check(NAME).WAIVABLE
    assert make.verdicts(make.case(wells=make.wells(make.held(9.0))), NAME) == []
