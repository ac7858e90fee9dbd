"""Sets of instants as whole numbers, exact, with every end open or closed.

Time is counted in whole units.  A cut is 2 t (just before the instant t) or 2 t + 1 (just after
it); a set is a rising tuple of cuts, its parts beginning at even places and ending at odd ones:
[a, b] is (2a, 2b + 1), [a, b) is (2a, 2b), the single instant a is (2a, 2a + 1).

The windows are those of bounded metric temporal logic (Koymans, Specifying real-time properties
with metric temporal logic, Real-Time Systems 2, 255 (1990)): each moves the ends of a part.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Iterator, Sequence

Cuts = tuple[int, ...]
NOTHING: Cuts = ()


def before(time: int) -> int:
    """The cut just before an instant."""
    return 2 * time


def after(time: int) -> int:
    """The cut just after an instant."""
    return 2 * time + 1


def at_least(sets: Sequence[Cuts], count: int) -> Cuts:
    """The instants that lie in at least `count` of the sets."""
    events = sorted(
        (cut, 1 if place % 2 == 0 else -1) for cuts in sets for place, cut in enumerate(cuts)
    )
    found: list[int] = []
    level, inside, index = 0, False, 0
    while index < len(events):
        cut = events[index][0]
        while index < len(events) and events[index][0] == cut:
            level += events[index][1]
            index += 1
        if (level >= count) is not inside:
            inside = not inside
            found.append(cut)
    return tuple(found)


def union(*sets: Cuts) -> Cuts:
    """The instants of any of the sets."""
    some = [cuts for cuts in sets if cuts]
    return some[0] if len(some) == 1 else at_least(some, 1)


def meet(*sets: Cuts) -> Cuts:
    """The instants of all of the sets."""
    if not all(sets):
        return NOTHING
    if len(sets) == 1 or (len(sets) == 2 and sets[0] == sets[1]):
        return sets[0]
    return at_least(sets, len(sets))


def complement(cuts: Cuts, low: int, high: int) -> Cuts:
    """What a set leaves of all that lies between two cuts."""
    inner = within(cuts, low, high)
    starts = inner[1:] if inner and inner[0] == low else (low, *inner)
    return starts[:-1] if starts and starts[-1] == high else (*starts, high)


def within(cuts: Cuts, low: int, high: int) -> Cuts:
    """The part of a set between two cuts."""
    if not cuts or low >= high:
        return NOTHING
    if cuts[0] >= low and cuts[-1] <= high:
        return cuts
    first = bisect_right(cuts, low)
    last = bisect_right(cuts, high - 1)
    if first >= last and first % 2 == 0:
        return NOTHING
    inner = cuts[first:last]
    if first % 2:
        inner = (low, *inner)
    return (*inner, high) if len(inner) % 2 else inner


def parts(cuts: Cuts) -> Iterator[tuple[int, int]]:
    """The parts of a set in order, each from its first cut to its last."""
    return zip(cuts[::2], cuts[1::2], strict=True)


def joined(pairs: Iterable[tuple[int, int]]) -> Cuts:
    """A set from parts that may overlap or be empty."""
    found: list[int] = []
    for start, end in sorted(pair for pair in pairs if pair[0] < pair[1]):
        if found and start <= found[-1]:
            found[-1] = max(found[-1], end)
        else:
            found += (start, end)
    return tuple(found)


def shifted(cuts: Cuts, time: int) -> Cuts:
    """The set, later by a time."""
    return tuple(cut + 2 * time for cut in cuts)


def holds(cuts: Cuts, time: int) -> bool:
    """Whether an instant lies in the set."""
    return bisect_right(cuts, 2 * time) % 2 == 1


def covers(cuts: Cuts, low: int, high: int) -> bool:
    """Whether all between two cuts lies in the set."""
    place = bisect_right(cuts, low)
    return low >= high or (place % 2 == 1 and cuts[place] >= high)


def touches(cuts: Cuts, low: int, high: int) -> bool:
    """Whether anything between two cuts lies in the set."""
    place = bisect_right(cuts, low)
    return low < high and (place % 2 == 1 or (place < len(cuts) and cuts[place] < high))


# Windows.  X is the set, T the time; each gives the instants t for which the words are true.


def held(cuts: Cuts, time: int) -> Cuts:
    """All of [t − T, t] lies in X."""
    return joined((start + 2 * time, end) for start, end in parts(cuts))


def recent(cuts: Cuts, time: int) -> Cuts:
    """Some of [t − T, t] lies in X."""
    return joined((start, end + 2 * time) for start, end in parts(cuts))


def just_before(cuts: Cuts) -> Cuts:
    """X holds at all instants before t that are near enough."""
    return joined((start | 1, end | 1) for start, end in parts(cuts))


def held_before(cuts: Cuts, time: int) -> Cuts:
    """All of [t − T, t) lies in X."""
    return joined((start + 2 * time, end | 1) for start, end in parts(cuts))


def recent_before(cuts: Cuts, time: int) -> Cuts:
    """Some of [t − T, t) lies in X."""
    return joined((start | 1, end + 2 * time) for start, end in parts(cuts))


def just_after(cuts: Cuts) -> Cuts:
    """X holds at all instants after t that are near enough."""
    return joined((start & -2, end & -2) for start, end in parts(cuts))


def held_after(cuts: Cuts, time: int) -> Cuts:
    """All of (t, t + T] lies in X."""
    return joined((start & -2, end - 2 * time) for start, end in parts(cuts))


def recent_after(cuts: Cuts, time: int) -> Cuts:
    """Some of (t, t + T] lies in X."""
    return joined((start - 2 * time, end & -2) for start, end in parts(cuts))
