"""`allowance-unused`: an allowance that no finding of its step needed."""

from wellseq.checks.judging import check
from wellseq.wells.wells import Trouble, Unproved

NAME = "allowance-unused"
NEEDED = "well-too-shallow"


def case(make, depth_V, *numbers, name=NEEDED, **more):
    wells = make.wells(make.held(depth_V), **more.pop("wells", {}))
    allowances = [make.allow(name, number) for number in numbers]
    return make.case(wells=wells, allowances=allowances, **more)


def test_a_needed_one_is_used(make):
    assert make.verdicts(case(make, 0.1, 0), NEEDED) == ["allowed", "allowed"]
    assert make.verdicts(case(make, 0.1, 0), NAME) == []


def test_it_fails_where_the_finding_passes_and_at_another_step(make):
    (found,) = make.findings(case(make, 9.0, 0), NAME)
    assert found.message == "this step has no finding 'well-too-shallow' to allow"
    assert found.place == make.allow(NEEDED, 0).place
    assert make.verdicts(case(make, 0.1, 0, 5), NAME) == ["fail"]


def test_exactly_at_the_floor_it_is_not_needed(make, beyond):
    assert make.verdicts(case(make, 0.5, 0), NAME) == ["fail"]
    assert make.verdicts(case(make, beyond.down(0.5), 0), NAME) == []


def test_one_that_is_refused_is_not_reported_twice(make):
    assert make.verdicts(case(make, 9.0, 0, name="well-lost"), NAME) == []


def test_nothing_is_said_where_not_everything_was_examined(make):
    end = Unproved(Trouble.LOST, "pool", 0, 0, 0.0, 1e-6, 0.02, "lost")
    assert make.verdicts(case(make, 9.0, 0, wells={"unproved": (end,)}), NAME) == []
    assert make.verdicts(case(make, 9.0, 0, mistakes=[make.mistake("syntax")]), NAME) == []


def test_it_may_not_be_allowed(make):
    assert not check(NAME).WAIVABLE
