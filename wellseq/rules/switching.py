"""A switch over time: its levels, and the edges between them as they are emitted.

An edge may be under way from when it can begin at the electrode until it is surely over, rounding
to its clock included.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from fractions import Fraction

from wellseq.model.trap import Switch
from wellseq.rules.axis import Axis
from wellseq.rules.course import Course, Interval, Piece, course
from wellseq.timeline.shipped import Shipped


@dataclass(frozen=True, slots=True)
class _Window:
    """An edge under way between two instants of a stretch, from one level to another."""

    start: int
    end: int
    from_level: int
    to_level: int

    def after(self, time: int) -> _Window:
        """What is left of it after a time, counted from there."""
        start = max(self.start - time, 0)
        return _Window(start, self.end - time, self.from_level, self.to_level)


class Switching:
    """One switch: what a quantity is by its level, and while an edge is under way.

    `by_level` gives the course of a stretch at a level; `between` the interval during an edge from
    the intervals of the two levels meanwhile.
    """

    def __init__(
        self,
        axis: Axis,
        shipped: Shipped,
        switch: Switch,
        by_level: Callable[[int, int], Course],
        between: Callable[[tuple[Interval, Interval]], Interval],
    ) -> None:
        self.axis, self.shipped, self.switch = axis, shipped, switch
        self.by_level, self.between = by_level, between
        self.level = shipped.blocks[0].block.levels[switch.name]

    def courses(self) -> Iterator[Course]:
        """One course per stretch, in order."""
        late: list[_Window] = []
        for number, stretch in enumerate(self.axis.stretches):
            windows = late + ([] if stretch.waits else self._windows(stretch.index))
            length = stretch.longest
            yield course(self._pieces(number, windows, length), length)
            # An edge that its clock's rounding takes beyond the end goes on in what follows, be it
            # the wait or, should the trigger come at once, the block after it.
            if not stretch.waits:
                late = [one.after(length) for one in windows if one.end > length]

    def _windows(self, index: int) -> list[_Window]:
        """When each edge may be under way at the electrode, as written and as emitted."""
        rows = self.shipped.blocks[index]
        errors = {(one.output, one.asked_s): one.error_s for one in rows.roundings}
        found = []
        for edge in rows.block.edges:
            if edge.output == self.switch.name:
                error = errors.get((edge.output, edge.command_s), Fraction(0))
                start = max(edge.start_s + min(error, Fraction(0)), Fraction(0))
                end = edge.end_s + max(error, Fraction(0))
                ends = self.axis.units(start), self.axis.units(end)
                found.append(_Window(*ends, edge.from_level, edge.to_level))
        return found

    def _pieces(self, number: int, windows: list[_Window], length: int) -> Iterator[Piece]:
        now = 0
        for window in windows:
            start, end = min(max(window.start, now), length), min(window.end, length)
            yield from self.by_level(number, self.level).pieces(now, start)
            if start < end:
                first, last = (
                    self.by_level(number, level).hull(start, end)
                    for level in (window.from_level, window.to_level)
                )
                between = self.between((first, last))
                yield start, between, between
            self.level, now = window.to_level, end
        rest = self.by_level(number, self.level)
        yield from rest.pieces(now, length)
        if now == length:
            yield length, rest.at(length), rest.at(length)
