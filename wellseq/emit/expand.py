"""Rows → samples at a fixed rate, run after run, in memory that does not grow with their number.

A sample of a held output, a switch or a line is the last row's at or before it; of an output whose
card draws lines it is the point of the line, rounded to the nearest code, halves up, in whole
numbers throughout.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from wellseq.emit.columns import Rows, Whole, narrowest

CHUNK_SAMPLES = 65536
SAFE = 2**61
"""Products of codes and ticks below this fit into 64 bits with room to spare."""


class NoSuchRate(ValueError):
    """The clock of a block does not divide the time between two samples."""


@dataclass(frozen=True, slots=True)
class Poured:
    """A block at a fixed rate: its rows, `every` so many ticks a sample, and whose they are."""

    rows: Rows
    every: int
    block: str
    trigger: str
    content_id: str

    @property
    def count(self) -> int:
        """The number of samples: from tick 0 as far as the last row."""
        return int(self.rows.ticks[-1]) // self.every + 1

    @property
    def every_s(self) -> Fraction:
        """Exact seconds from sample to sample, s."""
        return self.every * self.rows.tick_s

    @property
    def dtype(self) -> str:
        """The smallest unsigned little-endian type that holds every number of the block."""
        return narrowest(max((column.most for column in self.rows.columns), default=0))

    def late(self) -> tuple[int, Fraction]:
        """How many rows lie between two samples, and by how long (s) the worst comes late."""
        past = self.rows.ticks % self.every
        between = past > 0
        worst = int((self.every - past[between]).max()) if between.any() else 0
        return int(between.sum()), worst * self.rows.tick_s

    def samples(self) -> Iterator[Rows]:
        """All samples, some of them at a time, as rows with their ticks."""
        rows = self.rows
        for start in range(0, self.count, CHUNK_SAMPLES):
            stop = min(start + CHUNK_SAMPLES, self.count)
            ticks = np.arange(start, stop, dtype=np.int64) * self.every
            at = np.searchsorted(rows.ticks, ticks, side="right") - 1
            numbers = tuple(
                _drawn(rows.ticks, found, ticks, at) if column.draws else found[at]
                for column, found in zip(rows.columns, rows.numbers, strict=True)
            )
            yield Rows(rows.columns, ticks, numbers, rows.tick_s)

    def tables(self) -> Iterator[bytes]:
        """All samples as whole numbers of `dtype`, sample by sample, column by column."""
        for run in self.samples():
            table = np.empty((len(run.ticks), len(run.columns)), dtype=self.dtype)
            for at, numbers in enumerate(run.numbers):
                table[:, at] = numbers
            yield table.tobytes()


def ticks_between(tick_s: Fraction, every_s: Fraction) -> int:
    """How many ticks (s) make the time between two samples (s).

    Raises NoSuchRate, with what would be right, when it is no whole number of them.
    """
    if every_s <= 0:
        raise NoSuchRate("the time between two samples must be positive")
    every = every_s / tick_s
    if every.denominator != 1:
        below = max(1, int(every)) * tick_s
        raise NoSuchRate(
            f"{float(every_s):.9g} s is no whole number of ticks of {float(tick_s):.9g} s; "
            f"{float(below):.9g} s or {float((int(every) + 1) * tick_s):.9g} s would be"
        )
    return int(every)


def _drawn(ticks: Whole, codes: Whole, wanted: Whole, at: Whole) -> Whole:
    """Codes on the straight lines from row to row, (samples,)."""
    after = np.minimum(at + 1, len(ticks) - 1)
    span = np.maximum(ticks[after] - ticks[at], 1)
    rise = codes[after] - codes[at]
    along = wanted - ticks[at]
    # Python's own numbers never overflow; they are slower and seldom needed.
    if float(np.abs(rise).max(initial=0)) * float(span.max(initial=1)) * 2 >= SAFE:
        rise, along, span = (one.astype(object) for one in (rise, along, span))
    moved = (2 * rise * along + span) // (2 * span)
    return np.asarray(codes[at] + moved.astype(np.int64))
