"""A bunch that flies in, and a gate that shuts behind it → the share that stays, and when to shut.

A particle of energy E (eV, from ground) that passes the middle of the near gate at t_a is caught
when, the gate shut, it is between the gates and U rises above its energy on both sides.  Before the
gate moves every potential stands still, so where a particle is when the gate begins to move depends
on E and on the time t_w - t_a alone.  Hence the flight is made once for all closing times:

1. every energy flies in and out again in the open trap, its track recorded at even steps of way;
2. every place on every track is flown through the real edge (flight.py); caught or not;
3. share(t_w) = sum over energies of Int caught(E, t_w - t_a) g(t_a) dt_a, for any t_w, with the
   exact integral of g over each step of the track.

The cheap forms (tau: the way to the far gate and back, U_g(t) = V clip((t - t_d)/t_r, 0, 1)):
caught if E < V, U_g(t_a) < E and U_g(t_a + tau) > E.  *Sharp* has tau = 2 (L - l/2)/v and the
gate's own volts, good to 0.06; *mirror* has the on-axis maximum and the far gate's real profile,
good to 0.025: both miss the particles inside the gate while it rises.

Valid without space charge in the bunch and collisions on the way, on the axis.

Units: s, eV, V, m, m/s, kg, e.
Accuracy: share 0.01 with the stated margin 0.005, tests/clouds/test_catching.py.
Source: G. Gabrielse et al., First capture of antiprotons in a Penning trap: a kiloelectronvolt
source, Phys. Rev. Lett. 57, 2504 (1986), from memory; the map over t_w - t_a was derived here.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import nan

import numpy as np

from wellseq.clouds.approach import Tracks, approach
from wellseq.clouds.capture import CaptureMap, capture_map, held_V
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.flight import plain_speed
from wellseq.clouds.forces import AxisPotential, ForceTable
from wellseq.clouds.inputs import negative, unusable
from wellseq.clouds.orbits import travel_s, turning_m
from wellseq.clouds.swarm import Spreading
from wellseq.clouds.waveforms import Waveforms
from wellseq.fields.hermite import FloatArray

MODEL = "catching"
ENERGIES = 320
MARGIN = 0.005
"""Half-width of the share's interval for the even points and the steps."""
GOOD = 0.98
"""Closing times are good while the share is at least this much of the best."""
LEAST_SHARE = 2e-3
"""Particles below this share of the highest energy are flown as if they had it."""
WAY_MAX_M = 4.0
"""A gate that moves for longer than this is not flown through."""
_CLOSINGS = 400
_TOP = 0.999


@dataclass(frozen=True, slots=True)
class Bunch:
    """Energies in eV, from ground, and times in s at which they pass the near gate's middle.

    The times are those of free flight at the energy outside, in the waveforms' time.
    """

    energy_eV: Spreading
    arrival_s: Spreading


@dataclass(frozen=True, slots=True)
class Catch:
    """What stays.  Shares are of the whole bunch.

    `share`; `early`: lost because the gate was shut before they were in, `late`: because they were
    out again, `energetic`: because no gate holds them (eV); `best_share` at `best_closing_s`, and
    within 2 % of it from `good_from_s` to `good_to_s` (s; half of the edge over).  Of who stays:
    `gain_eV`, the mean energy gained, `mean_eV` and `highest_eV`, total energies from ground.
    """

    share: Figure
    early: float
    late: float
    energetic: float
    best_share: float
    best_closing_s: float
    good_from_s: float
    good_to_s: float
    gain_eV: float
    mean_eV: float
    highest_eV: float
    particle_steps: int
    outside: tuple[Outside, ...] = ()


def _nothing(outside: tuple[Outside, ...]) -> Catch:
    return Catch(NOT_KNOWN, nan, nan, nan, nan, nan, nan, nan, nan, nan, nan, 0, outside)


def catch(
    *,
    table: ForceTable,
    waves: Waveforms,
    mass_kg: float,
    charge_e: float,
    bunch: Bunch,
    near_m: float,
    far_m: float,
    closing_s: float,
    jitter_s: float = 0.0,
    other_edges: Sequence[Waveforms] = (),
    energies: int = ENERGIES,
) -> Catch:
    """Catch a bunch between gates whose middles are at `near_m` and `far_m` (m).

    `waves` holds all that moves while the near gate shuts; `closing_s` is when half of that edge is
    over.  `jitter_s`: all of it may come so much earlier or later; `other_edges`: other shapes that
    the edges may have.  The share's interval spans them, and the stated margin.  Mass in kg, charge
    in e with its sign.
    """
    reasons = (
        *unusable(MODEL, mass_kg=mass_kg, energy_eV=_highest_eV(bunch)),
        *negative(MODEL, jitter_s=jitter_s, duration_s=bunch.arrival_s.width),
    )
    if reasons:
        return _nothing(reasons)
    maps: list[CaptureMap] = []
    for edges in (waves, *other_edges):
        found = _map(table, edges, mass_kg, charge_e, bunch, (near_m, far_m), energies)
        if isinstance(found, tuple):
            return _nothing(found)
        maps.append(found)
    first, arrival = maps[0], bunch.arrival_s
    ways = np.concatenate([_around(one, arrival, jitter_s) for one in maps])
    share = float(first.share(arrival, np.array([first.window_s]))[0])
    late = first.late(arrival)
    best, *times = _best(first, arrival)
    shift = closing_s - first.window_s
    gain, mean, highest = first.energies(arrival)
    low, high = float(ways.min()) - MARGIN, float(ways.max()) + MARGIN
    return Catch(
        share=Figure(share, max(0.0, low), min(1.0, high)),
        early=max(0.0, 1.0 - share - late - first.energetic),
        late=late,
        energetic=first.energetic,
        best_share=best,
        best_closing_s=times[0] + shift,
        good_from_s=times[1] + shift,
        good_to_s=times[2] + shift,
        gain_eV=gain,
        mean_eV=mean,
        highest_eV=highest,
        particle_steps=sum(one.particle_steps for one in maps),
    )


def _highest_eV(bunch: Bunch) -> float:
    return bunch.energy_eV.middle + bunch.energy_eV.reach


def _map(
    table: ForceTable,
    waves: Waveforms,
    mass_kg: float,
    charge_e: float,
    bunch: Bunch,
    gates_m: tuple[float, float],
    energies: int,
) -> CaptureMap | tuple[Outside, ...]:
    begin_s, end_s = waves.moving_s()
    sign, before, after = 1 if charge_e > 0 else -1, waves.volts[0], waves.at(end_s)
    if np.array_equal(before, after):
        return (Outside(MODEL, "swing of the gate", 0.0, 0.0, "V", "above"),)
    every = bunch.energy_eV.quantiles(energies)
    every = np.maximum(every, LEAST_SHARE * float(every.max()))
    shut = table.potential(after, sign)
    most = abs(charge_e) * held_V((shut,), *gates_m)
    flown = every[every < most]
    if not flown.size:
        return _nobody(begin_s)
    way_m = float(plain_speed(flown, mass_kg).max()) * (end_s - begin_s)
    if not way_m <= WAY_MAX_M:
        return (Outside(MODEL, "way flown while the gate moves", way_m, WAY_MAX_M, "m"),)
    tracks = approach(
        table=table,
        volts=before,
        mass_kg=mass_kg,
        charge_e=charge_e,
        energy_eV=flown,
        near_m=gates_m[0],
        far_m=gates_m[1],
        early_s=end_s - begin_s,
    )
    return capture_map(
        table=table,
        waves=waves,
        mass_kg=mass_kg,
        charge_e=charge_e,
        tracks=tracks,
        each=1.0 / energies,
        energetic=1.0 - flown.size / energies,
        near_m=gates_m[0],
        far_m=gates_m[1],
    )


def _nobody(window_s: float) -> CaptureMap:
    """No gate holds anybody."""
    empty = np.zeros((1, 0))
    tracks = Tracks(empty[0], empty[0], empty, empty, empty)
    return CaptureMap(tracks, window_s, empty, empty, empty, 0.0, 1.0, 0)


def _around(caught: CaptureMap, arrival_s: Spreading, jitter_s: float) -> FloatArray:
    """Shares within `jitter_s` of the time asked for."""
    return caught.share(arrival_s, caught.window_s + jitter_s * np.linspace(-1.0, 1.0, 21))


def _best(caught: CaptureMap, arrival_s: Spreading) -> tuple[float, float, float, float]:
    """The best share, the time for it, and from when to when it is within 2 % of that, s."""
    since = caught.tracks.since_s[caught.caught > 0.0]
    if not since.size:
        return 0.0, nan, nan, nan
    centre, reach = arrival_s.middle, arrival_s.reach
    low, high = centre - reach + float(since.min()), centre + reach + float(since.max())
    for _ in range(2):
        times = np.linspace(low, high, _CLOSINGS)
        shares = caught.share(arrival_s, times)
        low, high = _at_least(times, shares, GOOD)
        pad = times[1] - times[0]
        low, high = low - pad, high + pad
    good_from, good_to = _at_least(times, shares, GOOD)
    top_from, top_to = _at_least(times, shares, _TOP)
    return float(shares.max()), (top_from + top_to) / 2.0, good_from, good_to


def _at_least(times: FloatArray, shares: FloatArray, part: float) -> tuple[float, float]:
    """From when to when, around the greatest, shares are at least `part` of it."""
    top = int(np.argmax(shares))
    level = part * shares[top]
    under = np.flatnonzero(shares < level)
    before, after = under[under < top], under[under > top]
    first, last = float(times[0]), float(times[-1])
    if before.size:
        k = int(before[-1])
        first = float(np.interp(level, shares[k : k + 2], times[k : k + 2]))
    if after.size:
        k = int(after[0])
        last = float(np.interp(-level, -shares[k - 1 : k + 1], times[k - 1 : k + 1]))
    return first, last


def sharp(
    *,
    bunch: Bunch,
    gate_V: float,
    start_s: float,
    rise_s: float,
    apart_m: float,
    gate_m: float,
    mass_kg: float,
    charge_e: float = 1.0,
    energies: int = 2000,
) -> float:
    """Share caught by gates of `gate_V` V that turn particles round at their rims, 0 to 1.

    Straight edge from `start_s` over `rise_s` (s); middles `apart_m` apart, each `gate_m` long (m);
    mass in kg, charge in e.
    """
    energy = np.maximum(bunch.energy_eV.quantiles(energies), 1e-9)
    ways = 2.0 * (apart_m - gate_m / 2.0) / plain_speed(energy, mass_kg)
    return _kept(bunch, energy, abs(charge_e) * gate_V, ways, start_s, rise_s)


def mirror(
    *,
    bunch: Bunch,
    open_trap: AxisPotential,
    gate_V: float,
    start_s: float,
    rise_s: float,
    near_m: float,
    far_m: float,
    mass_kg: float,
    charge_e: float = 1.0,
    energies: int = 400,
) -> float:
    """Share caught when the far gate turns particles round in its real profile, 0 to 1.

    `open_trap`: U before the near gate moves; `gate_V` (V): the highest U of the shut near gate on
    the axis; middles at `near_m` and `far_m` (m); straight edge from `start_s` over `rise_s` (s);
    mass in kg, charge in e.
    """
    energy = np.maximum(bunch.energy_eV.quantiles(energies), 1e-9)
    level = energy / abs(charge_e)
    turns = turning_m(open_trap, level, near_m, far_m)
    per_charge_kg = mass_kg / abs(charge_e)
    there = np.where(np.isnan(turns), far_m, turns)
    ways = 2.0 * travel_s(open_trap, level, np.full(energies, near_m), there, per_charge_kg)
    # Who gets over the far gate never comes back, and never is caught.
    ways = np.where(np.isnan(turns), 0.0, ways)
    return _kept(bunch, energy, abs(charge_e) * gate_V, ways, start_s, rise_s)


def _kept(
    bunch: Bunch,
    energy_eV: FloatArray,
    gate_eV: float,
    ways_s: FloatArray,
    start_s: float,
    rise_s: float,
) -> float:
    """Mean over energies of the share that is in before U_g = E, and not yet out again then."""
    shut_s = start_s + rise_s * energy_eV / gate_eV
    arrival = bunch.arrival_s
    share = arrival.below(shut_s) - arrival.below(shut_s - ways_s)
    return float(np.mean(np.where(energy_eV < gate_eV, share, 0.0)))
