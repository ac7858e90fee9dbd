"""How fast the voltage of each electrode is moved, V/s, from the motions that the rows follow.

A straight ramp has its slope; a smooth one anything from nothing to its steepest; an edge of a
converter anything up to its slew, an edge of a switch anything at all.  The single steps of a
staircase are not counted: they are bounded by the margin `staircase`, not by a slope.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator

from wellseq.model.trap import Converter, Switch
from wellseq.rules.axis import Axis
from wellseq.rules.course import Course, Interval, Piece, course
from wellseq.rules.switching import Switching
from wellseq.timeline.shipped import Shipped
from wellseq.timeline.timeline import Piece as Motion
from wellseq.timeline.timeline import Shape

STILL: Interval = (0.0, 0.0)


class Slews:
    """The courses of all outputs' slopes, made when they are first asked for; one per stretch."""

    def __init__(self, axis: Axis, shipped: Shipped) -> None:
        self.axis, self.shipped = axis, shipped
        self.trap = axis.timeline.trap
        self._made: dict[str, tuple[Course, ...]] = {}

    def of(self, output: str) -> tuple[Course, ...]:
        """The slope of an output at its electrodes, one course per stretch."""
        if output not in self._made:
            part = self.trap.output(output)
            if isinstance(part, Switch):
                switching = Switching(self.axis, self.shipped, part, self._levels(part), _any_slope)
                self._made[output] = tuple(switching.courses())
            else:
                self._made[output] = tuple(self._moved(part))
        return self._made[output]

    def _levels(self, switch: Switch) -> Callable[[int, int], Course]:
        def of(number: int, level: int) -> Course:
            behind = switch.levels[level]
            if isinstance(behind, str):
                return self.of(behind)[number]
            return course([(0, STILL, STILL)], self.axis.stretches[number].longest)

        return of

    def _moved(self, converter: Converter) -> Iterator[Course]:
        for stretch in self.axis.stretches:
            motions: list[Motion] = []
            if not stretch.waits:
                block = self.axis.timeline.blocks[stretch.index]
                motions = [piece for piece in block.pieces if piece.output == converter.name]
            pieces: list[Piece] = [(0, STILL, STILL)]
            for motion in motions:
                slope = _slope(motion, converter)
                pieces.append((self.axis.units(motion.start_s), slope, slope))
                pieces.append((self.axis.units(motion.end_s), STILL, STILL))
            yield course(pieces, stretch.longest)


def _slope(motion: Motion, converter: Converter) -> Interval:
    """The interval of a motion's slope, V/s."""
    swing_V = motion.to_V - motion.from_V
    straight = swing_V / float(motion.end_s - motion.start_s)
    if motion.shape is Shape.STRAIGHT:
        return straight, straight
    steepest = straight * math.pi / 2
    if motion.shape is Shape.EDGE:
        steepest = math.copysign(converter.slew_V_per_s, swing_V)
    return min(steepest, 0.0), max(steepest, 0.0)


def _any_slope(_: tuple[Interval, Interval]) -> Interval:
    return -math.inf, math.inf
