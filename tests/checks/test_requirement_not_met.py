"""`requirement-not-met`: the author's own claims, judged on intervals."""

import math

import pytest

from wellseq.checks.judging import check
from wellseq.model.effects import Claimed
from wellseq.timeline.timeline import Event
from wellseq.wells.wells import Separation, Trouble, Unproved

NAME = "requirement-not-met"
# Four steps of 10 us each, a claim at the end of each: steps 0, 2, 4, 6; claims 1, 3, 5, 7.
STEPS = 4


def claim(quantity="depth", lowest=None, highest=None, cloud="pool", **more):
    return Claimed(quantity, cloud, lowest, highest, **more)


def case(make, wells, *claims, labels=None, blocks=1, **clock):
    """`claims` are (step index, claim); several blocks repeat the same four steps."""
    us, trap = make.us, make.trap()
    spans = [(10 * (n // 2 + n % 2) * us, 10 * (n // 2 + 1) * us) for n in range(2 * STEPS)]
    shown = []
    for index in range(blocks):
        first = 2 * STEPS * index
        events = [
            Event(spans[n - first][0], spans[n - first][1], one, n)
            for step, one in claims
            if first <= (n := 2 * step + 1) < first + 2 * STEPS
        ]
        facts = clock if index else {}
        shown.append(
            make.block(trap, spans=spans, events=events, index=index, first_number=first, **facts)
        )
    return make.case(trap, shown, wells=wells, labels=labels)


def held_at(make, step, *sides, block=0, **more):
    times = {"start": 10 * step * make.us, "end": 10 * (step + 1) * make.us}
    return make.held(*sides, number=2 * step, block=block, **times, **more)


def wells(make, *depths):
    return make.wells(*(held_at(make, step, depth, 99.0) for step, depth in enumerate(depths)))


def verdicts(make, known, *claims, **more):
    return make.verdicts(case(make, known, *claims, **more), NAME)


# depth


def test_depth_is_the_least_over_the_step_before(make, beyond):
    known = wells(make, 1.0, 5.0, 2.0, 9.0)
    assert verdicts(make, known, (1, claim(lowest=5.0))) == ["pass"]
    assert verdicts(make, known, (1, claim(lowest=beyond.up(5.0)))) == ["fail"]
    (found,) = make.findings(case(make, known, (2, claim(lowest=3.0))), NAME)
    assert found.message == "depth of pool is 2 V, required above 3 V"
    assert found.place == make.place(5)


def test_a_bunch_without_a_temperature_is_as_deep_as_its_gates(make):
    cold = held_at(make, 1, 55.0, 55.0)
    gates = held_at(make, 1, 4000.0, 4100.0, energetic=True)
    known = make.wells(cold, gates)
    assert verdicts(make, known, (1, claim(lowest=4000.0))) == ["pass"]
    assert verdicts(make, make.wells(cold), (1, claim(lowest=4000.0))) == ["fail"]


def test_throughout_reaches_back_to_the_last_label(make):
    known = wells(make, 1.0, 5.0, 2.0, 9.0)
    bound = (3, claim(lowest=2.0, throughout=True))
    assert verdicts(make, known, bound) == ["fail"]
    assert verdicts(make, known, bound, labels={2: "deep"}) == ["pass"]
    assert verdicts(make, known, (3, claim(lowest=3.0, throughout=True)), labels={2: "deep"}) == [
        "fail"
    ]
    assert verdicts(make, known, (3, claim(lowest=3.0, throughout=True)), labels={6: "last"}) == [
        "pass"
    ]


def test_only_a_certified_depth_passes_and_only_a_wished_one_fails(make):
    known = wells(make, make.side(4.0, 5.0, noise_V=1.0))
    for bound, verdict in ((4.0, "pass"), (4.5, "unsure"), (5.0, "unsure"), (5.1, "fail")):
        assert verdicts(make, known, (0, claim(lowest=bound))) == [verdict]


def test_below_a_bound_what_was_taken_off_may_be_there_after_all(make):
    known = wells(make, make.side(4.0, 5.0, noise_V=1.0))
    for bound, verdict in ((6.0, "pass"), (5.5, "unsure"), (4.0, "unsure"), (3.9, "fail")):
        assert verdicts(make, known, (0, claim(highest=bound))) == [verdict]


def test_between_is_two_claims(make):
    known = wells(make, 5.0)
    assert verdicts(make, known, (0, claim(lowest=4.0, highest=6.0))) == ["pass"]
    (low, high) = sorted(
        make.findings(case(make, known, (0, claim(lowest=6.0, highest=4.0))), NAME),
        key=lambda found: found.limit,
    )
    assert (low.verdict, high.verdict) == ("fail", "fail")


def test_the_greatest_depth_throughout_is_not_measured(make):
    known = wells(make, 5.0)
    assert verdicts(make, known, (0, claim(highest=50.0, throughout=True))) == ["unsure"]


def test_nothing_held_or_not_known_is_unsure(make):
    assert verdicts(make, wells(make), (0, claim(lowest=1.0))) == ["unsure"]
    assert verdicts(make, wells(make, 5.0), (0, claim(lowest=1.0, cloud="bunch"))) == ["unsure"]
    assert verdicts(make, wells(make, math.nan), (0, claim(lowest=1.0))) == ["unsure"]
    assert verdicts(make, wells(make, 5.0), (2, claim(lowest=1.0))) == ["unsure"]


def test_a_cloud_that_was_lost_meanwhile_is_not_known(make):
    end = Unproved(Trouble.LOST, "pool", 0, 2, 12e-6, 13e-6, 0.02, "lost")
    known = make.wells(held_at(make, 0, 9.0), unproved=(end,))
    assert verdicts(make, known, (0, claim(lowest=1.0))) == ["pass"]
    assert verdicts(make, known, (1, claim(lowest=1.0, throughout=True))) == ["unsure"]


def test_at_the_very_beginning_the_stretch_that_begins_there_bounds_the_depth(make):
    us, trap = make.us, make.trap()
    events = [Event(0 * us, 0 * us, claim(lowest=5.0), 0)]
    block = make.block(trap, spans=[(0 * us, 0 * us), (0 * us, 10 * us)], events=events)

    def of_depth(depth):
        known = make.wells(held_at(make, 0, depth))
        return make.verdicts(make.case(trap, [block], wells=known), NAME)

    assert of_depth(5.0) == ["pass"]
    assert of_depth(4.0) == ["unsure"]


def test_after_a_wait_the_step_before_is_that_of_the_block_before(make):
    us, trap = make.us, make.trap()
    first = make.block(trap, spans=[(0 * us, 10 * us)])
    events = [Event(0 * us, 0 * us, claim(lowest=5.0), 2)]
    second = make.block(
        trap, spans=[(0 * us, 0 * us), (0 * us, 0 * us)], events=events, index=1, first_number=1
    )
    known = make.wells(held_at(make, 0, 6.0))
    assert make.verdicts(make.case(trap, [first, second], wells=known), NAME) == ["pass"]


# separation


def apart(make, *places, least=(), **more):
    """pool stays at 20 mm; bunch goes from place to place, m, step by step."""
    stretches = [held_at(make, step, 9.0) for step in range(len(places) - 1)]
    stretches += [
        held_at(make, step, 9.0, cloud="bunch", at_m=(places[step], places[step + 1]))
        for step in range(len(places) - 1)
    ]
    separations = tuple(
        Separation(("pool", "bunch"), 0, 10e-6 * step, 10e-6 * (step + 1), 2 * step, one, False)
        for step, one in enumerate(least)
    )
    return make.wells(*stretches, separations=separations, **more)


def far(lowest=None, highest=None, **more):
    return claim("separation", lowest, highest, other="bunch", **more)


def test_separation_is_that_of_the_place(make, beyond):
    known = apart(make, 0.05, 0.045, 0.06)
    distance = 0.045 - 0.02
    assert verdicts(make, known, (0, far(distance))) == ["pass"]
    assert verdicts(make, known, (0, far(beyond.up(distance)))) == ["fail"]
    assert verdicts(make, known, (0, far(None, distance))) == ["pass"]
    assert verdicts(make, known, (0, far(None, beyond.down(distance)))) == ["fail"]
    assert verdicts(make, known, (1, far(0.0399))) == ["pass"]


def test_separation_throughout_lies_between_the_proved_least_and_that_of_the_place(make):
    known = apart(make, 0.05, 0.045, 0.06, least=(0.02, 0.022))
    for bound, verdict in ((0.02, "pass"), (0.03, "unsure"), (0.041, "fail")):
        assert verdicts(make, known, (1, far(bound, throughout=True))) == [verdict]
    assert verdicts(make, known, (1, far(0.022, throughout=True)), labels={2: "late"}) == ["pass"]
    assert verdicts(make, known, (1, far(None, 1.0, throughout=True))) == ["unsure"]


def test_two_clouds_of_one_well_have_no_separation(make):
    known = apart(make, 0.02, 0.02)
    assert verdicts(make, known, (0, far(0.001))) == ["fail"]
    assert verdicts(make, known, (0, far(0.001, throughout=True))) == ["fail"]


def test_a_separation_from_nothing_is_unsure(make):
    assert verdicts(make, wells(make, 9.0), (0, far(0.001))) == ["unsure"]


# time


def since(label, lowest=None, highest=None):
    return claim("time", lowest, highest, cloud="", label=label)


@pytest.mark.parametrize("bound", [30e-6])
def test_time_counts_from_the_start_of_the_labelled_step(make, beyond, bound):
    known = make.wells()
    labels = {2: "begin"}
    assert verdicts(make, known, (3, since("begin", bound, bound)), labels=labels) == ["pass"]
    (found,) = make.findings(
        case(make, known, (3, since("begin", None, beyond.down(bound))), labels=labels), NAME
    )
    assert found.verdict == "fail"
    assert found.message == 'time after "begin" is 30 us, required below 30 us'


def test_of_several_passes_the_last_before_counts(make):
    labels = {0: "again", 4: "again", 6: "later"}
    known = make.wells()
    assert verdicts(make, known, (3, since("again", 20e-6, 20e-6)), labels=labels) == ["pass"]
    assert verdicts(make, known, (1, since("again", 20e-6, 20e-6)), labels=labels) == ["pass"]


def test_waits_for_triggers_count_from_nothing_to_their_longest(make):
    us = make.us
    clock = {"within_s": 1000 * us, "first_row_s": 5 * us, "jitter_s": us}
    more = {"labels": {6: "before"}, "blocks": 2, **clock}
    known = make.wells()
    # 10 us of the first block, 4 to 6 us until the first row, up to 1000 us of waiting, 10 us.
    shortest, longest = 24e-6, 1026e-6
    assert verdicts(make, known, (4, since("before", shortest)), **more) == ["pass"]
    assert verdicts(make, known, (4, since("before", shortest + 1e-9)), **more) == ["unsure"]
    assert verdicts(make, known, (4, since("before", None, longest)), **more) == ["pass"]
    assert verdicts(make, known, (4, since("before", None, longest - 1e-9)), **more) == ["unsure"]
    assert verdicts(make, known, (4, since("before", longest + 1e-9)), **more) == ["fail"]


def test_a_label_that_did_not_come_before_is_unsure(make):
    labels = {6: "later"}
    assert verdicts(make, make.wells(), (1, since("later", 0.0)), labels=labels) == ["unsure"]


# the rest


def test_what_needs_a_forecast_is_unsure(make):
    assert verdicts(make, make.wells(), (0, claim("temperature", 0.0))) == ["unsure"]


def test_no_claim_is_clean_and_it_may_be_allowed(make):
    assert verdicts(make, wells(make, 5.0)) == []
    assert check(NAME).WAIVABLE
