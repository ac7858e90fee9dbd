"""`hazardous-output-live-at-end`: where the hardware stays after the last row."""

import math

import pytest

from wellseq.checks.judging import check
from wellseq.timeline.timeline import Edge

NAME = "hazardous-output-live-at-end"


def case(make, code, allowances=(), **facts):
    """A converter of 255 codes of 1 V from -100 V, moved by step 1 of two."""
    facts = {"range_V": (-100.0, 155.0), "bits": 8, "hazardous": True, **facts}
    trap = make.trap([make.converter("a", **facts)])
    us = make.us
    piece = make.piece("a", us, 90 * us, 0.0, 1.0, 1)
    block = make.block(trap, [piece], [(0 * us, us), (us, 90 * us), (90 * us, 99 * us)])
    shipped = make.shipped(trap, block, codes=[[100], [code]])
    return make.case(trap, [block], shipped=shipped, allowances=allowances)


def test_at_rest_passes(make):
    (found,) = make.findings(case(make, 100), NAME)
    assert (found.verdict, found.value, found.margin) == ("pass", 0.0, 60.0)


@pytest.mark.parametrize(("at", "beyond"), [(160, 161), (40, 39)])
def test_exactly_at_the_touch_limit_and_one_code_beyond(make, at, beyond):
    assert make.verdicts(case(make, at), NAME) == ["pass"]
    (found,) = make.findings(case(make, beyond), NAME)
    assert (found.verdict, found.value) == ("fail", 61.0)
    assert found.place == make.place(1)
    volts = "61 V" if beyond > at else "-61 V"
    assert found.message == f"after the last row a stays at {volts}; 60 V may be touched"


def test_what_is_not_hazardous_is_not_its_business(make):
    assert make.verdicts(case(make, 255, hazardous=False), NAME) == []


def test_within_the_spread_of_calibration_it_is_unsure(make):
    spread = {"offset_with_spread_V": (0.0, 0.5)}
    assert make.verdicts(case(make, 160, **spread), NAME) == ["unsure"]
    assert make.verdicts(case(make, 159, **spread), NAME) == ["pass"]


def switched(make, level, *levels, code=0, hazardous=True, edge=True):
    trap = make.trap(
        [
            make.switch("g", *levels, hazardous=hazardous),
            make.converter("b", range_V=(0.0, 255.0), bits=8),
        ]
    )
    edges = [Edge("g", make.us, make.us, 2 * make.us, 0, 1, 0)] if edge else []
    block = make.block(trap, edges=edges, spans=[(0 * make.us, 9 * make.us)])
    shipped = make.shipped(trap, block, codes=[[0], [code]], levels=[[0], [level]])
    return make.case(trap, [block], shipped=shipped)


def test_a_switch_is_live_at_its_level(make):
    (found,) = make.findings(switched(make, 1, "b", -4500.0), NAME)
    assert (found.verdict, found.value, found.place) == ("fail", 4500.0, make.place(0))
    assert make.verdicts(switched(make, 1, -4500.0, -60.0), NAME) == ["pass"]
    assert make.verdicts(switched(make, 1, -4500.0, -60.001), NAME) == ["fail"]


def test_a_switch_that_passes_a_converter_through_is_where_that_is(make):
    assert make.verdicts(switched(make, 0, "b", -4500.0, code=60), NAME) == ["pass"]
    assert make.verdicts(switched(make, 0, "b", -4500.0, code=61), NAME) == ["fail"]


def test_where_nothing_moved_it_points_at_the_end(make):
    (found,) = make.findings(switched(make, 1, "b", -4500.0, edge=False), NAME)
    assert found.place == make.place(99)


def test_a_voltage_that_is_not_known_is_unsure(make):
    # A trap file cannot say so; a trap built in code can.
    bad = make.converter("a", hazardous=True).model_copy(
        update={"offset_with_spread_V": (math.nan, 0.0)}
    )
    trap = make.trap().model_copy(update={"outputs": (bad, *make.trap().outputs[1:])})
    shown = make.block(make.trap())
    shipped = make.shipped(make.trap(), shown)
    assert make.verdicts(make.case(trap, [shown], shipped=shipped), NAME) == ["unsure"]


def test_it_may_be_allowed_where_it_was_brought_there(make):
    assert check(NAME).WAIVABLE
    assert make.verdicts(case(make, 255, [make.allow(NAME, 1)]), NAME) == ["allowed"]
    assert make.verdicts(case(make, 255, [make.allow(NAME, 2)]), NAME) == ["fail"]
