"""A block at a fixed rate: every sample is what the rows say at that instant, however many."""

from __future__ import annotations

import tracemalloc
from fractions import Fraction
from itertools import islice

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.emit import expand
from wellseq.emit.columns import Column, Kind, Rows
from wellseq.emit.expand import NoSuchRate, Poured, ticks_between

HELD = Column("h", Kind.CODE, 2**32 - 1, (0, 1, 1))
DRAWN = Column("d", Kind.CODE, 2**32 - 1, (0, 1, 1), draws=True)
TICK_s = Fraction(1, 10**8)


def poured(ticks: list[int], numbers: list[int], every: int) -> Poured:
    found = np.array(numbers, np.int64)
    rows = Rows((HELD, DRAWN), np.array(ticks, np.int64), (found, found), TICK_s)
    return Poured(rows, every, "run", "", "ab" * 32)


def plain(ticks: list[int], numbers: list[int], tick: int) -> tuple[int, int]:
    """Both columns at an instant by exact rationals: held, and on the line, halves up."""
    at = max(row for row, start in enumerate(ticks) if start <= tick)
    if at + 1 == len(ticks):
        return numbers[at], numbers[at]
    share = Fraction(tick - ticks[at], ticks[at + 1] - ticks[at])
    line = numbers[at] + (numbers[at + 1] - numbers[at]) * share
    return numbers[at], int((line + Fraction(1, 2)) // 1)


rises = st.lists(st.integers(1, 10**13), min_size=1, max_size=8)


@settings(deadline=None)
@given(rises, st.data(), st.integers(1, 40))
def test_samples_are_the_rows_at_their_instants(
    steps: list[int], data: st.DataObject, wanted: int
) -> None:
    ticks = [0]
    for step in steps:
        ticks.append(ticks[-1] + step)
    most = data.draw(st.sampled_from([1, 255, 2**18 - 1, 2**32 - 1]))
    numbers = data.draw(st.lists(st.integers(0, most), min_size=len(ticks), max_size=len(ticks)))
    one = poured(ticks, numbers, max(1, ticks[-1] // wanted))
    runs = list(one.samples())
    found = np.concatenate([np.stack(run.numbers, axis=1) for run in runs]).tolist()
    at = np.concatenate([run.ticks for run in runs]).tolist()
    assert at == [number * one.every for number in range(one.count)]
    assert ticks[-1] - one.every < at[-1] <= ticks[-1]
    assert found == [list(plain(ticks, numbers, tick)) for tick in at]


def test_runs_join_without_a_seam(monkeypatch: pytest.MonkeyPatch) -> None:
    one = poured([0, 300, 1000], [5, 500, 7], 3)
    whole = b"".join(one.tables())
    monkeypatch.setattr(expand, "CHUNK_SAMPLES", 7)
    assert b"".join(one.tables()) == whole
    assert len(list(one.samples())) > 40


def test_rows_between_samples_are_counted_and_timed() -> None:
    assert poured([0, 300, 1000], [1, 2, 3], 100).late() == (0, 0)
    assert poured([0, 301, 1000], [1, 2, 3], 100).late() == (1, 99 * TICK_s)


@pytest.mark.parametrize(
    ("every_s", "ticks"), [(Fraction(1, 10**8), 1), (Fraction(1, 10**5), 1000), (Fraction(3), 3e8)]
)
def test_a_rate_that_the_clock_divides(every_s: Fraction, ticks: int) -> None:
    assert ticks_between(TICK_s, every_s) == ticks


@pytest.mark.parametrize("every_s", [Fraction(1, 3), Fraction(1, 10**9), Fraction(0), Fraction(-1)])
def test_a_rate_that_it_does_not_divide_is_refused(every_s: Fraction) -> None:
    with pytest.raises(NoSuchRate):
        ticks_between(TICK_s, every_s)
    if every_s > 0:
        with pytest.raises(NoSuchRate, match="would be"):
            ticks_between(TICK_s, every_s)


def test_memory_does_not_grow_with_the_number_of_samples() -> None:
    # A hundred million million samples: nobody waits for all of them.
    one = poured([0, 5 * 10**13, 10**14], [0, 65535, 0], 1)
    assert one.count == 10**14 + 1
    tracemalloc.start()
    try:
        pieces = [len(piece) for piece in islice(one.tables(), 3)]
        peak = tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()
    assert sum(pieces) == 3 * 65536 * 2 * 4
    assert peak < 20 * 2**20
