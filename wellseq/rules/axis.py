"""The axis of time: blocks and the waits between them, counted in whole units of one fine clock.

A wait lasts from nothing to its longest, so the axis has no length of its own: a `Run` is the axis
with every wait chosen.  What is true at an instant is kept per stretch, in the stretch's own time,
and laid out on a run when its waits are known.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction

from wellseq.rules.cuts import NOTHING, Cuts, after, before, within
from wellseq.timeline.shipped import Shipped
from wellseq.timeline.timeline import Block, Timeline

UNITS_PER_S = 2 * 10**12
"""Half a picosecond at the coarsest: every clock of a trap is a whole number of picoseconds."""
UNITS_PER_S_MAX = 10**40
"""Times that would need a finer unit than this are rounded to it."""


@dataclass(frozen=True, slots=True)
class Stretch:
    """A block, or the wait before one; lengths in units.

    `index` is the block's, for a wait that of the block it ends at.  A block is as long as
    `longest` says, a wait anything from `shortest` to `longest`.
    """

    index: int
    waits: bool
    shortest: int
    longest: int


@dataclass(frozen=True, slots=True)
class Run:
    """The axis with chosen waits: where each stretch begins, where all ends; units.

    `lengths` and `starts` are per stretch.  Only what lies between the cuts `low` and `high` is
    known; they hold the whole run, or the part of it that is looked at.
    """

    lengths: tuple[int, ...]
    starts: tuple[int, ...]
    low: int
    high: int

    @property
    def end(self) -> int:
        """The last instant of the whole run."""
        return self.starts[-1] + self.lengths[-1]

    def between(self, start: int, end: int) -> Run:
        """The part of a run between two instants, as far as there is a run."""
        return replace(self, low=max(self.low, before(start)), high=min(self.high, after(end)))


class Axis:
    """The stretches of a timeline in order, and the unit in which their times are whole.

    `windows_s` are the windows of all rules that will be judged on it.
    """

    def __init__(self, timeline: Timeline, shipped: Shipped, windows_s: Iterable[Fraction]) -> None:
        self.timeline = timeline
        self.per_s = _fine_enough((*windows_s, *_times_of(timeline, shipped)))
        self.stretches = tuple(self._stretches(timeline.blocks))
        self.ends_at = len(self.stretches) - 1

    def units(self, seconds: Fraction) -> int:
        """A time in units; exact unless it is finer than the finest unit."""
        return round(seconds * self.per_s)

    def seconds(self, units: int) -> Fraction:
        """A time in s."""
        return Fraction(units, self.per_s)

    def _stretches(self, blocks: Sequence[Block]) -> Iterator[Stretch]:
        for block in blocks:
            if block.index:
                shortest = max(block.first_row_s - block.jitter_s, Fraction(0))
                longest = block.within_s + block.first_row_s + block.jitter_s
                yield Stretch(block.index, True, self.units(shortest), self.units(longest))
            duration = self.units(block.duration_s)
            yield Stretch(block.index, False, duration, duration)

    def span(self, number: int, length: int) -> tuple[int, int]:
        """The cuts between which a stretch of a length lies, in its own time.

        The last block holds its last instant; every other stretch leaves it to the next one.
        """
        return before(0), after(length) if number == self.ends_at else before(length)

    def run(self, waits: Sequence[int] | None = None) -> Run:
        """The whole axis with these waits, one per wait in order; the longest unless given."""
        chosen = iter(waits) if waits is not None else None
        lengths = tuple(
            next(chosen) if chosen is not None and one.waits else one.longest
            for one in self.stretches
        )
        starts = [0]
        for length in lengths:
            starts.append(starts[-1] + length)
        return Run(lengths, tuple(starts[:-1]), before(0), after(starts[-1]))

    def laid_out(self, local: Sequence[Cuts], run: Run) -> Cuts:
        """Sets of the stretches, each in its own time, as one set on a run."""
        found: list[int] = []
        for number, (cuts, length, start) in enumerate(
            zip(local, run.lengths, run.starts, strict=True)
        ):
            if not cuts or 2 * start >= run.high or 2 * (start + length) < run.low:
                continue
            for cut in within(cuts, *self.span(number, length)):
                found.append(cut + 2 * start)
                if len(found) > 1 and len(found) % 2 and found[-1] == found[-2]:
                    del found[-2:]
        return within(tuple(found), run.low, run.high) if found else NOTHING

    def where(self, run: Run, time: int) -> tuple[Stretch, int]:
        """The stretch that an instant of a run lies in, and the time in it.

        Of two stretches that meet there, the later one.
        """
        last = 0
        for number, start in enumerate(run.starts):
            if start <= time and (run.lengths[number] or number == self.ends_at):
                last = number
        return self.stretches[last], time - run.starts[last]


def _fine_enough(times: Iterable[Fraction]) -> int:
    """A number of units per second in which all of these times are whole, and their halves too."""
    per_s = UNITS_PER_S
    for denominator in sorted({time.denominator for time in times}):
        finer = math.lcm(per_s, 2 * denominator)
        if finer > UNITS_PER_S_MAX:
            return per_s * (UNITS_PER_S_MAX // per_s)
        per_s = finer
    return per_s


def _times_of(timeline: Timeline, shipped: Shipped) -> Iterator[Fraction]:
    """Every time of a timeline at which something can begin or end, s."""
    for output in timeline.trap.outputs:
        yield output.delay_s
    for rows in shipped.blocks:
        yield rows.tick_s
        for rounding in rows.roundings:
            yield rounding.asked_s
    for block in timeline.blocks:
        yield from (block.duration_s, block.within_s, block.first_row_s, block.jitter_s)
        for span in block.spans:
            yield from (span.start_s, span.end_s)
        for drive in block.drives:
            yield from (drive.start_s, drive.stop_s)
        for edge in block.edges:
            yield from (edge.start_s, edge.end_s)
        for piece in block.pieces:
            yield from (piece.start_s, piece.end_s)
        for change in block.changes:
            yield change.time_s
