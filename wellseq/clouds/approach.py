"""Energies of a bunch → the tracks of its particles through a trap whose voltages stand still.

All fly at once, each with its own step of time, so that each makes the same way per step outside:
slow ones get long steps.  Tracks begin outside, in free flight, and go on until all are out again.

Shapes: tracks (samples, energies).  Units: m, m/s, s, eV, kg, e.
Accuracy: with catching.py, tests/clouds/test_catching.py; times of passing,
tests/clouds/test_approach.py.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from wellseq.clouds.constants import ELEMENTARY_CHARGE_C
from wellseq.clouds.flight import Swarm, plain_speed
from wellseq.clouds.forces import ForceTable
from wellseq.fields.hermite import FloatArray

WAY_M = 1e-3
"""Every step outside is so long."""
STRIDE = 5
"""One step of so many is recorded."""
WAYS_MAX = 8.0
"""A track ends after so many times the way in and out, at the latest."""
_GOLDEN = 0.6180339887498949


@dataclass(frozen=True, slots=True)
class Tracks:
    """Samples of tracks (samples, energies), one every `apart_s` (energies,) s.

    `since_s`: time since a free particle of that energy would have passed the near gate's middle.
    `entered_eV` (energies,) are the energies from ground; `z_m` and `speed_m_per_s` where it is.
    """

    entered_eV: FloatArray
    apart_s: FloatArray
    since_s: FloatArray
    z_m: FloatArray
    speed_m_per_s: FloatArray


def approach(
    *,
    table: ForceTable,
    volts: FloatArray,
    mass_kg: float,
    charge_e: float,
    energy_eV: FloatArray,
    near_m: float,
    far_m: float,
    early_s: float,
) -> Tracks:
    """Fly energies (n,) eV in from the left, or from the right when `near_m` > `far_m` (m).

    Tracks begin outside the table and at least `early_s` (s) before the near gate's middle.  Volts
    (electrodes,) V, mass in kg, charge in e with its sign.
    """
    way = 1.0 if far_m > near_m else -1.0
    edge_m = table.start_m if way > 0 else table.end_m
    speed = plain_speed(energy_eV, mass_kg)
    outside_m = np.maximum(abs(near_m - edge_m), speed * early_s)
    # Samples of different energies must not fall on the same places, or their errors would add up.
    outside_m = outside_m + WAY_M * STRIDE * ((np.arange(speed.size) * _GOLDEN) % 1.0)
    step_s = WAY_M / speed
    swarm = Swarm(
        table.slope.shape[1],
        (near_m - way * outside_m - table.start_m) / table.step_m,
        np.full(speed.size, way * WAY_M / table.step_m),
        step_s**2,
    )
    force = -charge_e * ELEMENTARY_CHARGE_C / mass_kg / table.step_m * (volts @ table.slope)
    force[0] = force[-1] = 0.0
    longest = float(outside_m.max()) + 2.0 * abs(far_m - near_m) + abs(near_m - edge_m)
    places, speeds = _record(swarm, force, way, longest, near_m, far_m, table)
    count = places.shape[0]
    since = step_s * STRIDE * np.arange(count)[:, None] - outside_m / speed
    return Tracks(
        energy_eV,
        step_s * STRIDE,
        since,
        table.start_m + table.step_m * places,
        speeds * (table.step_m / step_s),
    )


def _record(
    swarm: Swarm,
    force: FloatArray,
    way: float,
    longest_m: float,
    near_m: float,
    far_m: float,
    table: ForceTable,
) -> tuple[FloatArray, FloatArray]:
    """Places (nodes) and speeds (nodes per step) at every STRIDE-th step until all are out."""
    near, far = ((place - table.start_m) / table.step_m for place in (near_m, far_m))
    most = int(WAYS_MAX * longest_m / WAY_M)
    places, speeds = [swarm.place.copy()], [swarm.speed.copy()]
    swarm.kick(force, 0.5)
    for k in range(1, most + 1):
        swarm.drift()
        swarm.kick(force, 1.0)
        if k % STRIDE:
            continue
        speed = swarm.speed - 0.5 * swarm.pull
        places.append(swarm.place.copy())
        speeds.append(speed)
        back = (way * (swarm.place - near) < 0.0) & (way * speed < 0.0)
        beyond = way * (swarm.place - far) > 0.0
        if (back | (beyond & (way * speed > 0.0))).all() and k * WAY_M > longest_m / 2:
            break
    return np.array(places), np.array(speeds)
