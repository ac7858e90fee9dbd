"""The list of mistakes: ordered, at most a hundred, the rest counted; harmless quotations."""

from __future__ import annotations

import pytest

from wellseq.base.place import Place
from wellseq.text.mistakes import LISTED_MAX, READING_STOPS_AT, Mistakes, ReadingStops, quoted
from wellseq.text.parse import parse


def bad_lines(count):
    return "hold for\n" * count


def test_a_hundred_mistakes_are_listed_as_they_are():
    listed = parse(bad_lines(LISTED_MAX), "f").mistakes
    assert [mistake.place.line for mistake in listed] == list(range(1, 101))
    assert all("ends after" in mistake.message for mistake in listed)


@pytest.mark.parametrize("more", [1, 50, READING_STOPS_AT - LISTED_MAX - 1])
def test_the_others_are_counted(more):
    listed = parse(bad_lines(LISTED_MAX + more) + "hold for 1 s", "f").mistakes
    assert len(listed) == LISTED_MAX + 1
    assert listed[-1].name == "syntax"
    assert listed[-1].message.startswith(f"{more} more mistakes")
    assert listed[-1].place.line == LISTED_MAX + 1


def test_a_file_that_is_no_sequence_is_not_read_to_its_end():
    listed = parse(bad_lines(100_000), "f").mistakes
    assert len(listed) == LISTED_MAX + 1
    assert listed[-1].message.startswith(f"at least {READING_STOPS_AT - LISTED_MAX} more")


def test_mistakes_come_in_order_of_place_whatever_the_order_of_finding():
    listed = parse("sequence s {\n hold for\n let a = 5 $ V\n hold )\n", "f").mistakes
    places = [(mistake.place.line, mistake.place.column) for mistake in listed]
    assert places == sorted(places)
    assert [line for line, _ in places] == [1, 2, 3, 4]


def test_giving_up_takes_the_mistake_in():
    mistakes = Mistakes("f")
    with pytest.raises(ReadingStops):
        mistakes.give_up("too-large", Place("f"), "too much")
    assert [mistake.name for mistake in mistakes.listed()] == ["too-large"]


def test_quotations_are_short_and_hold_no_controls():
    assert quoted("wall") == "'wall'"
    assert quoted("a\x1b[1m") == "'a\\u001b[1m'"
    assert quoted("a\u202eb") == "'a\\u202eb'"
    assert quoted("x" * 40) == f"'{'x' * 40}'"
    assert quoted("x" * 41) == f"'{'x' * 40}…'"
