"""What is known of clouds over time: number, temperature, depth and place of their wells.

Nothing is forecast here.  A number is at most what was declared, once per catch or load, since a
cloud can only lose particles; an assumed number takes its place until more are caught.  An assumed
temperature stands until the next step that moves, drives or names anything.  A depth is at least
what was certified, and where nothing moves at most what was found, with everything that was taken
off put back on; a place is the proved region of the well.  Elsewhere the quantity is not known, and
says so.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise

from wellseq.model import effects
from wellseq.model.rulebook import OfClouds
from wellseq.model.sequence import CloudDeclared
from wellseq.rules.axis import Axis
from wellseq.rules.cuts import Cuts, before, joined, touches
from wellseq.timeline.timeline import Block, Event
from wellseq.wells.wells import Held, Wells

QUIET = frozenset(("hold", "set", "expect", "require", "assume", "await"))
"""Steps that leave an assumed temperature as it is."""


@dataclass(frozen=True, slots=True)
class Known:
    """A time within which a quantity of a cloud lies in an interval.

    `stretch` is the number of the axis' stretch, times are its units.  `there` says that the cloud
    is surely in the trap then, `known` that the interval was found and does not merely stand for
    not knowing.
    """

    stretch: int
    start: int
    end: int
    low: float
    high: float
    there: bool
    known: bool = True


@dataclass(slots=True)
class _Stay:
    """A cloud from its coming (block, s) to its going; `sure` is when it had surely come."""

    cloud: CloudDeclared
    since: tuple[int, Fraction]
    sure: tuple[int, Fraction]
    until: tuple[int, Fraction]
    arrivals: list[tuple[int, Fraction]]


class Crowds:
    """All clouds of a timeline, with their wells."""

    def __init__(self, axis: Axis, wells: Wells) -> None:
        self.axis, self.wells = axis, wells
        self.timeline = axis.timeline
        self._held: dict[str, list[Held]] = {}
        for held in wells.held:
            self._held.setdefault(held.cloud, []).append(held)
        self._block_stretch = {
            one.index: number for number, one in enumerate(axis.stretches) if not one.waits
        }
        self._moving = [self._motion(block) for block in self.timeline.blocks]
        self.stays = tuple(self._stays())

    def of(self, quantity: OfClouds) -> Iterator[Known]:
        """Everything known of a quantity, cloud after cloud; all time that a cloud is there."""
        for stay in self.stays:
            name = stay.cloud.species.name
            species = "ion" if name.startswith("ion ") else name
            if quantity.species not in ("", species):
                continue
            match quantity.what:
                case "number":
                    yield from self._number(stay)
                case "temperature":
                    yield from self._temperature(stay)
                case "depth":
                    yield from self._depth(stay)
                case _:
                    yield from self._position(stay)

    def _motion(self, block: Block) -> Cuts:
        """When anything moves in a block."""
        moving = [(one.start_s, one.end_s) for one in block.pieces]
        moving += [(one.start_s, one.end_s) for one in block.edges]
        units = self.axis.units
        return joined((before(units(start)), before(units(end))) for start, end in moving)

    # coming and going

    def _stays(self) -> Iterator[_Stay]:
        here: dict[str, _Stay] = {}
        last = self.timeline.blocks[-1]
        end = last.index, last.duration_s
        for block in self.timeline.blocks:
            for event in sorted(block.events, key=lambda event: (event.start_s, event.number)):
                start, stop = (block.index, event.start_s), (block.index, event.end_s)
                match event.effect:
                    case effects.Placed(cloud=cloud) | effects.Caught(cloud=cloud):
                        declared = self.timeline.clouds[cloud]
                        stay = here.setdefault(cloud, _Stay(declared, start, stop, end, []))
                        stay.arrivals.append(start)
                    case effects.Released() | effects.Kicked():
                        for cloud in self._gone(event, block.index):
                            if cloud in here:
                                here[cloud].until = stop
                                yield here.pop(cloud)
        yield from here.values()

    def _gone(self, event: Event, block: int) -> Iterator[str]:
        """The clouds that a step lets go: its own, and those that shared the well."""
        effect = event.effect
        if isinstance(effect, effects.Kicked):
            yield effect.light
            return
        assert isinstance(effect, effects.Released)
        yield effect.cloud
        moment = block, event.start_s
        mine = self._well_at(effect.cloud, moment)
        for cloud in self._held:
            other = self._well_at(cloud, moment)
            if cloud == effect.cloud or mine is None or other is None:
                continue
            if mine.charge_sign == other.charge_sign and mine.well_m == other.well_m:
                yield cloud

    def _well_at(self, cloud: str, moment: tuple[int, Fraction]) -> Held | None:
        """The last stretch in which a cloud's well was held before a moment."""
        before = [one for one in self._held.get(cloud, ()) if (one.block, one.end_s) <= moment]
        return before[-1] if before else None

    # pieces of a stay

    def _spans(self, stay: _Stay) -> Iterator[tuple[int, int, int, bool]]:
        """The time of a stay: stretch, start, end in units, and whether the cloud is surely there.

        Surely is it there where its well is held, and in waits between such blocks.
        """
        first, last = self._block_stretch[stay.since[0]], self._block_stretch[stay.until[0]]
        sure_from = self._place(stay.sure)
        held = sorted(
            (self._block_stretch[one.block], *self._ends(one))
            for one in self._held.get(stay.cloud.name, ())
        )
        for number in range(first, last + 1):
            stretch = self.axis.stretches[number]
            start = self.axis.units(stay.since[1]) if number == first else 0
            end = self.axis.units(stay.until[1]) if number == last else stretch.longest
            if stretch.waits:
                yield number, start, end, (number, 0) >= sure_from
                continue
            now = start
            for _, begin, stop in (one for one in held if one[0] == number):
                begin, stop = max(begin, now), min(stop, end)
                if begin >= stop or (number, begin) < sure_from:
                    continue
                if now < begin:
                    yield number, now, begin, False
                yield number, begin, stop, True
                now = stop
            if now < end:
                yield number, now, end, False

    def _place(self, moment: tuple[int, Fraction]) -> tuple[int, int]:
        return self._block_stretch[moment[0]], self.axis.units(moment[1])

    def _ends(self, held: Held) -> tuple[int, int]:
        return self.axis.units(held.start_s), self.axis.units(held.end_s)

    def _unknown(self, stay: _Stay, low: float = 0.0) -> Iterator[Known]:
        for number, start, end, there in self._spans(stay):
            yield Known(number, start, end, low, math.inf, there, known=False)

    # quantities

    def _number(self, stay: _Stay) -> Iterator[Known]:
        declared = stay.cloud.number
        if declared is None:
            yield from self._unknown(stay)
            return
        most = float(declared.value + declared.half_width)
        changes: list[tuple[tuple[int, int], float, bool]] = [
            (self._place(moment), most, True) for moment in stay.arrivals
        ]
        changes += [(place, high, False) for place, _, high, _ in self._assumed(stay, "number")]
        changes.sort(key=lambda change: change[0])
        for number, start, end, there in self._spans(stay):
            edges = [at for (where, at), _, _ in changes if where == number and start < at < end]
            for first, last in _between(start, edges, end):
                high = 0.0
                for place, size, adds in changes:
                    if place <= (number, first):
                        high = high + size if adds else size
                yield Known(number, first, last, 0.0, high, there)

    def _temperature(self, stay: _Stay) -> Iterator[Known]:
        assumed = list(self._assumed(stay, "temperature"))
        for number, start, end, there in self._spans(stay):
            edges = [
                at
                for place, _, _, until in assumed
                for where, at in (place, until)
                if where == number and start < at < end
            ]
            for first, last in _between(start, edges, end):
                found = [
                    (low, high)
                    for place, low, high, until in assumed
                    if place <= (number, first) < until
                ]
                low, high = found[-1] if found else (0.0, math.inf)
                yield Known(number, first, last, low, high, there, known=bool(found))

    def _assumed(
        self, stay: _Stay, quantity: str
    ) -> Iterator[tuple[tuple[int, int], float, float, tuple[int, int]]]:
        """Values that the author assumed: where, low, high, and where something is done next."""
        for block in self.timeline.blocks:
            for event in block.events:
                effect = event.effect
                if not isinstance(effect, effects.Assumed) or effect.quantity != quantity:
                    continue
                moment = block.index, event.end_s
                if effect.cloud == stay.cloud.name and stay.since <= moment <= stay.until:
                    low, high = effect.value - effect.half_width, effect.value + effect.half_width
                    yield self._place(moment), max(low, 0.0), high, self._next_act(event.number)

    def _next_act(self, number: int) -> tuple[int, int]:
        """Where the next step begins that may heat or cool a cloud."""
        for block in self.timeline.blocks:
            for span in block.spans:
                if span.number > number and self.timeline.origins[span.number].step not in QUIET:
                    return self._place((block.index, span.start_s))
        return len(self.axis.stretches), 0

    def _depth(self, stay: _Stay) -> Iterator[Known]:
        for held in self._of_stay(stay):
            number, (start, end) = self._block_stretch[held.block], self._ends(held)
            most = math.inf
            if not touches(self._moving[held.block], before(start), before(end)):
                most = min(side.best_V + side.losses.total_V for side in (held.left, held.right))
            yield Known(number, start, end, held.certified_V, most, True)
        yield from self._elsewhere(stay)

    def _position(self, stay: _Stay) -> Iterator[Known]:
        for held in self._of_stay(stay):
            number, (start, end) = self._block_stretch[held.block], self._ends(held)
            yield Known(number, start, end, *held.well_m, True)
        yield from self._elsewhere(stay, -math.inf)

    def _of_stay(self, stay: _Stay) -> Iterator[Held]:
        for held in self._held.get(stay.cloud.name, ()):
            if stay.since <= (held.block, held.start_s) and (held.block, held.end_s) <= stay.until:
                yield held

    def _elsewhere(self, stay: _Stay, low: float = 0.0) -> Iterator[Known]:
        """Where no well is held nothing is known; a wait is like the last instant before it."""
        for number, start, end, there in self._spans(stay):
            if self.axis.stretches[number].waits:
                yield self._as_before(stay, number, end, low)
            elif not there:
                yield Known(number, start, end, low, math.inf, False, known=False)

    def _as_before(self, stay: _Stay, number: int, end: int, low: float) -> Known:
        block = self.axis.stretches[number].index - 1
        held = [one for one in self._of_stay(stay) if one.block == block]
        last = max(held, key=lambda one: one.end_s, default=None)
        if last is None or last.end_s < self.timeline.blocks[block].duration_s:
            return Known(number, 0, end, low, math.inf, False, known=False)
        if low < 0:
            return Known(number, 0, end, *last.well_m, True)
        return Known(number, 0, end, last.certified_V, math.inf, True)


def _between(start: int, edges: list[int], end: int) -> Iterator[tuple[int, int]]:
    """The pieces into which edges cut a time."""
    ends = [start, *sorted(set(edges)), end]
    yield from ((first, last) for first, last in pairwise(ends) if first < last)
