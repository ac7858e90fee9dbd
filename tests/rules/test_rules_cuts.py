"""Sets of instants: the algebra against looking at every instant; every end, open and closed."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.rules import cuts
from wellseq.rules.cuts import Cuts, after, before

LOW, HIGH = before(-40), after(40)
SAMPLES = range(-2 * 40, 2 * 40 + 1)
"""Twice the time: even ones are instants, odd ones lie between two of them."""


def closed(start: int, end: int) -> Cuts:
    return before(start), after(end)


def half_open(start: int, end: int) -> Cuts:
    return before(start), before(end)


@st.composite
def sets(draw: st.DrawFn) -> Cuts:
    ends = draw(st.lists(st.integers(-30, 30), min_size=0, max_size=8, unique=True))
    found = sorted(ends)
    return tuple(found[: len(found) // 2 * 2])


def sampled(set_: Cuts) -> set[int]:
    """The samples inside a set: sample s is the instant s / 2, which lies after s cuts of 2 t."""
    return {s for s in SAMPLES if any(a <= _cut(s) < b for a, b in cuts.parts(set_))}


def _cut(sample: int) -> int:
    """The cut just before a sample; between instants t and t + 1 that is the one just after t."""
    return sample


@given(sets(), sets())
def test_union_and_meet_are_those_of_their_instants(one: Cuts, other: Cuts) -> None:
    assert sampled(cuts.union(one, other)) == sampled(one) | sampled(other)
    assert sampled(cuts.meet(one, other)) == sampled(one) & sampled(other)


@given(sets())
def test_twice_the_complement_is_the_set(one: Cuts) -> None:
    opposite = cuts.complement(one, LOW, HIGH)
    assert sampled(opposite) == set(SAMPLES) - sampled(one)
    assert cuts.complement(opposite, LOW, HIGH) == one


@given(sets(), st.integers(-30, 30), st.integers(-30, 30))
def test_what_lies_between_two_cuts(one: Cuts, low: int, high: int) -> None:
    part = cuts.within(one, low, high)
    if low >= high:
        assert part == ()
    assert sampled(part) == {s for s in sampled(one) if low <= _cut(s) < high}
    assert cuts.touches(one, low, high) == bool(part)
    assert cuts.covers(one, low, high) == (low >= high or part == (low, high))


@given(sets(), st.integers(1, 6))
def test_a_window_is_the_opposite_of_the_other_one(one: Cuts, time: int) -> None:
    opposite = cuts.complement(one, LOW, HIGH)
    inner = before(-20), after(20)
    for held, recent in (
        (cuts.held, cuts.recent),
        (cuts.held_before, cuts.recent_before),
        (cuts.held_after, cuts.recent_after),
    ):
        never = cuts.complement(recent(opposite, time), LOW, HIGH)
        assert cuts.within(held(one, time), *inner) == cuts.within(never, *inner)


@pytest.mark.parametrize(
    ("words", "found", "expected"),
    [
        # [2, 8]: true at 2 and at 8
        ("C for 3", cuts.held(closed(2, 8), 3), closed(5, 8)),
        ("C within 3", cuts.recent(closed(2, 8), 3), closed(2, 11)),
        ("before, C", cuts.just_before(closed(2, 8)), (after(2), after(8))),
        ("before, C for 3", cuts.held_before(closed(2, 8), 3), closed(5, 8)),
        ("before, C within 3", cuts.recent_before(closed(2, 8), 3), (after(2), after(11))),
        ("after, C", cuts.just_after(closed(2, 8)), half_open(2, 8)),
        ("after, C for 3", cuts.held_after(closed(2, 8), 3), closed(2, 5)),
        ("after, C within 3", cuts.recent_after(closed(2, 8), 3), half_open(-1, 8)),
        # [2, 8): true at 2, not at 8
        ("C for 3", cuts.held(half_open(2, 8), 3), half_open(5, 8)),
        ("C within 3", cuts.recent(half_open(2, 8), 3), half_open(2, 11)),
        ("before, C", cuts.just_before(half_open(2, 8)), (after(2), after(8))),
        ("before, C for 3", cuts.held_before(half_open(2, 8), 3), closed(5, 8)),
        ("before, C within 3", cuts.recent_before(half_open(2, 8), 3), (after(2), before(11))),
        ("after, C", cuts.just_after(half_open(2, 8)), half_open(2, 8)),
        ("after, C for 3", cuts.held_after(half_open(2, 8), 3), half_open(2, 5)),
        ("after, C within 3", cuts.recent_after(half_open(2, 8), 3), half_open(-1, 8)),
        # (2, 8]: not at 2, true at 8
        ("C for 3", cuts.held((after(2), after(8)), 3), (after(5), after(8))),
        ("before, C for 3", cuts.held_before((after(2), after(8)), 3), (after(5), after(8))),
        ("after, C for 3", cuts.held_after((after(2), after(8)), 3), closed(2, 5)),
        ("after, C within 3", cuts.recent_after((after(2), after(8)), 3), (after(-1), before(8))),
        # the single instant 4
        ("C for 3", cuts.held(closed(4, 4), 3), ()),
        ("C within 3", cuts.recent(closed(4, 4), 3), closed(4, 7)),
        ("before, C", cuts.just_before(closed(4, 4)), ()),
        ("before, C within 3", cuts.recent_before(closed(4, 4), 3), (after(4), after(7))),
        ("after, C within 3", cuts.recent_after(closed(4, 4), 3), half_open(1, 4)),
    ],
)
def test_every_window_keeps_its_ends_open_or_closed(
    words: str, found: Cuts, expected: Cuts
) -> None:
    assert found == expected, words


def test_a_time_of_no_length_lies_in_nothing() -> None:
    assert cuts.within(closed(0, 5), before(3), before(3)) == ()
    assert not cuts.touches(closed(0, 5), before(3), before(3))


def test_parts_that_meet_become_one() -> None:
    assert cuts.joined([half_open(0, 2), half_open(2, 4)]) == half_open(0, 4)
    assert cuts.joined([half_open(0, 2), (after(2), before(4))]) == (0, 4, 5, 8)
    assert cuts.union(closed(0, 1), closed(3, 4)) == (0, 3, 6, 9)


def test_at_least_two_of_three() -> None:
    found = cuts.at_least([closed(0, 4), closed(2, 6), closed(5, 9)], 2)
    assert found == (before(2), after(4), before(5), after(6))
