"""Stretches of time that a claim speaks of, against plain definitions."""

import math
from fractions import Fraction

from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.checks.windows import Story, Track

lengths = st.lists(st.integers(0, 3), min_size=1, max_size=12)


def stretches(cuts, values):
    """Stretches one after the other in two blocks; a length of 0 is a gap of 1."""
    found, now = [], 0
    for number, length in enumerate(cuts):
        if length:
            half = len(cuts) // 2
            block = int(number >= half)
            found.append(((block, now), (block, now + length), values[number], values[number] + 1))
        now += max(length, 1)
    return found


@settings(deadline=None)
@given(cuts=lengths, values=st.lists(st.floats(-9, 9), min_size=12, max_size=12), data=st.data())
def test_the_least_within_a_window_is_that_of_all_that_overlap_it(cuts, values, data):
    rows = stretches(cuts, values)
    moments = st.tuples(st.integers(0, 1), st.integers(0, 40))
    window = tuple(sorted(data.draw(st.tuples(moments, moments))))
    low, high = Track(rows).least(window)
    within = [row for row in rows if row[1] > window[0] and row[0] < window[1]]
    if not within:
        assert math.isnan(low)
        assert math.isnan(high)
    else:
        assert low == min(row[2] for row in within)
        assert high == min(row[3] for row in within)


def test_what_is_not_known_within_a_window_makes_its_least_unknown():
    track = Track([((0, 0), (0, 1), 1.0, 2.0), ((0, 1), (0, 2), math.nan, 2.0)])
    assert track.least(((0, 0), (0, 1))) == (1.0, 2.0)
    assert math.isnan(track.least(((0, 0), (0, 2)))[0])


def test_at_a_border_the_stretch_before_counts_at_a_beginning_the_one_after():
    track = Track([((0, 1), (0, 2), 1.0, 1.0), ((0, 2), (0, 3), 2.0, 2.0)])
    assert [track.at((0, t)) for t in (0, 1, 1.5, 2, 2.5, 3, 4)] == [None, 0, 0, 0, 1, 1, None]
    assert track.at((1, 2)) is None


def story(make, blocks, labels):
    """Blocks of steps of so many microseconds each."""
    trap, shown, first = make.trap(), [], 0
    for index, steps in enumerate(blocks):
        ends = [sum(steps[: n + 1]) * make.us for n in range(len(steps))]
        spans = list(zip([0 * make.us, *ends], ends, strict=False))
        shown.append(make.block(trap, spans=spans, index=index, first_number=first))
        first += len(steps)
    return Story(make.case(trap, shown, labels=labels).timeline)


def test_the_step_before_is_the_last_that_took_time(make):
    told = story(make, [[5, 0, 7], [0, 3]], {})
    us = make.us
    assert told.step_before(0, (0, 0 * us)) is None
    assert told.step_before(1, (0, 5 * us)) == ((0, 0), (0, 5 * us))
    assert told.step_before(2, (0, 5 * us)) == ((0, 0), (0, 5 * us))
    assert told.step_before(3, (1, 0 * us)) == ((0, 5 * us), (1, 0))
    assert told.step_before(5, (1, 3 * us)) == ((1, 0), (1, 3 * us))


def test_since_the_last_label_or_from_the_first_row(make):
    told = story(make, [[5, 6], [7, 8]], {1: "a", 2: "b"})
    us = make.us
    assert told.since_label(0, (0, 0 * us)) == ((0, 0), (0, 0))
    assert told.since_label(2, (1, 0 * us)) == ((0, 5 * us), (1, 0))
    assert told.since_label(3, (1, 7 * us)) == ((1, 0), (1, 7 * us))


def test_a_label_that_reaches_over_several_steps_begins_at_the_first(make):
    told = story(make, [[5, 6, 7, 8]], {1: "a", 2: "a"})
    assert told.since_label(3, (0, 18 * make.us))[0] == (0, 5 * make.us)
    exact = float(Fraction(13, 10**6))
    assert told.time_since_s("a", 3, (0, 18 * make.us)) == (exact, exact)
