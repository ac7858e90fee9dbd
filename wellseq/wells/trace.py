"""Timeline, Shipped → Wells: every cloud followed through all of time.

A cloud is where its well is.  Wells are followed from segment to segment by proof (`holding`); what
happens to clouds (placed, caught, released, kicked, given a temperature) happens between segments.
A bunch that is known by its energy alone is held by its gates, its depth counted from ground.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations

from wellseq.fields.field import Field
from wellseq.timeline.deviations import Carry
from wellseq.timeline.motion import Segment, segments
from wellseq.timeline.shipped import Shipped, ShippedBlock
from wellseq.timeline.timeline import Event, Timeline
from wellseq.wells.arrivals import Arrivals
from wellseq.wells.bunches import guard
from wellseq.wells.diagnosis import Neighbour, diagnose
from wellseq.wells.holding import Hold, Holding, Lost
from wellseq.wells.living import Living, Well
from wellseq.wells.wells import Held, Separation, Trouble, Unproved, WayOut, Wells


def trace(timeline: Timeline, shipped: Shipped, field: Field) -> Wells:
    """Follow every cloud through every block; what could not be proved ends that cloud's trace."""
    tracing = Tracing(timeline, field)
    carry = Carry()
    for block in shipped.blocks:
        tracing.block(block, carry)
    return Wells(
        tuple(tracing.held),
        tuple(tracing.unproved),
        tuple(tracing.separations),
        tuple(tracing.ways_out),
        field.error_V_per_V,
    )


class Tracing:
    """The state of the trap while time goes on, and everything proved so far."""

    def __init__(self, timeline: Timeline, field: Field) -> None:
        self.timeline, self.field = timeline, field
        self.margins = timeline.trap.margins
        self.holding = Holding(field, timeline.trap.bore.patch_V or 0.0)
        self.living = Living(dict(timeline.clouds))
        self.arrivals = Arrivals(self)
        self.held: list[Held] = []
        self.unproved: list[Unproved] = []
        self.separations: list[Separation] = []
        self.ways_out: list[WayOut] = []
        self.index = 0

    def block(self, shipped: ShippedBlock, carry: Carry) -> None:
        """Go through one block, events and segments in order of time."""
        self.index = shipped.block.index
        starting = sorted(shipped.block.events, key=lambda e: (e.start_s, e.number))
        ending = sorted(shipped.block.events, key=lambda e: (e.end_s, e.number))
        begun = over = 0
        segment: Segment | None = None
        for segment in segments(self.timeline.trap, shipped, carry):
            while over < len(ending) and ending[over].end_s <= segment.start_s:
                self.arrivals.after(ending[over], segment.base)
                over += 1
            while begun < len(starting) and starting[begun].start_s <= segment.start_s:
                self.arrivals.before(starting[begun], segment.base)
                begun += 1
            if segment.end_s > segment.start_s:
                self._segment(segment)
        if segment is not None:
            for event in ending[over:]:
                self.arrivals.after(event, segment.end())

    def fail(
        self,
        trouble: Trouble,
        cloud: str,
        event: Event,
        at_m: float,
        message: str,
        hint: str = "",
    ) -> None:
        """Record what went wrong with a cloud at an event and a place (m); it is dropped."""
        window = float(event.start_s), float(event.end_s)
        self.unproved.append(
            Unproved(trouble, cloud, self.index, event.number, *window, at_m, message, hint)
        )
        self.living.drop(cloud)

    # one segment

    def _segment(self, segment: Segment) -> None:
        spans: dict[int, tuple[float, float]] = {}
        if len(segment.moves) == 0:
            self.arrivals.while_open(segment)
        for well in list(self.living.wells):
            if well.paused or well not in self.living.wells:
                continue
            span = self._follow(well, segment)
            if span is not None:
                spans[id(well)] = span
        for bunch in self.living.bunches:
            self.held.append(guard(self.field, self.holding.patch_V, bunch, segment, self.index))
        self._meet(segment, spans)

    def _follow(self, well: Well, segment: Segment) -> tuple[float, float] | None:
        """Prove one well through a segment; returns the stretch of axis (m) that its core swept."""
        floor_V = self._floor(well)
        swept: list[float] = []
        for result in self.holding.hold(well.charge_sign, well.z_m, segment, floor_V):
            if isinstance(result, Lost):
                self._lost(well, segment, result)
                return None
            self._keep(well, segment, result, floor_V)
            well.z_m, well.core_m = result.to_m, result.well_m
            swept += result.well_m
        if well.lowered_V is not None:
            self._raise_floor(well, segment)
        return min(swept), max(swept)

    def _floor(self, well: Well) -> float:
        return self.margins.depth_V if well.lowered_V is None else well.lowered_V

    def _raise_floor(self, well: Well, segment: Segment) -> None:
        """A well deepened above the common floor again answers for the common floor again."""
        if segment.number in self.arrivals.evaporating:
            return
        at_end = replace(segment, base=segment.end(), moves=segment.moves[:0])
        for result in self.holding.hold(well.charge_sign, well.z_m, at_end, self._floor(well)):
            deep = isinstance(result, Hold) and result.certified_V >= self.margins.depth_V
            if deep:
                well.lowered_V = None

    def _keep(self, well: Well, segment: Segment, hold: Hold, floor_V: float) -> None:
        for cloud in well.clouds:
            self.held.append(
                Held(
                    cloud=cloud,
                    charge_sign=well.charge_sign,
                    block=self.index,
                    start_s=hold.window_s[0],
                    end_s=hold.window_s[1],
                    number=segment.number,
                    well_m=hold.well_m,
                    from_m=hold.from_m,
                    to_m=hold.to_m,
                    left=hold.left,
                    right=hold.right,
                    trap_V=hold.trap_V,
                    floor_V=(floor_V, floor_V),
                )
            )

    def _lost(self, well: Well, segment: Segment, lost: Lost) -> None:
        """Say why a well could not be followed, and follow its clouds no more."""
        neighbours = [
            Neighbour(other.clouds[0], other.z_m)
            for other in self.living.wells
            if other is not well and other.charge_sign == well.charge_sign
        ]
        found = diagnose(self.field, well.charge_sign, lost, neighbours)
        start_s, end_s = map(float, lost.window_s)
        for cloud in list(well.clouds):
            self.unproved.append(
                Unproved(
                    found.trouble,
                    cloud,
                    self.index,
                    segment.number,
                    start_s,
                    end_s,
                    lost.from_m,
                    f"the well of '{cloud}' at z = {lost.from_m * 1e3:.1f} mm {found.words}",
                    sure=found.sure,
                )
            )
        self.living.drop_well(well)

    # wells beside wells

    def _meet(self, segment: Segment, spans: dict[int, tuple[float, float]]) -> None:
        here = [(well, spans[id(well)]) for well in self.living.wells if id(well) in spans]
        for (one, (low1, high1)), (two, (low2, high2)) in combinations(here, 2):
            gap = max(low2 - high1, low1 - high2)
            same_sign = one.charge_sign == two.charge_sign
            if gap < 0 and same_sign and abs(one.z_m - two.z_m) < self.field.step_m:
                self._merge(one, two, segment)
                continue
            self._separate(one, two, max(gap, 0.0), segment)

    def _merge(self, one: Well, two: Well, segment: Segment) -> None:
        names = f"'{one.clouds[0]}' and '{two.clouds[0]}'"
        for cloud in list(two.clouds):
            self.unproved.append(
                Unproved(
                    Trouble.MERGE,
                    cloud,
                    self.index,
                    segment.number,
                    float(segment.start_s),
                    float(segment.end_s),
                    two.z_m,
                    f"{names} end up in one well at z = {two.z_m * 1e3:.1f} mm",
                    "only a catch may bring a cloud into a well that holds another",
                )
            )
        one.clouds += two.clouds
        two.clouds = []
        self.living.wells.remove(two)

    def _separate(self, one: Well, two: Well, gap_m: float, segment: Segment) -> None:
        declared = self.living.declared
        for first in one.clouds:
            for second in two.clouds:
                other = declared[first].species != declared[second].species
                self.separations.append(
                    Separation(
                        (first, second),
                        self.index,
                        float(segment.start_s),
                        float(segment.end_s),
                        segment.number,
                        gap_m,
                        other,
                    )
                )
