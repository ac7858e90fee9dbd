"""`off-clock`: what rounding to a clock moves, against what the step or the edge can bear."""

import math
from dataclasses import replace
from fractions import Fraction

from wellseq.checks.judging import check
from wellseq.model.effects import Caught
from wellseq.timeline.shipped import Rounding
from wellseq.timeline.timeline import Edge, Event

NAME = "off-clock"


def ramp(make, start, end):
    trap = make.trap([make.converter("a", between_rows="line")])
    piece = make.piece("a", start * make.us, end * make.us, 0.0, 1.0, 1)
    spans = [(0 * make.us, start * make.us), (start * make.us, end * make.us)]
    return make.case(trap, [make.block(trap, [piece], spans)])


def verdicts(make, case):
    return sorted(set(make.verdicts(case, NAME)))


def test_whole_clocks_pass(make):
    assert make.verdicts(ramp(make, 10, 30), NAME) == ["pass"]


def test_exactly_a_hundredth_of_the_step_and_a_picosecond_more(make):
    # A quarter of a clock of 1 us, in a ramp of 25 us.
    quarter, picosecond = Fraction(1, 4), Fraction(1, 10**6)
    start, end = 10 + quarter, 35 + quarter
    assert verdicts(make, ramp(make, start, end)) == ["pass"]
    assert verdicts(make, ramp(make, start, end + picosecond)) == ["fail", "pass"]
    assert verdicts(make, ramp(make, start, end - picosecond)) == ["fail", "pass"]


def test_the_message_says_how_far(make):
    (found,) = (f for f in make.findings(ramp(make, 10, Fraction(225, 10)), NAME) if f.blocks)
    assert found.message == "the clock of a moves this instant by 500 ns, at most 125 ns here"
    assert found.place == make.place(1)


def edge(make, command_ns, *, caught, spans=None):
    """A switch thrown at a time: an edge of 100 ns on a clock of 10 ns."""
    trap = make.trap([make.switch("g", 0.0, -60.0)])
    ns = make.ns
    at = Fraction(command_ns) * ns
    edges = [Edge("g", at, at, at + 125 * ns, 0, 1, 0)]
    events = [Event(0 * ns, 1000 * ns, Caught("pool", "G", "G"), 0)] if caught else []
    block = make.block(trap, spans=spans or [(0 * ns, 1000 * ns)], edges=edges, events=events)
    return make.case(trap, [block])


def test_an_instant_after_a_trigger_against_a_tenth_of_its_edge(make, monkeypatch):
    assert make.verdicts(edge(make, 404, caught=True), NAME) == ["pass"]
    assert make.verdicts(edge(make, 405, caught=True), NAME) == ["pass"]
    monkeypatch.setattr(check(NAME), "SHARE_OF_EDGE", Fraction(5, 100))
    assert make.verdicts(edge(make, 405, caught=True), NAME) == ["pass"]
    monkeypatch.setattr(check(NAME), "SHARE_OF_EDGE", Fraction(4999, 100000))
    assert make.verdicts(edge(make, 405, caught=True), NAME) == ["fail"]


def test_an_edge_of_another_step_may_move_by_a_tenth_of_itself_too(make):
    short = [(0 * make.ns, 250 * make.ns)]
    assert make.verdicts(edge(make, 104, caught=False, spans=short), NAME) == ["pass"]


def test_a_step_without_time_is_measured_against_the_shorter_beside_it(make):
    us = make.us
    trap = make.trap([make.converter("a")])
    spans = [(0 * us, 50 * us), (50 * us, 50 * us), (50 * us, 1000 * us)]
    block = make.block(trap, spans=spans)

    def of_error(error_s, shown=block):
        one = Rounding(1, "shutter", 50 * us, 50 * us + error_s)
        shipped = make.shipped(trap, shown, roundings=[one])
        return make.verdicts(make.case(trap, [shown], shipped=shipped), NAME)

    assert of_error(us / 2) == ["pass"]
    assert of_error(-us / 2) == ["pass"]
    assert of_error(us / 2 + Fraction(1, 10**15)) == ["fail"]
    alone = replace(block, spans=block.spans[1:2])
    assert of_error(0 * us, alone) == ["pass"]
    assert of_error(Fraction(1, 10**15), alone) == ["fail"]


def test_a_bound_that_is_not_known_is_unsure(make, monkeypatch):
    bad = property(lambda self: math.nan)
    monkeypatch.setattr(Rounding, "error_s", bad)
    assert "unsure" in verdicts(make, ramp(make, 10, Fraction(225, 10)))


def test_a_mistake_of_the_drawing_fails(make):
    assert make.verdicts(make.case(mistakes=[make.mistake(NAME)]), NAME) == ["fail"]


def test_it_may_be_allowed(make):
    case = make.case(mistakes=[make.mistake(NAME)], allowances=[make.allow(NAME)])
    assert make.verdicts(case, NAME) == ["allowed"]
