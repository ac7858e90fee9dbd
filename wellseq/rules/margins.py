"""How near a kept sentence came to being broken.

Where a comparison is all that kept it, the margin is the least distance of the value from its bound
while everything else that it takes was or may have been so; else the least time between what may
not be together, with waits as short as they can be.
"""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Iterable, Iterator

from wellseq.model import rulebook as book
from wellseq.rules import cuts
from wellseq.rules.course import reach
from wellseq.rules.cuts import Cuts
from wellseq.rules.moments import beginnings, endings
from wellseq.rules.reading import Reading
from wellseq.rules.rulings import Margin


def margin_of(
    sentence: book.Sentence, longest: Reading, shortest: Reading
) -> tuple[Margin | None, bool]:
    """The least margin, None where nothing came near, and whether what it watches for arises."""
    match sentence:
        case book.Always(trigger):
            parts = _parts(sentence.breaking)
            arises = trigger is None or bool(_inside(longest, trigger))
            found = _of_values(parts, longest) or _of_lengths(parts, longest)
            return found or _of_times(parts, shortest), arises
        case book.Around():
            return _around(sentence, longest, shortest)
        case book.AtEnd(wanted):
            end = longest.run.end
            last = cuts.before(end), cuts.after(end)
            return _of_values(_parts(book.negation(wanted)), longest, last), True
        case book.Counted(event, most, window_s):
            times = sorted(one.low for one in beginnings(event, shortest, standing=True))
            window = math.inf if window_s is None else shortest.axis.units(window_s)
            most_met = max(
                (bisect_right(times, first + window) - at for at, first in enumerate(times)),
                default=0,
            )
            return Margin(float(most - most_met), "times"), bool(times)


def _around(
    sentence: book.Around, longest: Reading, shortest: Reading
) -> tuple[Margin | None, bool]:
    """How much later what is wanted might have come, or how near an event came to failing."""
    before, wanted = sentence.side == "before", sentence.wanted
    found: list[int] = []
    arises = False
    for reading in (longest, shortest):
        moments = (beginnings if before else endings)(sentence.event, reading)
        arises = arises or bool(moments)
        if isinstance(wanted, book.Recent):
            window = reading.axis.units(wanted.window_s)
            there = _closed(cuts.within(reading.always(wanted.part)[0], *_ends(reading)))
            for one in moments:
                if before:
                    gaps = [one.high - end for start, end in there if start < one.low]
                else:
                    gaps = [start - one.low for start, end in there if end > one.high]
                found.append(window - max(min(gaps, default=window), 0))
            continue
        unwanted = book.negation(wanted)
        bad = (reading.before(unwanted) if before else reading.after(unwanted))[1]
        gap = _between([(one.low, one.high) for one in moments], _closed(_clip(reading, bad)))
        found += [] if gap is None else [gap]
    return _seconds(shortest, min(found, default=None)), arises


def _ends(reading: Reading) -> tuple[int, int]:
    return reading.run.low, reading.run.high


def _clip(reading: Reading, set_: Cuts) -> Cuts:
    return cuts.within(set_, *_ends(reading))


def _parts(condition: book.Condition) -> tuple[book.Condition, ...]:
    return condition.parts if isinstance(condition, book.AllOf) else (condition,)


def _inside(reading: Reading, condition: book.Condition) -> Cuts:
    """When a condition may be true, within the run."""
    return _clip(reading, reading.always(condition)[1])


# in the unit of a comparison


def _of_values(
    parts: tuple[book.Condition, ...], reading: Reading, only: Cuts | None = None
) -> Margin | None:
    found: list[Margin] = []
    everywhere = only or (reading.run.low, reading.run.high)
    for at, part in enumerate(parts):
        literals = list(_literals(part))
        if not literals:
            continue
        others = [_inside(reading, other) for other in (*parts[:at], *parts[at + 1 :])]
        when = cuts.meet(everywhere, *others)
        for comparison, true in literals if when else ():
            met = _met(comparison, reading, when)
            gap = min((_gap(comparison, true, *one) for one in met), default=math.inf)
            if math.isfinite(gap) and gap >= 0:
                found.append(Margin(gap, comparison.unit))
    return min(found, key=lambda one: one.value, default=None)


def _literals(condition: book.Condition) -> Iterator[tuple[book.Comparison, bool]]:
    """The comparisons any of which makes a condition true, and how each must turn out."""
    if isinstance(condition, book.Comparison):
        yield condition, True
    elif isinstance(condition, book.AnyOf):
        for part in condition.parts:
            yield from _literals(part)
    elif isinstance(condition, book.Not) and isinstance(condition.part, book.Comparison):
        yield condition.part, False
    elif isinstance(condition, book.Not) and isinstance(condition.part, book.AllOf):
        for part in condition.part.parts:
            yield from _literals(book.negation(part))


def _met(
    comparison: book.Comparison, reading: Reading, when: Cuts
) -> Iterator[tuple[float, float]]:
    """The intervals of a quantity over some instants of the run."""
    signals, quantity = reading.signals, comparison.quantity
    local = list(_local(reading, when))
    if isinstance(quantity, book.OfClouds):
        for one in signals.crowds.of(quantity):
            if cuts.touches(local[one.stretch], cuts.before(one.start), cuts.after(one.end)):
                yield one.low, one.high
        return
    for course, part in zip(signals.course(quantity), local, strict=True):
        met = reach(course, part)
        if met is not None:
            yield met


def _local(reading: Reading, when: Cuts) -> Iterator[Cuts]:
    """A set of instants of the run, stretch by stretch in its own time."""
    run = reading.run
    for number, (start, length) in enumerate(zip(run.starts, run.lengths, strict=True)):
        low, high = reading.axis.span(number, length)
        yield cuts.shifted(cuts.within(when, low + 2 * start, high + 2 * start), -start)


def _gap(comparison: book.Comparison, true: bool, low: float, high: float) -> float:
    """How far an interval of the quantity is from making the comparison turn out so."""
    first = -math.inf if comparison.low is None else float(comparison.low)
    last = math.inf if comparison.high is None else float(comparison.high)
    match comparison.relation:
        case "above":
            return first - high if true else low - first
        case "below":
            return low - last if true else last - high
        case "beyond":
            least = max(low, -high, 0.0)
            return first - max(high, -low) if true else least - first
        case "between":
            return max(first - high, low - last) if true else min(low - first, last - high)


# in time


def _of_lengths(parts: tuple[book.Condition, ...], reading: Reading) -> Margin | None:
    """What `for T` left of its time: T less the longest that the condition may have held."""
    found = [
        reading.axis.units(part.window_s)
        - max((end - start for start, end in _closed(_inside(reading, part.part))), default=0)
        for part in parts
        if isinstance(part, book.Held)
    ]
    return _seconds(reading, max((one for one in found if one >= 0), default=None))


def _of_times(parts: tuple[book.Condition, ...], reading: Reading) -> Margin | None:
    if len(parts) < 2:
        return None
    sets = [_inside(reading, part) for part in parts]
    found = [
        _between(_closed(one), _closed(cuts.meet(*sets[:at], *sets[at + 1 :])))
        for at, one in enumerate(sets)
    ]
    return _seconds(reading, min((one for one in found if one is not None), default=None))


def _closed(set_: Cuts) -> list[tuple[int, int]]:
    return [(start >> 1, end >> 1) for start, end in cuts.parts(set_)]


def _between(one: Iterable[tuple[int, int]], other: Iterable[tuple[int, int]]) -> int | None:
    """The least time from a part of one set to a part of the other; None where one is empty."""
    ends = [(start, end, 0) for start, end in one] + [(start, end, 1) for start, end in other]
    least: int | None = None
    last: list[int | None] = [None, None]
    for start, end, which in sorted(ends):
        before = last[1 - which]
        if before is not None:
            gap = max(start - before, 0)
            least = gap if least is None else min(least, gap)
        mine = last[which]
        last[which] = end if mine is None else max(mine, end)
    return least


def _seconds(reading: Reading, units: int | None) -> Margin | None:
    return None if units is None else Margin(float(reading.axis.seconds(units)), "s")
