"""A quantity over one stretch of time, known to lie between two bounds that go straight.

On each piece the lower bound goes straight from `lows[0]` to `lows[1]`, the upper one likewise; the
next piece may begin elsewhere.  Where a bound crosses a limit between two whole units of time, what
is surely so is rounded inward and what is possibly so outward.
"""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
import numpy.typing as npt

from wellseq.rules.cuts import Cuts, after, before, joined, meet, parts, union

Floats = npt.NDArray[np.float64]
Interval = tuple[float, float]
Piece = tuple[int, Interval, Interval]
"""Where a piece begins (units), and the interval of the quantity at its beginning and its end."""
Sets = tuple[Cuts, Cuts]
"""The instants at which something is surely so, and those at which it may be so."""


@dataclass(frozen=True, slots=True)
class Course:
    """Bounds of one quantity from 0 to `length` units, in the quantity's unit.

    starts: (n,) rising from 0; the last piece may begin at `length` and be that instant alone.
    lows and highs: (2, n), the bound at the beginning and at the end of each piece.
    """

    starts: tuple[int, ...]
    length: int
    lows: Floats
    highs: Floats

    def at(self, time: int) -> Interval:
        """The interval at an instant."""
        index = max(bisect_right(self.starts, time) - 1, 0)
        return self._at(index, time, self.lows), self._at(index, time, self.highs)

    def _at(self, index: int, time: int, bound: Floats) -> float:
        first, last = float(bound[0, index]), float(bound[1, index])
        start, end = self.starts[index], self._end(index)
        if first == last or start == end:
            return first
        return first + (last - first) * ((time - start) / (end - start))

    def _end(self, index: int) -> int:
        return self.starts[index + 1] if index + 1 < len(self.starts) else self.length

    def pieces(self, start: int, end: int) -> Iterator[Piece]:
        """The pieces between two instants, cut off at both."""
        index = max(bisect_right(self.starts, start) - 1, 0)
        while start < end:
            stop = min(self._end(index), end)
            first = self._at(index, start, self.lows), self._at(index, start, self.highs)
            last = self._at(index, stop, self.lows), self._at(index, stop, self.highs)
            yield start, first, last
            start, index = stop, index + 1

    def hull(self, start: int, end: int) -> Interval:
        """The interval of the quantity over a time, both its ends included."""
        first, last = self.at(start), self.at(end)
        low, high = min(first[0], last[0]), max(first[1], last[1])
        for _, one, other in self.pieces(start, end):
            low, high = min(low, one[0], other[0]), max(high, one[1], other[1])
        return low, high


def course(pieces: Iterable[Piece], length: int) -> Course:
    """A course from its pieces in order; those that change nothing are left out."""
    kept: list[Piece] = []
    for piece in pieces:
        if kept and kept[-1][0] == piece[0]:
            kept.pop()
        if kept and kept[-1][1] == kept[-1][2] == piece[1] == piece[2]:
            continue
        kept.append(piece)
    lows = np.array([[one[1][0] for one in kept], [one[2][0] for one in kept]])
    highs = np.array([[one[1][1] for one in kept], [one[2][1] for one in kept]])
    return Course(tuple(one[0] for one in kept), length, lows, highs)


def constant(interval: Interval, length: int) -> Course:
    """A quantity that stays within one interval."""
    return course([(0, interval, interval)], length)


def less(one: Course, other: Course) -> Course:
    """The difference of two quantities over the same time."""
    starts = sorted({*one.starts, *other.starts})
    found: list[Piece] = []
    for start, end in zip(starts, [*starts[1:], one.length], strict=True):
        for (_, first, last), (_, away, gone) in zip(
            one.pieces(start, end), other.pieces(start, end), strict=True
        ):
            found.append((start, _less(first, away), _less(last, gone)))
    if not found or starts[-1] == one.length:
        last = _less(one.at(one.length), other.at(one.length))
        found.append((one.length, last, last))
    return course(found, one.length)


def _less(one: Interval, other: Interval) -> Interval:
    return one[0] - other[1], one[1] - other[0]


def compare(quantity: Course, relation: str, low: Fraction | None, high: Fraction | None) -> Sets:
    """When a quantity is surely, and when it may be, in a relation to one or two limits."""
    lows, highs = quantity.lows, quantity.highs
    if relation == "above":
        assert low is not None
        bound = float(low)
        return (
            _over(quantity, lows, bound, strict=True, inward=True),
            _over(quantity, highs, bound, strict=True, inward=False),
        )
    if relation == "below":
        assert high is not None
        bound = -float(high)
        return (
            _over(quantity, -highs, bound, strict=True, inward=True),
            _over(quantity, -lows, bound, strict=True, inward=False),
        )
    if relation == "beyond":
        assert low is not None
        over = compare(quantity, "above", low, None)
        under = compare(quantity, "below", None, -low)
        return union(over[0], under[0]), union(over[1], under[1])
    assert low is not None
    assert high is not None
    first, last = float(low), float(high)
    return (
        meet(
            _over(quantity, lows, first, strict=False, inward=True),
            _over(quantity, -highs, -last, strict=False, inward=True),
        ),
        meet(
            _over(quantity, highs, first, strict=False, inward=False),
            _over(quantity, -lows, -last, strict=False, inward=False),
        ),
    )


def _over(quantity: Course, bound: Floats, limit: float, *, strict: bool, inward: bool) -> Cuts:
    """When a bound (2, n) is above a limit, or at it too unless `strict`."""
    over = bound > limit if strict else bound >= limit
    whole = over[0] & over[1]
    # A bound that only ends above its limit, or only begins there, crosses it on the way; one that
    # begins at it and rises is above it from then on.
    crossing = (over[0] != over[1]) & (bound[0] != bound[1])
    found: list[tuple[int, int]] = []
    edges = np.flatnonzero(np.diff(np.concatenate(([False], whole, [False]))))
    for first, last in zip(edges[::2].tolist(), edges[1::2].tolist(), strict=True):
        found.append((before(quantity.starts[first]), _end_cut(quantity, last - 1)))
    for index in np.flatnonzero(crossing).tolist():
        found.append(_crossed(quantity, bound, limit, index, strict, inward))
    return joined(found)


def _end_cut(quantity: Course, index: int) -> int:
    """The cut at which a piece ends: the next one has its last instant, after the last none has."""
    if index + 1 < len(quantity.starts):
        return before(quantity.starts[index + 1])
    return after(quantity.length)


def _crossed(
    quantity: Course, bound: Floats, limit: float, index: int, strict: bool, inward: bool
) -> tuple[int, int]:
    """The part of one piece on which its bound is above the limit."""
    start, end = quantity.starts[index], quantity._end(index)
    first, last = Fraction(float(bound[0, index])), Fraction(float(bound[1, index]))
    at = start + (Fraction(limit) - first) * (end - start) / (last - first)
    rising = last > first
    if at.denominator == 1:
        closed = before(int(at)) if rising else after(int(at))
        opened = after(int(at)) if rising else before(int(at))
        cut = opened if strict else closed
    elif rising:
        cut = before(math.ceil(at)) if inward else after(math.floor(at))
    else:
        cut = after(math.floor(at)) if inward else before(math.ceil(at))
    return (cut, _end_cut(quantity, index)) if rising else (before(start), cut)


def reach(quantity: Course, cuts: Cuts) -> Interval | None:
    """The least lower and the greatest upper bound over a set of instants; None for no instant."""
    found: Interval | None = None
    for first, last in parts(cuts):
        low, high = quantity.hull(first >> 1, min(last >> 1, quantity.length))
        found = (low, high) if found is None else (min(low, found[0]), max(high, found[1]))
    return found
