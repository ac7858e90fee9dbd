"""`patch-not-stated`: depths below a volt need the contact potentials of the trap file."""

import pytest

from wellseq.checks.judging import check
from wellseq.model.effects import Claimed, Evaporated
from wellseq.model.trap import Margins
from wellseq.timeline.timeline import Event

NAME = "patch-not-stated"


def case(make, *effects, patch_V=None, depth_V=1.0, held=True):
    trap = make.trap(patch_V=patch_V, margins=Margins(depth_V=depth_V))
    events = [Event(0 * make.us, make.us, effect, 0) for effect in effects]
    wells = make.wells(make.held(9.0)) if held else make.wells()
    return make.case(trap, [make.block(trap, events=events)], wells=wells)


EFFECTS = [
    lambda volts: Evaporated("pool", ("A",), volts),
    lambda volts: Claimed("depth", "pool", volts, None),
    lambda volts: Claimed("depth", "pool", None, volts),
    lambda volts: Claimed("depth", "pool", volts, volts + 1.0),
]


@pytest.mark.parametrize("effect", EFFECTS)
def test_exactly_a_volt_passes_and_the_next_float_below_fails(make, beyond, effect):
    assert make.verdicts(case(make, effect(1.0)), NAME) == ["pass", "pass"]
    found = make.findings(case(make, effect(beyond.down(1.0))), NAME)
    assert [one.verdict.value for one in found] == ["pass", "fail"]
    assert found[1].place == make.place(0)


@pytest.mark.parametrize("effect", EFFECTS)
def test_once_stated_there_is_nothing_to_say(make, effect):
    for stated in (0.0, 0.025):
        assert make.verdicts(case(make, effect(0.01), patch_V=stated, depth_V=0.1), NAME) == []


def test_the_margin_counts_where_a_cloud_is_held(make, beyond):
    assert make.verdicts(case(make, depth_V=beyond.down(1.0)), NAME) == ["fail"]
    assert make.verdicts(case(make, depth_V=1.0), NAME) == ["pass"]
    assert make.verdicts(case(make, depth_V=0.1, held=False), NAME) == []


def test_other_claims_are_not_its_business_and_it_may_not_be_allowed(make):
    other = Claimed("separation", "pool", 0.01, None, other="bunch")
    assert make.verdicts(case(make, other), NAME) == ["pass"]
    assert not check(NAME).WAIVABLE
