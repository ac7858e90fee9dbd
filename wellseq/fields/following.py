"""Where a well stays while voltages move: regions of the axis that are proved, not sampled.

On a piece U(z, p) = U0(z) + p (U1(z) − U0(z)), so a derivative of U at a fixed z that has one sign
at both ends of the piece has it throughout.  Every interval between nodes is sorted by the
Bernstein controls of U′ and U″ at both ends, less what deviations of the voltages and the
interpolation can do: *rising outward*, *concave*, *convex*.
 Core W: the nearest nodes on both sides of the minimum where U rises outward all along; in between
 U is convex (so there is one minimum and it cannot leave), or flat: its oscillation, convex in p,
 is within the ripple at both ends.
 Own region on a side: outward from the core through intervals that rise or are concave.  After a
 concave stretch a rising one proves that nothing fell before it, so only the last stretch can hold
 a top, and no minimum is passed.  Flat shoulders are passed when U is nowhere lower than the ripple
 below the highest point so far (also convex in p).  What is not proved is left out, which costs
 depth.

Shapes: start, end, deviation (ne,); regions are inclusive node indices.  Units: V, m.
Accuracy: sound for the true field (the interpolation's error is a margin); tests/fields/
test_following.py.  Source: convexity of a maximum of affine functions, R. T. Rockafellar, Convex
Analysis (Princeton 1970) sec. 5.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from wellseq.fields.certificate import Region, extent
from wellseq.fields.hermite import Curve, FloatArray
from wellseq.fields.minima import RIPPLE_V, landscape

if TYPE_CHECKING:
    from wellseq.fields.field import Field

BISECTIONS_MAX = 14
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Located:
    """A minimum: its place, and the span of the minima on the same floor (m)."""

    z_m: float
    low_m: float
    high_m: float


@dataclass(frozen=True, slots=True)
class Proven:
    """What holds for every progress of a piece and every deviation allowed.

    `core` holds the well's minimum; `left` and `right` are the own regions, they meet the core at
    its edges; all are inclusive node indices.  `ripple_V` comes off every depth.  `z_end_m` is the
    minimum at the end.  `convex`: the minimum is the only one in the core.  `left_closed`,
    `right_closed`: the top of the barrier is always inside its region (else the depth is
    underrated).  `left_rise` and `right_rise`: from the core out to these nodes U rises outward at
    every progress.
    """

    core: Region
    left: Region
    right: Region
    ripple_V: float
    z_end_m: float
    convex: bool
    left_closed: bool
    right_closed: bool
    left_rise: int
    right_rise: int


def locate(
    field: Field, sign: float, vector: FloatArray, z_m: float, ripple_V: float = RIPPLE_V
) -> Located | None:
    """The minimum of U = sign · φ that a charge slides down to from z (m) at voltages (ne,) in V.

    Dimples below `ripple_V` are no hindrance.  None when it slides out of an end.
    """
    return _slide(field.curve(sign * vector), z_m, ripple_V)


def _slide(curve: Curve, z_m: float, ripple_V: float) -> Located | None:
    found = landscape(curve, ripple_V)
    index = found.basin(z_m)
    if index is None:
        return None
    place, low, high = found.minimum_m[index], found.low_m[index], found.high_m[index]
    return Located(float(place), float(low), float(high))


def prove(
    field: Field,
    sign: float,
    start: FloatArray,
    end: FloatArray,
    z_start_m: float,
    deviation: FloatArray,
    ripple_V: float,
    corners: Sequence[FloatArray] | FloatArray = (),
) -> Proven | None:
    """Follow the well that holds z (m) at `start` along the straight piece to `end` (V).

    Every electrode may stray by ± `deviation` (ne,) V at any time.  Where several progresses move
    independently, `corners` are the other corners of their box, (ne,) V each: what holds at all
    corners holds in the box.  None when no core is proved: the caller cuts the piece in time.
    """
    vectors = [start, end, *corners]
    known = (*vectors, deviation, np.array([z_start_m, ripple_V]))
    if not all(np.isfinite(numbers).all() for numbers in known):
        return None
    curves = [field.curve(sign * vector) for vector in vectors]
    first = _slide(curves[0], z_start_m, ripple_V)
    if first is None:
        return None
    others = [_slide(curve, first.z_m, ripple_V) for curve in curves[1:]]
    seen = [first, *(found for found in others if found is not None)]
    if len(seen) < len(curves):
        return None
    volts = max(float(np.abs(vector).sum()) for vector in vectors)
    piece = _Piece(field, curves, volts, np.abs(deviation), ripple_V)
    core = piece.core(min(found.low_m for found in seen), max(found.high_m for found in seen))
    if core is None:
        return None
    convex, core_ripple_V = piece.floor(core)
    if not convex and not core_ripple_V <= ripple_V:
        return None
    left, right = piece.side(core[0], -1), piece.side(core[1], +1)
    return Proven(
        core=core,
        left=(left.edge, core[0]),
        right=(core[1], right.edge),
        ripple_V=max(core_ripple_V, left.ripple_V, right.ripple_V),
        z_end_m=seen[1].z_m,
        convex=convex,
        left_closed=left.closed,
        right_closed=right.closed,
        left_rise=left.rise,
        right_rise=right.rise,
    )


def follow(
    field: Field,
    sign: float,
    start: FloatArray,
    end: FloatArray,
    z_start_m: float,
    ripple_V: float = RIPPLE_V,
) -> float | None:
    """Where (m) the well that holds z (m) at `start` is at `end`, proved piece by piece; V.

    The progress is halved where a piece is not proved, 14 times at most; None when that fails.
    """
    still = np.zeros_like(start)

    def walk(low: FloatArray, high: FloatArray, z_m: float, depth: int) -> float | None:
        proven = prove(field, sign, low, high, z_m, still, ripple_V)
        if proven is not None:
            return proven.z_end_m
        if depth == BISECTIONS_MAX:
            return None
        middle = (low + high) / 2
        reached = walk(low, middle, z_m, depth + 1)
        return None if reached is None else walk(middle, high, reached, depth + 1)

    return walk(start, end, z_start_m, 0)


@dataclass(frozen=True, slots=True)
class _Side:
    edge: int
    rise: int
    closed: bool
    ripple_V: float


class _Piece:
    """Every interval between nodes, sorted by what holds at all corners of a piece."""

    def __init__(
        self,
        field: Field,
        corners: Sequence[Curve],
        volts: float,
        deviation: FloatArray,
        ripple_V: float,
    ) -> None:
        self.field, self.corners = field, corners
        self.volts = volts + float(deviation.sum())
        self.deviation, self.ripple_V = deviation, ripple_V
        self.levels = [curve.bounds(0) for curve in corners]
        self.slope_low, self.slope_high = self._both(1)
        bend_low, bend_high = self._both(2)
        self.convex: BoolArray = bend_low > 0.0
        self.concave: BoolArray = bend_high < 0.0
        self.falls = _touching(self.slope_high < 0.0)
        self.rises = _touching(self.slope_low > 0.0)

    def _both(self, order: int) -> tuple[FloatArray, FloatArray]:
        """Bounds (nz − 1,) of U's derivative on every interval for all p and all deviations."""
        bounds = [curve.bounds(order) for curve in self.corners]
        margin = self.field.error(order) * self.volts + self.field.drift(self.deviation, order)
        lowest = np.min([low for low, _ in bounds], axis=0)
        highest = np.max([high for _, high in bounds], axis=0)
        return lowest - margin, highest + margin

    def core(self, low_m: float, high_m: float) -> Region | None:
        """The nearest nodes around a span (m) between which U's minimum stays, for all p."""
        curve = self.corners[0]
        place = (np.array([low_m, high_m]) - curve.start_m) / curve.step_m
        left = np.flatnonzero(self.falls[: int(np.floor(place[0])) + 1])
        first = int(np.ceil(place[1]))
        right = np.flatnonzero(self.rises[first:])
        if left.size == 0 or right.size == 0:
            return None
        return int(left[-1]), first + int(right[0])

    def floor(self, core: Region) -> tuple[bool, float]:
        """Whether U is convex on the core for all p; else how much it can oscillate there (V)."""
        first, last = core
        if self.convex[first:last].all():
            return True, 0.0
        spans = [high[first:last].max() - low[first:last].min() for low, high in self.levels]
        return False, float(max(spans)) + self._sway(first, last)

    def _sway(self, first: int, last: int) -> float:
        """How much deviations and the interpolation can tilt U between nodes first … last (V)."""
        error_V = 2 * self.field.error(0) * self.volts
        if not self.deviation.any():
            return error_V
        low, high = extent(self.field, (first, last))
        return error_V + float(self.deviation @ (high - low))

    def side(self, edge: int, outward: int) -> _Side:
        """The own region from a core's edge outward (−1 left, +1 right)."""
        if outward > 0:
            rising, concave = self.slope_low[edge:] > 0.0, self.concave[edge:]
        else:
            rising, concave = self.slope_high[:edge][::-1] < 0.0, self.concave[:edge][::-1]
        reach, ripple_V = self._outward(rising | concave, edge, outward)
        node = edge + outward * reach
        beyond = self.falls if outward > 0 else self.rises
        return _Side(
            edge=node,
            rise=edge + outward * _leading(rising),
            closed=node in (0, beyond.size - 1) or bool(beyond[node]),
            ripple_V=ripple_V,
        )

    def _outward(self, passable: BoolArray, edge: int, outward: int) -> tuple[int, float]:
        """How many intervals can be passed, and how deep the dips of flat shoulders are (V)."""
        part, turn = (slice(edge, None), 1) if outward > 0 else (slice(edge), -1)
        levels = [(low[part][::turn], high[part][::turn]) for low, high in self.levels]
        dips = [np.maximum.accumulate(high) - low for low, high in levels]
        dip_V = np.max(dips, axis=0)
        reach, ripple_V = _leading(passable), 0.0
        while reach < passable.size:
            run, worst_V = _leading(dip_V[reach:] <= self.ripple_V), np.inf
            while run:
                tilt_V = self._tilt(levels, edge, outward, reach, reach + run)
                worst_V = float(dip_V[reach : reach + run].max()) + tilt_V
                if worst_V <= self.ripple_V:
                    break
                run //= 2
            if not run:
                break
            ripple_V = max(ripple_V, worst_V)
            reach += run
            reach += _leading(passable[reach:])
        return reach, ripple_V

    def _tilt(
        self,
        levels: list[tuple[FloatArray, FloatArray]],
        edge: int,
        outward: int,
        first: int,
        last: int,
    ) -> float:
        """How much deviations can lower the intervals first … last − 1 against those before (V).

        Intervals count outward from the edge; those too low to overtop them do not count.
        """
        near = first
        for low, high in levels:
            least = low[first:last].min() + self.ripple_V - self.deviation.sum()
            tall = high[:last] > least
            near = min(near, int(tall.argmax())) if tall.any() else near
        if outward > 0:
            return self._sway(edge + near, edge + last)
        return self._sway(edge - last, edge - near)


def _touching(interval: BoolArray) -> BoolArray:
    """Nodes that belong to an interval with the flag: what holds on it holds at both its nodes."""
    node = np.zeros(interval.size + 1, dtype=bool)
    node[:-1] |= interval
    node[1:] |= interval
    return node


def _leading(flags: BoolArray) -> int:
    """How many leading entries are true."""
    return flags.size if flags.all() else int(flags.argmin())
