"""`species-too-close`: the least distance of wells that hold different species."""

import math

import pytest

from wellseq.checks.judging import check
from wellseq.model.trap import Margins
from wellseq.wells.wells import Separation

NAME = "species-too-close"


def case(make, least_m, one="electron", other="positron", allowances=()):
    pair = Separation(("pool", "bunch"), 0, 0.0, 1e-6, 0, least_m, True)
    trap = make.trap(margins=Margins(separation_m=0.004))
    wells = make.wells(separations=(pair,))
    return make.case(trap, wells=wells, allowances=allowances, pool=one, bunch=other)


def test_far_apart_passes_and_close_fails(make):
    assert make.verdicts(case(make, 0.02), NAME) == ["pass"]
    (found,) = make.findings(case(make, 0.003), NAME)
    assert (found.verdict, found.subject) == ("fail", "pool, bunch")
    assert found.message == "the wells of pool and bunch are 3 mm apart, at least 4 mm"


def test_exactly_at_the_limit_and_one_float_beyond(make, beyond):
    assert make.verdicts(case(make, 0.004), NAME) == ["pass"]
    assert make.verdicts(case(make, beyond.down(0.004)), NAME) == ["fail"]


def test_a_distance_that_is_not_known_is_unsure(make):
    assert make.verdicts(case(make, math.nan), NAME) == ["unsure"]


@pytest.mark.parametrize("kind", ["electron", "antiproton"])
def test_one_species_in_two_wells_is_not_its_business(make, kind):
    assert make.verdicts(case(make, 0.0, kind, kind), NAME) == []


def test_it_may_be_allowed(make):
    assert check(NAME).WAIVABLE
    assert make.verdicts(case(make, 0.0, allowances=[make.allow(NAME)]), NAME) == ["allowed"]
