"""Which stretch of time a claim speaks of: the step before it, or all since a label.

A moment is (block index, exact seconds of the block); moments are in the order of play.
"""

from __future__ import annotations

import math
from bisect import bisect_left, bisect_right
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from wellseq.base.finding import Origin
from wellseq.checks.keeping import Floats
from wellseq.timeline.timeline import Timeline

Moment = tuple[int, Fraction | float]
Window = tuple[Moment, Moment]


@dataclass(frozen=True, slots=True)
class _Span:
    number: int
    start: Moment
    end: Moment


class Story:
    """The steps of a timeline in order of play."""

    def __init__(self, timeline: Timeline) -> None:
        self.timeline = timeline
        self.origins = timeline.origins
        self.starts: dict[int, Moment] = {}
        self.lasting: list[_Span] = []
        for block in timeline.blocks:
            for span in block.spans:
                self.starts[span.number] = (block.index, span.start_s)
                if span.end_s > span.start_s:
                    moments = (block.index, span.start_s), (block.index, span.end_s)
                    self.lasting.append(_Span(span.number, *moments))
        self.lasting.sort(key=lambda span: span.number)
        self._numbers = [span.number for span in self.lasting]
        self._labelled = [n for n, origin in enumerate(self.origins) if _names(self.origins, n)]
        self._by_label: dict[str, list[int]] = {}
        for number in self._labelled:
            self._by_label.setdefault(self.origins[number].label, []).append(number)

    def step_before(self, number: int, place: Moment) -> Window | None:
        """From the start of the last step that took time to a place; None when there is none."""
        for span in reversed(self.lasting[: bisect_left(self._numbers, number)]):
            if span.end <= place:
                return span.start, place
        return None

    def since_label(self, number: int, place: Moment) -> Window:
        """From the last labelled step before a step, or from the first row, to a place."""
        index = bisect_left(self._labelled, number)
        start = self.starts.get(self._labelled[index - 1]) if index else None
        return (start if start is not None else (0, Fraction(0))), place

    def time_since_s(self, label: str, number: int, place: Moment) -> tuple[float, float]:
        """Least and greatest time, s, from the last step of that label to a place.

        Waits for triggers count from nothing to their longest, first rows give or take their
        jitter.  NaN when no step before bears the label.
        """
        numbers = self._by_label.get(label, [])
        index = bisect_left(numbers, number)
        start = self.starts.get(numbers[index - 1]) if index else None
        if start is None:
            return math.nan, math.nan
        shortest = longest = Fraction(place[1]) - Fraction(start[1])
        for block in self.timeline.blocks[start[0] + 1 : place[0] + 1]:
            played = self.timeline.blocks[block.index - 1].duration_s
            shortest += played + max(block.first_row_s - block.jitter_s, Fraction(0))
            longest += played + block.within_s + block.first_row_s + block.jitter_s
        return float(shortest), float(longest)


def _names(origins: Sequence[Origin], number: int) -> bool:
    """Whether a label begins at a step: it has one, and not just its neighbour's."""
    label = origins[number].label
    if not label or not number:
        return bool(label)
    before = origins[number - 1]
    return (before.label, before.passes) != (label, origins[number].passes)


class Track:
    """Measured intervals (low, high) over stretches of time that do not overlap, in order."""

    def __init__(self, stretches: Iterable[tuple[Moment, Moment, float, float]]) -> None:
        rows = sorted(stretches, key=lambda row: row[:2])
        self.starts = [row[0] for row in rows]
        self.ends = [row[1] for row in rows]
        self.low: Floats = np.array([row[2] for row in rows], dtype=float)
        self.high: Floats = np.array([row[3] for row in rows], dtype=float)

    def least(self, window: Window) -> tuple[float, float]:
        """The interval of the least value within a window; NaN where nothing was measured."""
        first = bisect_right(self.ends, window[0])
        last = bisect_left(self.starts, window[1])
        if first >= last:
            return math.nan, math.nan
        return float(np.min(self.low[first:last])), float(np.min(self.high[first:last]))

    def at(self, place: Moment) -> int | None:
        """The index of the stretch that ends at a place, holds it, or else begins there."""
        index = bisect_left(self.starts, place) - 1
        for found in (index, index + 1):
            if 0 <= found < len(self.starts) and self.starts[found] <= place <= self.ends[found]:
                return found
        return None
