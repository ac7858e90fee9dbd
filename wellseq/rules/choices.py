"""Which waits to look at, so that a sentence is judged for every time at which a trigger may come.

What a sentence measures depends on a wait only where one of its windows reaches over it, and then
only through the order of the instants at which something changes before it and after it.  That
order is the same between two neighbouring waits at which two of those instants fall together, so
those waits, one between each two, and the shortest and longest are as good as all.

Where a window reaches over several waits at once, the same is done one wait at a time with the
others at their ends; that may show a breach, and proves nothing.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

from wellseq.model import rulebook as book
from wellseq.rules.axis import Axis, Run
from wellseq.rules.moments import beginnings
from wellseq.rules.reading import Reading
from wellseq.rules.sentences import breaches
from wellseq.rules.signals import Signals

RUNS_MAX = 500
"""Waits looked at for one sentence and one place; beyond, not every arrival has been looked at."""
SHIFTS_MAX = 200


@dataclass(frozen=True, slots=True)
class Look:
    """A run to judge, and the instants between which its breaches count.

    `waits` are the stretches whose wait was chosen; empty for the whole axis.
    """

    run: Run
    low: int
    high: int
    waits: tuple[int, ...] = ()


@dataclass(slots=True)
class Choices:
    """The runs for one sentence; `complete` is False when they do not stand for all arrivals."""

    signals: Signals
    sentence: book.Sentence
    complete: bool = True

    @property
    def axis(self) -> Axis:
        """The axis of time."""
        return self.signals.axis

    def looks(self) -> Iterator[Look]:
        """The whole axis with its longest waits, then what its windows reach over."""
        axis = self.axis
        longest = axis.run()
        yield Look(longest, 0, longest.end)
        # What follows a wait that takes no time comes just after what was before it, and most
        # happens within a window when no time is lost by waiting.
        shortest = axis.run([one.shortest for one in axis.stretches if one.waits])
        yield Look(shortest, 0, shortest.end)
        if isinstance(self.sentence, book.Counted):
            # A wait that takes no time at all does not begin; one that takes hardly any does.
            hardly = axis.run(
                [max(one.shortest, min(1, one.longest)) for one in axis.stretches if one.waits]
            )
            yield Look(hardly, 0, hardly.end)
            self._look_into_waits(self.sentence, longest)
            return
        windows = self._windows()
        if windows:
            for cluster in self._clusters(sum(windows)):
                yield from self._around(cluster, windows)

    def _look_into_waits(self, counted: book.Counted, longest: Run) -> None:
        """What begins within a wait, or when a window says so, the two runs do not stand for."""
        for moment in beginnings(counted.event, Reading(self.signals, longest)):
            stretch, at = self.axis.where(longest, moment.high)
            if stretch.waits and at and counted.window_s is not None:
                self.complete = False
        windows = self._windows()
        for cluster in self._clusters(sum(windows)) if windows else ():
            look = self._cut(longest, cluster, sum(windows))
            points = _Points(self.signals, counted, look)
            if any(points.matter(number) for number in cluster):
                self.complete = False

    def _windows(self) -> list[int]:
        """The windows that are measured on conditions, in units."""
        return [
            self.axis.units(window_s)
            for condition in book.conditions_of(self.sentence)
            for window_s in book.windows_in(condition)
        ]

    def _clusters(self, reach: int) -> Iterator[list[int]]:
        """Numbers of the waits, together where a block between is not longer than the reach."""
        cluster: list[int] = []
        for number, stretch in enumerate(self.axis.stretches):
            if not stretch.waits:
                continue
            if cluster and self.axis.stretches[number - 1].longest > reach:
                yield cluster
                cluster = []
            cluster.append(number)
        if cluster:
            yield cluster

    def _around(self, cluster: list[int], windows: list[int]) -> Iterator[Look]:
        """The runs around one wait, or around several that a window can reach over."""
        reach = sum(windows)
        longest = self._cut(self.axis.run(), cluster, reach)
        points = _Points(self.signals, self.sentence, longest)
        if not any(points.matter(number) for number in cluster):
            return
        if not breaches(self.sentence, Reading(self.signals, longest.run), loosely=True):
            return
        shifts = _shifts(windows)
        if len(cluster) > 1 or shifts is None:
            self.complete = False
        for tried, chosen in enumerate(self._chosen(cluster, points, shifts or [0])):
            if tried == RUNS_MAX:
                self.complete = False
                return
            waits = [
                chosen.get(number, one.longest)
                for number, one in enumerate(self.axis.stretches)
                if one.waits
            ]
            run = self.axis.run(waits)
            if isinstance(self.sentence, book.Always):
                yield self._cut(run, cluster, reach)
            else:
                # Where a moment lies may depend on what is far away.
                yield Look(run, 0, run.end, tuple(cluster))

    def _chosen(
        self, cluster: list[int], points: _Points, shifts: list[int]
    ) -> Iterator[dict[int, int]]:
        """Waits by stretch: each in turn at what matters, the others at their ends."""
        stretches = self.axis.stretches
        ends = [{number: stretches[number].shortest for number in cluster}]
        if len(cluster) > 1:
            ends.append({number: stretches[number].longest for number in cluster})
        for others in ends:
            for number in cluster:
                for wait in points.waits(number, shifts):
                    yield {**others, number: wait}

    def _cut(self, run: Run, cluster: list[int], reach: int) -> Look:
        """The part of a run that a cluster's waits can matter to, and what they need to be read."""
        start = run.starts[cluster[0]]
        end = run.starts[cluster[-1]] + run.lengths[cluster[-1]]
        part = run.between(start - 2 * reach, end + 2 * reach)
        return Look(part, start - reach, end + reach, tuple(cluster))


class _Points:
    """The instants at which something that a sentence speaks of changes, on a run around waits."""

    def __init__(self, signals: Signals, sentence: book.Sentence, look: Look) -> None:
        self.axis, self.run = signals.axis, look.run
        reading = Reading(signals, look.run)
        found: set[int] = set()
        for condition in book.conditions_of(sentence):
            for atom in book.atoms_in(condition):
                for cuts in reading.atom(atom):
                    found.update(cut >> 1 for cut in cuts)
                if isinstance(atom, book.Playing | book.Driven):
                    for one in signals.spans(atom):
                        start = self.run.starts[one.stretch]
                        found.update((start + one.start, start + one.end))
        low, high = self.run.low >> 1, self.run.high >> 1
        found.update((low, high))
        self.times = sorted(time for time in found if low <= time <= high)

    def matter(self, number: int) -> bool:
        """Whether anything changes both before a wait, or in it, and after it."""
        return all(len(side) > 0 for side in self._sides(number))

    def _sides(self, number: int) -> tuple[list[int], list[int]]:
        """Times before the end of a wait, counted from its beginning; times after it, from its end.

        The ends of what is looked at count only where they are the ends of the whole axis.
        """
        start, end = self.run.starts[number], self.run.starts[number] + self.run.lengths[number]
        low, high = self.run.low >> 1, self.run.high >> 1
        inner = [
            time for time in self.times if low < time < high or time == 0 or time == self.run.end
        ]
        return [time - start for time in inner if time < end], [
            time - end for time in inner if time >= end
        ]

    def waits(self, number: int, shifts: list[int]) -> list[int]:
        """The waits at which two changes fall together, those between them, and the two ends."""
        stretch = self.axis.stretches[number]
        first, last = stretch.shortest, stretch.longest
        before, after = self._sides(number)
        found = {first, last}
        for shift in shifts:
            for early in (*before, 0):
                for late in (*after, 0):
                    wait = shift + early - late
                    if first < wait < last:
                        found.add(wait)
            if len(found) > RUNS_MAX:
                break
        ends = sorted(found)
        return sorted({*ends, *((one + other) // 2 for one, other in pairwise(ends))})


def _shifts(windows: list[int]) -> list[int] | None:
    """How far apart two changes can be and still be compared: sums of windows and differences.

    None when there are too many.
    """
    found = {0}
    for window in windows:
        found = {one + step for one in found for step in (-window, 0, window)}
        if len(found) > SHIFTS_MAX:
            return None
    return sorted(found)
