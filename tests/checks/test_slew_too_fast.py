"""`slew-too-fast`: the wish's slope, and the changes of code as they are played."""

import math
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.checks.judging import check
from wellseq.model.trap import Margins

NAME = "slew-too-fast"
LOOSE = Margins(staircase_V=1000.0)


def case(make, volts, duration_us, shape="straight", slew=1e7, **facts):
    trap = make.trap([make.converter("a", slew_V_per_s=slew, **facts)], margins=LOOSE)
    piece = make.piece("a", 0 * make.us, Fraction(duration_us) * make.us, 0.0, volts, 0, shape)
    return make.case(trap, [make.block(trap, [piece])])


def wish(make, *args, **more):
    found = make.findings(case(make, *args, **more), NAME)
    return [one.verdict.value for one in found if one.subject == "a"]


@pytest.mark.parametrize(
    ("volts", "duration_us", "slew"),
    [(10, 1, 1e7), (-90, 9, 1e7), (8.4, Fraction(7, 10), 1.2e7), (0.3, Fraction(1, 10), 3e6)],
)
def test_a_straight_ramp_exactly_at_the_slew_and_a_nanosecond_faster(
    make, volts, duration_us, slew
):
    assert wish(make, volts, duration_us, slew=slew) == ["pass"]
    assert wish(make, volts, duration_us - Fraction(1, 1000), slew=slew) == ["fail"]


def test_a_smooth_ramp_is_steepest_in_its_middle(make):
    needed_us = Fraction(math.pi / 2 * 9.0)
    assert wish(make, 90.0, needed_us * Fraction(1001, 1000), "smooth") == ["pass"]
    assert wish(make, 90.0, needed_us * Fraction(999, 1000), "smooth") == ["fail"]


def test_the_message_says_both(make):
    (found,) = (f for f in make.findings(case(make, 90.0, 5), NAME) if f.subject == "a")
    assert found.message == "a is asked for 18 MV/s, it can follow 10 MV/s"
    assert found.place == make.place(0)


def test_a_slope_that_is_not_known_is_unsure(make):
    trap = make.trap([make.converter("a")])
    piece = make.piece("a", 0 * make.us, make.us, 0.0, math.nan)
    shipped = make.shipped(trap, make.block(trap))
    bad = make.case(trap, [make.block(trap, [piece])], shipped=shipped)
    assert make.verdicts(bad, NAME) == ["unsure"]


def rows(make, ticks, codes, blocks=1, **facts):
    """Verdicts on rows alone: codes of 1 V, 10 V/us, a clock of 1 us."""
    facts = {"range_V": (0.0, 255.0), "bits": 8, **facts}
    trap = make.trap([make.converter("a", **facts)])
    shown = [
        make.block(trap, index=index, first_number=index, first_row_s=3 * make.us)
        for index in range(blocks)
    ]
    shipped = make.shipped(trap, *shown, ticks=ticks, codes=[[code] for code in codes])
    found = make.findings(make.case(trap, shown, shipped=shipped), NAME)
    return sorted({one.verdict.value for one in found if one.subject == "a, rows"})


def test_a_held_jump_must_be_over_before_the_next_one_but_for_a_code(make):
    assert rows(make, [0, 5, 7, 9], [0, 21, 22, 22]) == ["pass"]
    assert rows(make, [0, 5, 7, 9], [0, 22, 23, 23]) == ["fail", "pass"]


def test_another_outputs_row_in_between_does_not_matter(make):
    assert rows(make, [0, 5, 6, 7, 9], [0, 21, 21, 22, 22]) == ["pass"]


def test_the_last_jump_of_the_last_block_has_all_time(make):
    assert rows(make, [0, 1, 2], [0, 0, 255]) == ["pass"]


def test_a_jump_at_the_end_has_until_the_next_block_changes_it(make):
    # From the last row it takes 3 us at least until the first row after the trigger.
    assert rows(make, [0, 3, 4], [0, 0, 31], blocks=2) == ["pass"]
    assert rows(make, [0, 3, 4], [0, 0, 32], blocks=2) == ["fail", "pass"]


def test_a_card_that_draws_lines_has_from_row_to_row(make):
    assert rows(make, [0, 5, 7], [0, 51, 72], between_rows="line") == ["pass"]
    assert rows(make, [0, 5, 7], [0, 52, 53], between_rows="line") == ["fail", "pass"]
    assert rows(make, [0, 5, 7], [0, 51, 73], between_rows="line") == ["fail", "pass"]


def test_it_may_not_be_allowed(make):
    assert not check(NAME).WAIVABLE


@settings(deadline=None, max_examples=40)
@given(
    volts=st.floats(-90, 90),
    duration_us=st.fractions(1, 50, max_denominator=20),
    longer_us=st.fractions(0, 50, max_denominator=20),
    shape=st.sampled_from(["straight", "smooth", "edge"]),
    between=st.sampled_from(["hold", "line"]),
)
def test_more_time_never_makes_the_wish_steeper(
    make, volts, duration_us, longer_us, shape, between
):
    short, long = (
        wish(make, volts, duration, shape, between_rows=between)
        for duration in (duration_us, duration_us + longer_us)
    )
    assert (short, long) != (["pass"], ["fail"])


@settings(deadline=None, max_examples=40)
@given(volts=st.floats(-90, 90), microseconds=st.integers(1, 30))
def test_whole_clocks_at_the_slew_are_played_within_it(make, volts, microseconds):
    played = case(make, volts, microseconds, slew=max(1.0, abs(volts) / microseconds * 1e6))
    assert "fail" not in make.verdicts(played, NAME)
