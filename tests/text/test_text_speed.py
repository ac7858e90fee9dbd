"""How long reading takes, with the collector quiet, and what ten megabytes of brackets do."""

from __future__ import annotations

import gc
import time

import pytest

from wellseq.text.parse import parse

SIMPLE = [
    "hold for 10 s",
    "ramp mixing over 50 ms smoothly",
    "throw G1, G2 to lv20",
    "C4..C8 = 10 V",
    "kick coolant through C3 to 0 V for 300 ns keeping bunch",
]


def seconds(work):
    """Processor time of one call."""
    started = time.process_time()
    work()
    return time.process_time() - started


def read_simple(count):
    source = "\n".join(SIMPLE[number % len(SIMPLE)] for number in range(count))
    assert len(parse(source, "f").statements) == count


def test_ten_thousand_statements_are_read_in_a_second_and_growth_is_even():
    parse("hold", "f")
    few = many = reference = float("inf")
    for _ in range(2):
        # The machine may be busy: a loop of arithmetic beside it tells how fast it is just now.
        reference = min(reference, seconds(lambda: sum(n * n % 7 for n in range(1_000_000))))
        few = min(few, *(seconds(lambda: read_simple(1000)) for _ in range(3)))
        many = min(many, seconds(lambda: read_simple(10_000)))
    assert many < 20 * reference  # 0.7 s against 0.06 s, so at most 1.2 s
    assert many < 13 * few  # 10 is even; the collector left at work makes it more


@pytest.mark.parametrize("text", ["{", "(", "[", "}", ")", "[]", "()", "{}", "{(", "([{", "<>"])
def test_ten_megabytes_of_brackets_end_in_one_message(text):
    source = text * (10_000_000 // len(text))
    started = time.process_time()
    tree = parse(source, "f")
    assert time.process_time() - started < 2.0
    assert len({mistake.message for mistake in tree.mistakes}) <= 3
    assert len(tree.mistakes) == 1 or text in ("([{", "{(")


@pytest.mark.parametrize("was_on", [True, False])
def test_the_collector_is_left_as_it_was(was_on):
    before = gc.isenabled()
    try:
        (gc.enable if was_on else gc.disable)()
        parse("hold for\n" * 2000, "f")
        assert gc.isenabled() == was_on
    finally:
        (gc.enable if before else gc.disable)()
