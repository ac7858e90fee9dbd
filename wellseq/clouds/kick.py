"""A gate opened for a moment → who leaves, who stays, and how hot those who stay have become.

The light species crosses the gate in t = Int dz/v from rest, the heavy one sqrt(m_h/m_l) later.
While the well is open the heavy ones fall along the open field: an estimate of what they gain is

    (m/2) (a Int p dt)^2,   a the open field's acceleration at the cloud, p how far it is open, 0..1

with Int p dt = t_open + t_rise for straight edges.  It is good to 20 % while Int p dt is at most
0.4 of the heavy transit time.  The figures themselves are flown (flight.py) through the real edges;
particles start in thermal equilibrium along the axis.  The *fall* of the gate limits the heavy
ones, the *rise* only costs them energy.

Valid without space charge (unless the table holds it) and collisions, on the axis, and only while
the way out falls all the way at full opening: particles that collect in a trough on their way come
back when the gate shuts, and the share kept flips with the time that it stands open.

Units: s, eV, V, m, K, kg, e.
Accuracy: transit 1 %, energies 5 %, shares 0.01 (0.05 where the gate cuts the cloud in two),
tests/clouds/test_kick.py.
Source: derived here.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import nan, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from wellseq.clouds.constants import ELEMENTARY_CHARGE_C
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.flight import fly
from wellseq.clouds.forces import AxisPotential, Basin, ForceTable
from wellseq.clouds.inputs import unusable
from wellseq.clouds.orbits import travel_s
from wellseq.clouds.swarm import thermal
from wellseq.clouds.waveforms import Waveforms
from wellseq.fields.hermite import FloatArray

MODEL = "kick"
PARTICLES = 800
MARGIN = 0.01
"""Half-width of a share's interval for the even points and the steps."""
STEPS_PER_BOUNCE = 100
TROUGH_V = 1e-3
ESTIMATE_SHARE_MAX = 0.4


@dataclass(frozen=True, slots=True)
class Dweller:
    """A species in the well: mass in kg, charge in e with its sign, temperature in K."""

    mass_kg: float
    charge_e: float
    temperature_K: Figure


@dataclass(frozen=True, slots=True)
class Stay:
    """What becomes of one species.

    `kept`: the share in the well once it is shut; of those, `gain_eV`: the median energy gained,
    `highest_eV`: what 95 % of them stay below, above the bottom.  `transit_s`: from rest at the
    cloud's place to the gate, the gate open, s.  No energies when nobody is kept.
    """

    kept: Figure
    gain_eV: Figure
    highest_eV: Figure
    transit_s: float


@dataclass(frozen=True, slots=True)
class Kick:
    """What becomes of both; `open_s` is Int p dt.

    `estimate_eV` is the estimate of what the heavy gain; NaN beyond 0.4 of their transit time.
    """

    light: Stay
    heavy: Stay
    open_s: float
    estimate_eV: float
    outside: tuple[Outside, ...] = ()


_NOBODY = Stay(NOT_KNOWN, NOT_KNOWN, NOT_KNOWN, nan)


def kick(
    *,
    table: ForceTable,
    waves: Waveforms,
    light: Dweller,
    heavy: Dweller,
    at_m: float,
    gate_m: float,
    exit_m: float,
    start_s: float,
    end_s: float,
    other_edges: Sequence[Waveforms] = (),
) -> Kick:
    """Open and shut the well at `at_m` (m) by `waves` from `start_s` to `end_s` (s).

    `gate_m`: the middle of the gate; beyond `exit_m` a particle has left for good (m).
    `other_edges`: other shapes that the edges may have; intervals span them, the temperatures'
    intervals, and the stated margin.
    """
    reasons = _sound(light, heavy, start_s, end_s)
    if reasons:
        return Kick(_NOBODY, _NOBODY, nan, nan, reasons)
    open_V, open_s = full_opening(waves, start_s, end_s)
    sign = 1 if heavy.charge_e > 0 else -1
    opened = table.potential(open_V, sign)
    trough = trough_V(opened, at_m, gate_m, exit_m)
    if not trough <= TROUGH_V:
        reasons = (Outside(MODEL, "climb on the way out", trough, TROUGH_V, "V"),)
        return Kick(_NOBODY, _NOBODY, nan, nan, reasons)
    stays = []
    for one in (light, heavy):
        crossing_s = transit_s(opened, at_m, gate_m, one.mass_kg, one.charge_e)
        found = _stay(
            table, (waves, *other_edges), one, at_m, gate_m, exit_m, start_s, end_s, crossing_s
        )
        if not isinstance(found, Stay):
            return Kick(_NOBODY, _NOBODY, nan, nan, found)
        stays.append(found)
    estimate = estimated_gain_eV(opened, at_m, open_s, heavy.charge_e, heavy.mass_kg)
    return Kick(
        stays[0],
        stays[1],
        open_s,
        estimate if open_s <= ESTIMATE_SHARE_MAX * stays[1].transit_s else nan,
    )


def _sound(light: Dweller, heavy: Dweller, start_s: float, end_s: float) -> tuple[Outside, ...]:
    reasons = unusable(MODEL, duration_s=end_s - start_s)
    for one in (light, heavy):
        reasons += unusable(MODEL, mass_kg=one.mass_kg, temperature_K=one.temperature_K.low)
    if light.charge_e * heavy.charge_e <= 0.0:
        product = light.charge_e * heavy.charge_e
        reasons += (Outside(MODEL, "product of the charges", product, 0.0, "", "above"),)
    return reasons


def full_opening(waves: Waveforms, start_s: float, end_s: float) -> tuple[FloatArray, float]:
    """Volts (electrodes,) when the well stands furthest open, and Int p dt in s.

    p is how far the volts are on the way from those at the start to those, as projected on it.
    """
    inner = (waves.times_s > start_s) & (waves.times_s < end_s)
    ends = [waves.at(start_s)[None], waves.volts[inner], waves.at(end_s)[None]]
    times = np.concatenate(([start_s], waves.times_s[inner], [end_s]))
    volts = np.concatenate(ends)
    away = volts - volts[0]
    furthest = int(np.argmax((away**2).sum(axis=1)))
    size = float((away[furthest] ** 2).sum())
    progress = away @ away[furthest] / size if size > 0.0 else np.zeros(times.size)
    return volts[furthest], float(np.diff(times) @ (progress[1:] + progress[:-1])) / 2.0


def trough_V(opened: AxisPotential, at_m: float, gate_m: float, exit_m: float) -> float:
    """How much U rises anywhere on the way from the cloud to the exit plane (m), in V."""
    way = 1 if gate_m > at_m else -1
    z_m = opened.z_m
    path = opened.node_V[(way * (z_m - at_m) >= 0.0) & (way * (exit_m - z_m) >= 0.0)][::way]
    if not path.size:
        return nan
    return float(np.max(path - np.minimum.accumulate(path)))


def transit_s(
    opened: AxisPotential, from_m: float, to_m: float, mass_kg: float, charge_e: float
) -> float:
    """Time in s from rest at one place to another (m); infinite where U rises above the start.

    Mass in kg, charge in e.
    """
    ends = np.array([from_m]), np.array([to_m])
    return float(travel_s(opened, opened.at(ends[0]), *ends, mass_kg / abs(charge_e))[0])


def estimated_gain_eV(
    opened: AxisPotential, at_m: float, open_s: float, charge_e: float, mass_kg: float
) -> float:
    """(m/2)(a Int p dt)^2 in eV, a = e |charge| U'/m at `at_m` (m); `open_s` in s, kg, e."""
    half = opened.step_m
    slope = float(opened.at(at_m + half) - opened.at(at_m - half)) / (2.0 * half)
    momentum = abs(charge_e) * ELEMENTARY_CHARGE_C * slope * open_s
    return momentum**2 / (2.0 * mass_kg) / ELEMENTARY_CHARGE_C


def step_for(potentials: Sequence[AxisPotential], mass_kg: float, charge_e: float) -> float:
    """A hundredth of the shortest bounce that any of these potentials allows, s; kg, e.

    2 pi/w with w^2 = e |charge| max U''/m.
    """
    bend = max(float(np.abs(np.diff(one.slope_V_per_m)).max()) / one.step_m for one in potentials)
    angular = sqrt(abs(charge_e) * ELEMENTARY_CHARGE_C * bend / mass_kg)
    return 2.0 * pi / angular / STEPS_PER_BOUNCE


def _stay(
    table: ForceTable,
    edges: Sequence[Waveforms],
    one: Dweller,
    at_m: float,
    gate_m: float,
    exit_m: float,
    start_s: float,
    end_s: float,
    crossing_s: float,
) -> Stay | tuple[Outside, ...]:
    """What becomes of one species, over edges and temperatures."""
    temperature = one.temperature_K
    kelvins = dict.fromkeys((temperature.value, temperature.low, temperature.high))
    told = []
    for waves in edges:
        for kelvin in kelvins:
            found = _flown(table, waves, one, kelvin, at_m, gate_m, exit_m, start_s, end_s)
            if isinstance(found, tuple):
                return found
            told.append(found)
    best, columns = told[0], np.array(told).T
    kept = Figure(
        float(best[0]),
        max(0.0, float(columns[0].min()) - MARGIN),
        min(1.0, float(columns[0].max()) + MARGIN),
    )
    gain, highest = (
        Figure(float(best[k]), float(columns[k].min()), float(columns[k].max())) for k in (1, 2)
    )
    return Stay(kept, gain, highest, crossing_s)


def _flown(
    table: ForceTable,
    waves: Waveforms,
    one: Dweller,
    kelvin: float,
    at_m: float,
    gate_m: float,
    exit_m: float,
    start_s: float,
    end_s: float,
) -> FloatArray | tuple[Outside, ...]:
    """Share kept, median gain and 95 % energy (eV) of one flight."""
    sign, charges = (1 if one.charge_e > 0 else -1), abs(one.charge_e)
    before, after = (table.potential(waves.at(time), sign) for time in (start_s, end_s))
    well, shut = before.basin(at_m), after.basin(at_m)
    if well is None or shut is None or not _before_the_gate((well, shut), at_m, gate_m):
        return (Outside(MODEL, "depth of the well", 0.0, 0.0, "V", "above"),)
    z_m, speed = thermal(before, well, kelvin, one.mass_kg, PARTICLES, charges)
    kinetic = one.mass_kg / (2.0 * ELEMENTARY_CHARGE_C) * speed**2
    had = kinetic + charges * (before.at(z_m) - well.bottom_V)
    open_V, _ = full_opening(waves, start_s, end_s)
    step = step_for((before, table.potential(open_V, sign)), one.mass_kg, charges)
    low, high = (table.start_m, exit_m) if exit_m > at_m else (exit_m, table.end_m)
    flown = fly(
        table=table,
        waves=waves,
        mass_kg=one.mass_kg,
        charge_e=one.charge_e,
        z_m=z_m,
        speed_m_per_s=speed,
        start_s=start_s,
        end_s=end_s,
        step_s=step,
        leave_m=(low, high),
    )
    if flown.outside:
        return flown.outside
    stays = (flown.side == 0) & _within(flown.z_m, shut)
    stays &= after.holds(flown.z_m, flown.energy_eV / charges)
    if not stays.any():
        return np.array([0.0, nan, nan])
    has = flown.energy_eV - charges * shut.bottom_V
    gain, highest = np.median((has - had)[stays]), np.quantile(has[stays], 0.95)
    return np.array([stays.mean(), gain, highest])


def _before_the_gate(wells: tuple[Basin, Basin], at_m: float, gate_m: float) -> bool:
    """Whether the bottoms are on the cloud's side of the gate: else it has slid out already."""
    return all((well.bottom_m < gate_m) == (at_m < gate_m) for well in wells)


def _within(z_m: FloatArray, basin: Basin) -> NDArray[np.bool_]:
    return np.asarray((z_m > basin.left_m) & (z_m < basin.right_m))
