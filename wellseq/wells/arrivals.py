"""What happens to clouds between segments: they come, go, are let out, get a temperature."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from wellseq.fields.field import Field
from wellseq.fields.following import Located, locate
from wellseq.fields.inverse import Side, way_out
from wellseq.fields.minima import extrema
from wellseq.model import effects
from wellseq.timeline.motion import Segment
from wellseq.timeline.timeline import Event
from wellseq.wells.diagnosis import under
from wellseq.wells.living import Bunch, Well
from wellseq.wells.wells import Trouble, WayOut

if TYPE_CHECKING:
    from wellseq.wells.trace import Tracing

Vector = npt.NDArray[np.float64]
PLACED_RADII = 0.5
"""A well belongs to an electrode when its minimum is under it or this many bore radii beside it."""
EVAPORATION_FLOOR_SHARE = 0.8
"""The floor during and after an evaporation to U is this share of U."""


class Arrivals:
    """Acts on the living when events begin and end; `evaporating` are steps that lower a well."""

    def __init__(self, tracing: Tracing) -> None:
        self.tracing = tracing
        self.evaporating: set[int] = set()
        self._let_out: dict[int, tuple[int, float]] = {}
        self._kicking: dict[int, tuple[Event, effects.Kicked, Well]] = {}

    def before(self, event: Event, vector: Vector) -> None:
        """An event's step begins; `vector` are the wished electrode volts then."""
        match event.effect:
            case effects.Released():
                self._release(event, event.effect)
            case effects.Kicked():
                well = self._needed(event, event.effect.light)
                if well is not None:
                    well.paused = True
                    self._kicking[event.number] = event, event.effect, well
            case effects.Evaporated():
                self._lower(event, event.effect)
            case effects.Nested():
                self._needed(event, event.effect.cloud)
                self._needed(event, event.effect.host)
            case effects.Acted():
                self._present(event, event.effect.cloud)

    def after(self, event: Event, vector: Vector) -> None:
        """An event's step is over; `vector` are the wished electrode volts then."""
        match event.effect:
            case effects.Placed():
                self._place(event, event.effect, vector)
            case effects.Caught():
                self._catch(event, event.effect, vector)
            case effects.Released():
                self._check_release(event, event.effect, vector)
            case effects.Kicked():
                self._after_kick(event, event.effect, vector)
            case effects.Evaporated():
                self._check_way_out(event, event.effect, vector)
            case effects.Assumed():
                if event.effect.quantity == "temperature":
                    self._cooled(event, event.effect.cloud, vector)

    # coming

    def _place(self, event: Event, effect: effects.Placed, vector: Vector) -> None:
        tracing, cloud = self.tracing, effect.cloud
        low, high = tracing.field.span_m(effect.electrode)
        sign = self._sign(cloud)
        found = locate(tracing.field, sign, vector, (low + high) / 2)
        near = PLACED_RADII * tracing.field.radius_m
        if found is None or found.high_m < low - near or found.low_m > high + near:
            where = "it would slide out of the stack"
            if found is not None:
                where = f"it would slide to z = {found.z_m * 1e3:.1f} mm"
                where += under(tracing.field, found.z_m)
            tracing.fail(
                Trouble.NOT_PLACED,
                cloud,
                event,
                (low + high) / 2,
                f"there is no well for '{cloud}' at {effect.electrode}: {where}",
                "name the electrode at the bottom of the well, and raise walls on both sides",
            )
            return
        self._join(event, cloud, sign, found)

    def _join(self, event: Event, cloud: str, sign: int, found: Located) -> None:
        """A cloud comes to a well; only begin and catch may find another cloud there."""
        tracing = self.tracing
        for well in tracing.living.wells:
            if well.charge_sign != sign or not found.low_m <= well.z_m <= found.high_m:
                continue
            together = event.start_s == event.end_s or isinstance(event.effect, effects.Caught)
            if cloud in well.clouds:
                return
            if not together:
                tracing.fail(
                    Trouble.MERGE,
                    cloud,
                    event,
                    found.z_m,
                    f"'{cloud}' is loaded into the well of '{well.clouds[0]}'",
                    "load it into a well of its own",
                )
                return
            well.clouds.append(cloud)
            return
        tracing.living.wells.append(Well([cloud], sign, found.z_m, (found.low_m, found.high_m)))

    def _catch(self, event: Event, effect: effects.Caught, vector: Vector) -> None:
        living, cloud = self.tracing.living, effect.cloud
        sign = self._sign(cloud)
        highest = living.energy_V(cloud)
        declared = living.declared[cloud]
        if highest is not None and declared.temperature is None:
            living.bunches = [bunch for bunch in living.bunches if bunch.cloud != cloud]
            living.bunches.append(Bunch(cloud, sign, (effect.near, effect.far), highest))
            well = self._well_between(cloud, sign, effect.near, effect.far)
            if well is not None and cloud not in well.clouds:
                well.clouds.append(cloud)
            return
        self._settle(event, cloud, (effect.near, effect.far), vector)

    def _cooled(self, event: Event, cloud: str, vector: Vector) -> None:
        """A bunch gets a temperature: from now on its own well must hold it."""
        living = self.tracing.living
        bunch = living.bunch_of(cloud)
        if bunch is None:
            self._present(event, cloud)
            return
        living.bunches.remove(bunch)
        if living.well_of(cloud) is None:
            self._settle(event, cloud, bunch.gates, vector)

    def _settle(self, event: Event, cloud: str, gates: tuple[str, str], vector: Vector) -> None:
        """A cloud between gates sits with one of its own sign, else in the deepest well there."""
        tracing = self.tracing
        sign = self._sign(cloud)
        well = self._well_between(cloud, sign, *gates)
        if well is not None:
            if cloud not in well.clouds:
                well.clouds.append(cloud)
            return
        low, high = self._gate_span(*gates)
        named = dict(zip(tracing.field.electrodes, map(float, vector), strict=True))
        wells = tracing.field.wells(named, sign, (low, high))
        if not wells:
            tracing.fail(
                Trouble.NOT_PLACED,
                cloud,
                event,
                (low + high) / 2,
                f"there is no well for '{cloud}' between {gates[0]} and {gates[1]}",
                "give it one with a ramp before the catch",
            )
            return
        deepest = min(wells, key=lambda found: sign * found.potential_V)
        core = deepest.z_m, deepest.z_m
        tracing.living.wells.append(Well([cloud], sign, deepest.z_m, core))

    def _well_between(self, cloud: str, sign: int, near: str, far: str) -> Well | None:
        low, high = self._gate_span(near, far)
        mine = self.tracing.living.well_of(cloud)
        if mine is not None:
            return mine
        inside = [
            well
            for well in self.tracing.living.wells
            if well.charge_sign == sign and low < well.z_m < high
        ]
        return inside[0] if inside else None

    # going

    def _release(self, event: Event, effect: effects.Released) -> None:
        tracing = self.tracing
        if not self._present(event, effect.cloud):
            return
        well = tracing.living.well_of(effect.cloud)
        if well is None:
            tracing.living.drop(effect.cloud)
            return
        self._let_out[event.number] = well.charge_sign, well.z_m
        tracing.living.drop_well(well)

    def _check_release(self, event: Event, effect: effects.Released, vector: Vector) -> None:
        let_out = self._let_out.pop(event.number, None)
        if let_out is None:
            return
        sign, z_m = let_out
        side = self._side(effect.through, z_m)
        climb = climb_out(self.tracing.field, sign, vector, z_m, side)
        self._way(event, effect.cloud, climb)

    def _after_kick(self, event: Event, effect: effects.Kicked, vector: Vector) -> None:
        living = self.tracing.living
        if self._kicking.pop(event.number, None) is not None:
            # Something else moved all the while, so that the open way was never seen at rest.
            self._way(event, effect.light, math.nan)
        well = living.well_of(effect.light)
        if well is None:
            return
        well.paused = False
        found = locate(self.tracing.field, well.charge_sign, vector, well.z_m)
        if found is not None:
            well.z_m = found.z_m
        living.drop(effect.light)

    def while_open(self, segment: Segment) -> None:
        """Nothing moves: the light cloud of a kick that stands open must find its way out."""
        for number, (event, effect, well) in list(self._kicking.items()):
            if not event.start_s < segment.start_s < segment.end_s < event.end_s:
                continue
            del self._kicking[number]
            side = self._side(effect.through, well.z_m)
            climb = climb_out(self.tracing.field, well.charge_sign, segment.base, well.z_m, side)
            self._way(event, effect.light, climb)

    def _lower(self, event: Event, effect: effects.Evaporated) -> None:
        well = self._needed(event, effect.cloud)
        if well is not None:
            floor = self.tracing.margins.depth_V
            well.lowered_V = min(floor, EVAPORATION_FLOOR_SHARE * effect.to_V)
            self.evaporating.add(event.number)

    def _check_way_out(self, event: Event, effect: effects.Evaporated, vector: Vector) -> None:
        well = self.tracing.living.well_of(effect.cloud)
        if well is None:
            return
        side = self._side(effect.through, well.z_m)
        climb = way_out(self.tracing.field, well.charge_sign, vector, well.z_m, side)
        self._way(event, effect.cloud, climb)

    def _way(self, event: Event, cloud: str, climb_V: float) -> None:
        tracing = self.tracing
        at_s = float(event.end_s)
        tracing.ways_out.append(WayOut(cloud, tracing.index, event.number, at_s, climb_V, 0.0))

    # being there

    def _present(self, event: Event, cloud: str) -> bool:
        tracing = self.tracing
        if tracing.living.holds(cloud):
            return True
        if not any(one.cloud == cloud for one in tracing.unproved):
            tracing.fail(
                Trouble.NOT_PLACED,
                cloud,
                event,
                float("nan"),
                f"'{cloud}' is not in the trap here",
                "it comes with begin, load or catch, and goes with release or kick",
            )
        return False

    def _needed(self, event: Event, cloud: str) -> Well | None:
        """The well of a cloud that a step acts on; a bunch without a temperature has none."""
        if not self._present(event, cloud):
            return None
        return self.tracing.living.well_of(cloud)

    def _sign(self, cloud: str) -> int:
        return self.tracing.living.declared[cloud].species.charge_sign

    def _gate_span(self, near: str, far: str) -> tuple[float, float]:
        (_, low), (high, _) = sorted(self.tracing.field.span_m(gate) for gate in (near, far))
        return low, high

    def _side(self, through: tuple[str, ...], z_m: float) -> Side:
        low, high = self.tracing.field.span_m(through[0])
        return "right" if (low + high) / 2 > z_m else "left"


def climb_out(field: Field, sign: int, vector: Vector, z_m: float, side: Side) -> float:
    """How much a charge at rest at z (m) must climb to get out on a side, V; 0: it just leaves.

    Outside the stack is the grounded tube, U = 0.
    """
    place_m, level_V, _ = extrema(field.curve(sign * vector))
    ahead = place_m > z_m if side == "right" else place_m < z_m
    here_V = sign * float(field.at(vector, z_m))
    return max(0.0, float(np.max(np.append(level_V[ahead], 0.0))) - here_V)
