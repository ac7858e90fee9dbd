"""The author's own claim, `require`, is not surely true.

Every claim is judged on an interval: only one that lies wholly inside what was claimed passes.
`depth` (V) is the least own depth over the last step that took time, or since the last label with
`throughout`; `separation` (m) the distance of two wells at that place, or the least since the last
label; `time` (s) what passes from the start of the labelled step, waits for triggers included from
nothing to their longest.  What was not measured is not known (NaN), and unsure.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property

from wellseq.base.finding import Limit, Mistake, Origin, Reading, at_least, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import worst
from wellseq.checks.numbers import amount
from wellseq.checks.windows import Moment, Story, Track, Window
from wellseq.checks.written import mistakes_named
from wellseq.model.effects import Claimed
from wellseq.timeline.timeline import Timeline
from wellseq.wells.wells import Held, SideDepth, Wells

SAYS = "Something that the sequence requires is not surely so."
NEEDS = ("timeline", "wells")
WAIVABLE = True

UNITS = {"depth": "V", "separation": "m", "time": "s"}
Interval = tuple[float, float]
NOT_KNOWN: Interval = (math.nan, math.nan)


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The interval of each claimed quantity against its bounds, V, m or s."""
    yield from mistakes_named(case, "requirement-not-met")
    yield from worst(_claims(case, _Measured(reached(case.timeline), reached(case.wells))))


def _claims(case: Case, measured: _Measured) -> Iterator[Reading]:
    for block in reached(case.timeline).blocks:
        for event in block.events:
            claim = event.effect
            if not isinstance(claim, Claimed):
                continue
            unit = UNITS.get(claim.quantity, "")
            bounds = (claim.lowest, at_least), (claim.highest, at_most)
            for limit in (side(bound, unit) for bound, side in bounds if bound is not None):
                place = (block.index, event.start_s)
                interval = measured.interval(claim, limit, event.number, place)
                origin = case.origin(event.number)
                yield _reading(claim, limit, interval, origin, block.name, float(place[1]))


def _reading(
    claim: Claimed, limit: Limit, interval: Interval, origin: Origin, block: str, time_s: float
) -> Reading:
    low, high = interval
    what = _worded(claim)
    found = amount(low, limit.unit)
    if math.isinf(high):
        found = f"at least {found}"
    elif high != low and not math.isnan(high):
        found = f"from {found} to {amount(high, limit.unit)}"
    side = "above" if limit.side == "at least" else "below"
    return Reading(
        value=low if math.isinf(high) else (low + high) / 2,
        uncertainty=0.0 if math.isinf(high) else (high - low) / 2,
        between=interval,
        limit=limit,
        message=f"{what} is {found}, required {side} {{limit}}",
        origin=origin,
        subject=what,
        block=block,
        window_s=(time_s, time_s),
    )


def _worded(claim: Claimed) -> str:
    if claim.quantity == "time":
        return f'time after "{claim.label}"'
    if claim.quantity == "separation":
        return f"separation of {claim.cloud} from {claim.other}"
    return f"{claim.quantity} of {claim.cloud}"


@dataclass(frozen=True)
class _Measured:
    """What is known about wells and times, by cloud and in order of play."""

    timeline: Timeline
    wells: Wells

    @cached_property
    def story(self) -> Story:
        """The steps in order."""
        return Story(self.timeline)

    def interval(self, claim: Claimed, limit: Limit, number: int, place: Moment) -> Interval:
        """Where the claimed quantity lies, in base units; NaN when it is not known."""
        if claim.quantity == "time":
            return self.story.time_since_s(claim.label, number, place)
        if claim.quantity not in UNITS or (claim.throughout and limit.side == "at most"):
            return NOT_KNOWN
        if claim.throughout:
            window: Window | None = self.story.since_label(number, place)
        else:
            window = self.story.step_before(number, place)
        if window is not None and self._lost(claim, window):
            return NOT_KNOWN
        if claim.quantity == "separation":
            return self._separation(claim, window, place)
        return self._depth(claim.cloud, limit, window, place)

    def _lost(self, claim: Claimed, window: Window) -> bool:
        """Whether one of the claim's clouds could not be followed in a window."""
        clouds = {claim.cloud, claim.other}
        first, last = _rounded(window)
        return any(
            end.cloud in clouds
            and first <= (end.block, end.end_s)
            and (end.block, end.start_s) < last
            for end in self.wells.unproved
        )

    # depth

    def _depth(self, cloud: str, limit: Limit, window: Window | None, place: Moment) -> Interval:
        track = self._depths.get((cloud, limit.side))
        if track is None:
            return NOT_KNOWN
        if window is not None:
            return track.least(window)
        # Before any step took time there is no stretch to look back on; the least of the one that
        # begins here bounds the state at its beginning from below.
        index = track.at(place)
        return NOT_KNOWN if index is None else (float(track.low[index]), math.inf)

    @cached_property
    def _depths(self) -> dict[tuple[str, str], Track]:
        """Per cloud and side of the limit: certified depth, and the most that it can be.

        Above a bound a wish that is itself too shallow fails; below one, what was taken off for
        errors may be there after all.
        """
        tracks: dict[tuple[str, str], Track] = {}
        for cloud, held in self._held.items():
            for side, added in (("at least", 0.0), ("at most", 1.0)):
                tracks[cloud, side] = Track(
                    (
                        (one.block, one.start_s),
                        (one.block, one.end_s),
                        _least(one.left.certified_V, one.right.certified_V),
                        _least(_most(one.left, added), _most(one.right, added)),
                    )
                    for one in held
                )
        return tracks

    @cached_property
    def _held(self) -> dict[str, list[Held]]:
        # A bunch that has no temperature yet is held by its gates, whatever well it will settle in.
        hot = {(one.cloud, one.block, one.number) for one in self.wells.held if one.energetic}
        held: dict[str, list[Held]] = {}
        for one in sorted(self.wells.held, key=lambda one: (one.block, one.start_s, one.end_s)):
            if one.energetic or (one.cloud, one.block, one.number) not in hot:
                held.setdefault(one.cloud, []).append(one)
        return held

    # separation

    def _separation(self, claim: Claimed, window: Window | None, place: Moment) -> Interval:
        here = _distance(self._where(claim.cloud, place), self._where(claim.other, place))
        if not claim.throughout or window is None:
            return here
        track = self._distances.get(frozenset((claim.cloud, claim.other)))
        low = track.least(_rounded(window))[0] if track is not None else math.nan
        # Two clouds of one well have no distance on record: it is nothing.
        return (0.0 if math.isnan(low) else min(low, here[0])), here[1]

    @cached_property
    def _distances(self) -> dict[frozenset[str], Track]:
        pairs: dict[frozenset[str], list[tuple[Moment, Moment, float, float]]] = {}
        for one in self.wells.separations:
            stretch = ((one.block, one.start_s), (one.block, one.end_s), one.least_m, one.least_m)
            pairs.setdefault(frozenset(one.clouds), []).append(stretch)
        return {pair: Track(stretches) for pair, stretches in pairs.items()}

    def _where(self, cloud: str, place: Moment) -> Interval:
        """Where a cloud's minimum is at a place of the sequence, m."""
        track = self._depths.get((cloud, "at least"))
        index = track.at(place) if track is not None else None
        if index is None:
            return NOT_KNOWN
        held = self._held[cloud][index]
        if (held.block, held.end_s) == place:
            return held.to_m, held.to_m
        if (held.block, held.start_s) == place:
            return held.from_m, held.from_m
        return held.well_m


def _rounded(window: Window) -> Window:
    """The same window in floats, to be compared with moments that were rounded once."""
    (block, start), (last_block, end) = window
    return (block, float(start)), (last_block, float(end))


def _least(one: float, other: float) -> float:
    """The lesser of two; NaN when one is not known."""
    return math.nan if math.isnan(one) or math.isnan(other) else min(one, other)


def _most(side: SideDepth, added: float) -> float:
    return side.best_V + added * side.losses.total_V


def _distance(one: Interval, other: Interval) -> Interval:
    """The interval of the distance of two points that lie in two intervals, m."""
    if any(math.isnan(end) for end in (*one, *other)):
        return NOT_KNOWN
    apart = max(one[0] - other[1], other[0] - one[1], 0.0)
    return apart, max(one[1] - other[0], other[1] - one[0])
