"""Test particles on the axis while voltages change: where they are, who left, at what energy.

m dv/dt = -q sum_k V_k(t) g_k'(z), kick-drift-kick (second order, symplectic), the force read
linearly from a table (forces.py) that is rebuilt only while a voltage changes.  Between breakpoints
of the waveforms steps are equal and never longer than asked, so every edge is stepped through in
full.  Beyond the table particles drift freely, as in the grounded tube.

Energies are total, in eV per particle, counted from a grounded tube; an incoming bunch's is its
kinetic energy outside.

Valid without collisions, without space charge (unless the table holds it), on the axis, and below
a two-hundredth of the rest energy, where Newton's speed is 0.4 % too high.

Shapes: particles (n,).  Units: m, m/s, s, eV, kg, e.
Accuracy: energy kept to 1e-3 of the depth at 200 steps per bounce, 1e-4 at 600; at least 1.5e7
particle-steps per second; tests/clouds/test_flight.py.
Source: kick-drift-kick: L. Verlet, Phys. Rev. 159, 98 (1967), from memory.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from math import ceil, sqrt

import numpy as np
from numpy.typing import NDArray

from wellseq.clouds.constants import ELEMENTARY_CHARGE_C, LIGHT_SPEED_M_PER_S
from wellseq.clouds.figures import Outside
from wellseq.clouds.forces import ForceTable
from wellseq.clouds.waveforms import Waveforms
from wellseq.fields.hermite import FloatArray

MODEL = "flight"
Indices = NDArray[np.intp]
STEPS_MAX = 2_000_000
PARTICLE_STEPS_MAX = 2_000_000_000
REST_SHARE_MAX = 0.005
LOOK_STEPS = 8
"""Who has left is looked up after so many steps."""


@dataclass(frozen=True, slots=True)
class Flown:
    """Particles (n,) at the end of a flight, or where and when they left.

    `z_m`, `speed_m_per_s` (with its sign), `energy_eV` total, at the volts after a jump at the end;
    `left_s` NaN for who stayed; `side` -1 left, 0 stayed, +1 right.  All NaN when `outside` says
    why there is no figure.
    """

    z_m: FloatArray
    speed_m_per_s: FloatArray
    energy_eV: FloatArray
    left_s: FloatArray
    side: NDArray[np.int8]
    particle_steps: int
    outside: tuple[Outside, ...] = ()


def speed_of(energy_eV: float, mass_kg: float) -> float:
    """Speed in m/s of a particle of kinetic energy E (eV) and mass m (kg), relativistic.

    gamma = 1 + E/mc^2, v = c sqrt(1 - 1/gamma^2).
    """
    rest_eV = mass_kg * LIGHT_SPEED_M_PER_S**2 / ELEMENTARY_CHARGE_C
    share = energy_eV / rest_eV
    return LIGHT_SPEED_M_PER_S * sqrt(share * (share + 2.0)) / (1.0 + share)


def plain_speed(energy_eV: FloatArray, mass_kg: float) -> FloatArray:
    """Newton's speed sqrt(2 E/m) in m/s, of energies (n,) in eV and a mass in kg."""
    return np.asarray(np.sqrt(2.0 * ELEMENTARY_CHARGE_C / mass_kg * np.asarray(energy_eV)))


def fly(
    *,
    table: ForceTable,
    waves: Waveforms,
    mass_kg: float,
    charge_e: float,
    z_m: FloatArray,
    speed_m_per_s: FloatArray,
    start_s: float,
    end_s: float,
    step_s: float,
    leave_m: tuple[float, float] | None = None,
    stop_when_empty: bool = True,
) -> Flown:
    """Fly particles (n,) from `z_m`, `speed_m_per_s` between two times, steps of at most `step_s`.

    `waves` must have the table's electrodes.  `leave_m`: places beyond which a particle has left
    for good; it is looked up every eight steps, and the time of its crossing is taken back along a
    straight line.  Units m, m/s, s, kg, e
    (with its sign).  Raises ValueError for shapes that do not match.
    """
    if waves.volts.shape[1] != table.slope.shape[0]:
        raise ValueError("waveforms and table must have the same electrodes")
    if z_m.shape != speed_m_per_s.shape or z_m.ndim != 1:
        raise ValueError("places and speeds must be two lists of one length")
    parts = list(segments(waves, start_s, end_s, step_s))
    steps = sum(part.steps for part in parts)
    outside = (*_too_much(z_m.size, steps), *_too_fast(mass_kg, speed_m_per_s))
    if outside:
        return _nothing(z_m.size, 0, outside)
    pilot = _Pilot(table, mass_kg, charge_e, z_m, speed_m_per_s, leave_m)
    for part in parts:
        pilot.through(part)
        if stop_when_empty and not pilot.swarm.who.size:
            break
    flown = pilot.landed(waves.at(end_s))
    outside = _too_fast(mass_kg, flown.speed_m_per_s)
    return _nothing(z_m.size, flown.particle_steps, outside) if outside else flown


def _nothing(count: int, particle_steps: int, outside: tuple[Outside, ...]) -> Flown:
    missing = np.full(count, np.nan)
    side = np.zeros(count, np.int8)
    return Flown(missing, missing, missing, missing, side, particle_steps, outside)


def _too_fast(mass_kg: float, speed: FloatArray) -> tuple[Outside, ...]:
    fastest = float(np.abs(speed).max(initial=0.0))
    share = 0.5 * (fastest / LIGHT_SPEED_M_PER_S) ** 2
    if share <= REST_SHARE_MAX:
        return ()
    return (Outside(MODEL, "kinetic over rest energy", share, REST_SHARE_MAX),)


def _too_much(count: int, steps: int) -> tuple[Outside, ...]:
    found = []
    if steps > STEPS_MAX:
        found.append(Outside(MODEL, "steps", float(steps), STEPS_MAX))
    if steps * count > PARTICLE_STEPS_MAX:
        found.append(Outside(MODEL, "particle-steps", float(steps * count), PARTICLE_STEPS_MAX))
    return tuple(found)


@dataclass(frozen=True, slots=True)
class Segment:
    """A stretch (s) on which all volts go straight from `from_V` to `to_V`, in equal steps."""

    start_s: float
    end_s: float
    from_V: FloatArray
    to_V: FloatArray
    steps: int

    @property
    def step_s(self) -> float:
        """The length of one step, s."""
        return (self.end_s - self.start_s) / self.steps


def segments(waves: Waveforms, start_s: float, end_s: float, step_s: float) -> Iterator[Segment]:
    """The stretches between the waveforms' breakpoints from `start_s` to `end_s`, in s."""
    times, volts = waves.times_s, waves.volts
    now, at = start_s, waves.at(start_s)
    first = int(np.searchsorted(times, start_s, side="right"))
    for k in range(first, times.size):
        if times[k] >= end_s:
            break
        if times[k] > now:
            yield _segment(now, float(times[k]), at, volts[k], step_s)
        now, at = float(times[k]), volts[k]
    if end_s > now:
        # The volts just before the end: a jump there belongs to whoever flies on.
        index = int(np.searchsorted(times, end_s, side="left"))
        ends = volts[index] if index < times.size and times[index] == end_s else waves.at(end_s)
        yield _segment(now, end_s, at, ends, step_s)


def _segment(
    start_s: float, end_s: float, from_V: FloatArray, to_V: FloatArray, step_s: float
) -> Segment:
    steps = max(1, ceil((end_s - start_s) / step_s * (1.0 - 1e-12)))
    return Segment(start_s, end_s, from_V, to_V, steps)


class Swarm:
    """Particles in table units: place in nodes, speed in nodes per step; who they are.

    `scale` (n,) multiplies the table's kick for each particle, where steps differ.
    """

    def __init__(self, nodes: int, place: FloatArray, speed: FloatArray, scale: FloatArray | None):
        """`place` and `speed` (n,) are taken over and changed."""
        self.place, self.speed, self.scale = place, speed, scale
        self.who = np.arange(place.size)
        self.last = nodes - 1.0000001
        self._room()

    def _room(self) -> None:
        count = self.place.size
        self.share, self.low, self.pull = np.empty((3, count))
        self.cell = np.empty(count, np.intp)

    def kick(self, force: FloatArray, weight: float) -> None:
        """Add `weight` times the kick of one step; the kick itself stays in `pull`."""
        np.clip(self.place, 0.0, self.last, out=self.share)
        np.copyto(self.cell, self.share, casting="unsafe")
        np.subtract(self.share, self.cell, out=self.share)
        np.take(force, self.cell, out=self.low, mode="clip")
        np.take(force[1:], self.cell, out=self.pull, mode="clip")
        self.pull -= self.low
        self.pull *= self.share
        self.pull += self.low
        if self.scale is not None:
            self.pull *= self.scale
        if weight == 1.0:
            self.speed += self.pull
        else:
            self.speed += weight * self.pull

    def drift(self) -> None:
        """One step of flight at the present speed."""
        self.place += self.speed

    def keep(self, these: NDArray[np.bool_]) -> None:
        """Go on with these particles (n,) only."""
        self.place, self.speed = self.place[these], self.speed[these]
        self.who = self.who[these]
        self.scale = None if self.scale is None else self.scale[these]
        self._room()


@dataclass(slots=True)
class _Pilot:
    """A flight under way, and the records of who has left."""

    table: ForceTable
    mass_kg: float
    charge_e: float
    z_m: FloatArray
    speed_m_per_s: FloatArray
    leave_m: tuple[float, float] | None
    swarm: Swarm = field(init=False)
    step_s: float = 1.0
    done: int = 0
    left_s: FloatArray = field(init=False)
    energy_eV: FloatArray = field(init=False)

    def __post_init__(self) -> None:
        table = self.table
        place = (self.z_m - table.start_m) / table.step_m
        speed = self.speed_m_per_s * (self.step_s / table.step_m)
        self.swarm = Swarm(table.slope.shape[1], place, speed, None)
        self.z_m, self.speed_m_per_s = self.z_m.copy(), self.speed_m_per_s.copy()
        self.left_s, self.energy_eV = np.full((2, self.z_m.size), np.nan)

    def _kicks(self, volts: FloatArray, step_s: float) -> FloatArray:
        """Change of speed in nodes per step, in one step, at every node."""
        charge_C = self.charge_e * ELEMENTARY_CHARGE_C
        size = -charge_C / self.mass_kg * step_s**2 / self.table.step_m
        force = size * (volts @ self.table.slope)
        # Beyond the table there is no force.
        force[0] = force[-1] = 0.0
        return np.asarray(force)

    def through(self, part: Segment) -> None:
        """Fly one segment."""
        swarm, step_s = self.swarm, part.step_s
        swarm.speed *= step_s / self.step_s
        self.step_s = step_s
        force = first = self._kicks(part.from_V, step_s)
        moving = not np.array_equal(part.from_V, part.to_V)
        if moving:
            change = self._kicks(part.to_V - part.from_V, step_s)
            force = first.copy()
        swarm.kick(force, 0.5)
        for k in range(1, part.steps + 1):
            swarm.drift()
            self.done += swarm.who.size
            if moving:
                np.multiply(change, k / part.steps, out=force)
                force += first
            last = k == part.steps
            swarm.kick(force, 0.5 if last else 1.0)
            if self.leave_m is not None and (last or k % LOOK_STEPS == 0):
                self._let_go(part, k, force, 0.0 if last else 0.5)
                if not swarm.who.size:
                    break

    def _let_go(self, part: Segment, k: int, force: FloatArray, ahead: float) -> None:
        """Record who is beyond the planes; speeds are `ahead` kicks ahead of the places."""
        assert self.leave_m is not None
        swarm, table = self.swarm, self.table
        planes = [(plane - table.start_m) / table.step_m for plane in self.leave_m]
        gone = (swarm.place < planes[0]) | (swarm.place > planes[1])
        if not gone.any():
            return
        who, place = swarm.who[gone], swarm.place[gone]
        speed = swarm.speed[gone] - ahead * swarm.pull[gone]
        plane = np.where(place < planes[0], planes[0], planes[1])
        back = np.divide(place - plane, speed, out=np.zeros(who.size), where=speed != 0.0)
        time_s = part.start_s + k * part.step_s
        self.left_s[who] = time_s - np.clip(back, 0.0, LOOK_STEPS) * part.step_s
        share = k / part.steps
        volts = part.from_V * (1 - share) + part.to_V * share
        self._store(who, place, speed, volts)
        swarm.keep(~gone)

    def _store(self, who: Indices, place: FloatArray, speed: FloatArray, volts: FloatArray) -> None:
        table = self.table
        self.z_m[who] = table.start_m + table.step_m * place
        self.speed_m_per_s[who] = v = speed * (table.step_m / self.step_s)
        kinetic_eV = self.mass_kg / (2 * ELEMENTARY_CHARGE_C) * v**2
        self.energy_eV[who] = kinetic_eV + self.charge_e * table.potential(volts, 1).at(
            self.z_m[who]
        )

    def landed(self, volts: FloatArray) -> Flown:
        """All particles, with those still flying at these volts."""
        swarm = self.swarm
        self._store(swarm.who, swarm.place, swarm.speed, volts)
        side = np.zeros(self.z_m.size, np.int8)
        gone = np.isfinite(self.left_s)
        if self.leave_m is not None:
            side[gone] = np.where(self.z_m[gone] < sum(self.leave_m) / 2, -1, 1)
        return Flown(self.z_m, self.speed_m_per_s, self.energy_eV, self.left_s, side, self.done)
