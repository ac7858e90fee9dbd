"""A sentence → where it is broken on one run, surely or perhaps."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Iterator
from dataclasses import dataclass

from wellseq.model import rulebook as book
from wellseq.rules.course import Sets
from wellseq.rules.cuts import after, before, covers, parts, touches, within
from wellseq.rules.moments import Moment, beginnings, endings
from wellseq.rules.reading import Reading


@dataclass(frozen=True, slots=True)
class Breach:
    """A sentence is broken between two cuts of the run; `sure`: it surely is."""

    start: int
    end: int
    sure: bool


def breaches(sentence: book.Sentence, reading: Reading, loosely: bool = False) -> list[Breach]:
    """Every breach on a run, in order; with `loosely` all that any waits could bring about."""
    match sentence:
        case book.Always():
            return list(_always(_read(sentence.breaking, reading, loosely), reading))
        case book.Around():
            return list(_around(sentence, reading, loosely))
        case book.AtEnd(wanted):
            end = reading.run.end
            if reading.run.high <= before(end):
                return []
            broken = _read(book.negation(wanted), reading, loosely)
            return list(_at([Moment(end, end, True)], broken))
        case book.Counted():
            return list(_counted(sentence, reading))


def _read(condition: book.Condition, reading: Reading, loosely: bool) -> Sets:
    return reading.loosely(condition) if loosely else reading.always(condition)


def _always(broken: Sets, reading: Reading) -> Iterator[Breach]:
    run = reading.run
    surely, perhaps = (within(one, run.low, run.high) for one in broken)
    for start, end in parts(perhaps):
        inner = within(surely, start, end)
        if inner:
            yield from (Breach(first, last, True) for first, last in parts(inner))
        else:
            yield Breach(start, end, False)


def _around(sentence: book.Around, reading: Reading, loosely: bool) -> Iterator[Breach]:
    unwanted = book.negation(sentence.wanted)
    if sentence.side == "before":
        moments, read = beginnings(sentence.event, reading), reading.before
    else:
        moments, read = endings(sentence.event, reading), reading.after
    broken = reading.loosely(unwanted, sentence.side) if loosely else read(unwanted)
    yield from _at(moments, broken)


def _at(moments: list[Moment], broken: Sets) -> Iterator[Breach]:
    """Breaches at moments: sure where, whenever the moment is, the thing is surely broken."""
    surely, perhaps = broken
    for moment in moments:
        start, end = before(moment.low), after(moment.high)
        if moment.sure and covers(surely, start, end):
            yield Breach(start, end, True)
        elif touches(perhaps, start, end):
            yield Breach(start, end, False)


def _counted(sentence: book.Counted, reading: Reading) -> Iterator[Breach]:
    """The beginning that is one too many, within the window or in all."""
    moments = sorted(
        beginnings(sentence.event, reading, standing=True), key=lambda one: (one.low, one.high)
    )
    sure = [moment for moment in moments if moment.sure]
    window = None if sentence.window_s is None else reading.axis.units(sentence.window_s)
    found = _first_too_many(sure, sentence.most, window, surely=True)
    if found is not None:
        yield Breach(before(found.low), after(found.high), True)
        return
    found = _first_too_many(moments, sentence.most, window, surely=False)
    if found is not None:
        yield Breach(before(found.low), after(found.high), False)


def _first_too_many(
    moments: list[Moment], most: int, window: int | None, surely: bool
) -> Moment | None:
    """The first moment at which more than `most` lie in a window; None where none do.

    Surely so when a window holds them wherever each may be; perhaps so when some choice of them
    lies in one.  Moments do not overlap, so that their lows and their highs come in one order.
    """
    if window is None:
        return moments[most] if len(moments) > most else None
    lows, highs = [one.low for one in moments], [one.high for one in moments]
    for start in lows if surely else highs:
        first = bisect_left(lows if surely else highs, start)
        last = bisect_right(highs if surely else lows, start + window)
        if last - first > most:
            return moments[first + most]
    return None
