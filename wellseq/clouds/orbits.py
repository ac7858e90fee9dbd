"""Orbits in a potential that stands still: turning points, times of travel, actions.

In U(z) of forces.AxisPotential; energies in eV *per elementary charge*, so that they compare with U
in V, and `mass_kg` is the mass per elementary charge likewise.  Turning points are roots of the
table's own parabolas, never nodes.  Where a particle turns or starts from rest its speed goes with
the root of the distance, so times are summed in a variable in which the integrand is smooth.

    time of travel = Int dz sqrt(m/2)/sqrt(E - U);   J = (1/pi) Int sqrt(2 m (E - U)) dz

Shapes: energies (n,).  Units: m, s, J s, kg, eV.
Accuracy: 1e-4 of times, 1e-5 of actions, tests/clouds/test_orbits.py.
Source: Gauss-Chebyshev rule: Handbook of Mathematical Functions, 25.4.38 (1964), from memory.
"""

from __future__ import annotations

from math import pi

import numpy as np

from wellseq.clouds.constants import ELEMENTARY_CHARGE_C
from wellseq.clouds.forces import AxisPotential, Basin
from wellseq.fields.hermite import FloatArray

_TRAVEL_POINTS = 800
_ACTION_POINTS = 64


def turning_m(
    potential: AxisPotential, energy_eV: FloatArray, from_m: float, to_m: float
) -> FloatArray:
    """Where particles (n,) of total energy (eV) that go from `from_m` to `to_m` turn round, m.

    NaN for who gets there, or has less energy than U at `from_m`.
    """
    way = 1 if to_m > from_m else -1
    first = round((from_m - potential.start_m) / potential.step_m)
    last = round((to_m - potential.start_m) / potential.step_m)
    first, last = np.clip([first, last], 0, potential.node_V.size - 1)
    line = (
        potential.node_V[first : last + 1] if way > 0 else potential.node_V[last : first + 1][::-1]
    )
    highest = np.maximum.accumulate(line)
    after = np.searchsorted(highest, energy_eV, side="left")
    turns = (after > 0) & (after < line.size)
    node = first + way * np.clip(after - 1, 0, max(line.size - 2, 0))
    share = _root(potential, node, way, energy_eV)
    place = potential.start_m + potential.step_m * (node + way * share)
    return np.asarray(np.where(turns, place, np.nan))


def _root(
    potential: AxisPotential, node: FloatArray, way: int, energy_eV: FloatArray
) -> FloatArray:
    """Share of the interval beyond `node` at which U = E, rising from below."""
    other = np.clip(node + way, 0, potential.node_V.size - 1)
    rise = way * potential.slope_V_per_m[node] * potential.step_m
    bend = way * potential.slope_V_per_m[other] * potential.step_m - rise
    missing = energy_eV - potential.node_V[node]
    under = np.maximum(rise**2 + 2.0 * bend * missing, 0.0)
    # The stable form of the root that is reached first.
    lower = rise + np.sqrt(under)
    share = np.divide(2.0 * missing, lower, out=np.zeros_like(missing), where=lower > 0)
    return np.asarray(np.clip(share, 0.0, 1.0))


def travel_s(
    potential: AxisPotential,
    energy_eV: FloatArray,
    from_m: FloatArray,
    to_m: FloatArray,
    mass_kg: float,
) -> FloatArray:
    """Time in s that particles (n,) of total energy (eV) and mass (kg) take between two places, m.

    They may start from rest and may turn at `to_m`.  Infinite where they cannot get there.
    """
    energy, begin, end = np.broadcast_arrays(energy_eV, from_m, to_m)
    angle = (np.arange(_TRAVEL_POINTS) + 0.5) * (pi / _TRAVEL_POINTS)
    # z runs with the cosine: its rate vanishes at both ends as fast as the speed may.
    share = (1.0 - np.cos(angle)) / 2.0
    rate = np.sin(angle) / 2.0 * (pi / _TRAVEL_POINTS)
    z_m = begin[..., None] + (end - begin)[..., None] * share
    left = energy[..., None] - potential.at(z_m)
    with np.errstate(divide="ignore", invalid="ignore"):
        slowness = np.where(left > 0.0, 1.0 / np.sqrt(np.maximum(left, 0.0)), np.inf)
    factor = np.sqrt(mass_kg / (2.0 * ELEMENTARY_CHARGE_C))
    return np.asarray(factor * np.abs(end - begin) * (slowness @ rate))


def action_Js(
    potential: AxisPotential, basin: Basin, energy_eV: FloatArray, mass_kg: float
) -> FloatArray:
    """Action J (n,) in J s of total energies (eV) in a well, mass in kg; 0 at its bottom.

    At and above the lower barrier the orbit ends at the barriers themselves.
    """
    ends = []
    for to_m in (basin.left_m, basin.right_m):
        place = turning_m(potential, energy_eV, basin.bottom_m, to_m)
        above = energy_eV > basin.bottom_V
        ends.append(np.where(np.isnan(place), np.where(above, to_m, basin.bottom_m), place))
    centre, half = (ends[0] + ends[1]) / 2, (ends[1] - ends[0]) / 2
    count = _ACTION_POINTS
    x = np.cos((2.0 * np.arange(1, count + 1) - 1.0) * (pi / (2 * count)))
    left = np.maximum(energy_eV[:, None] - potential.at(centre[:, None] + half[:, None] * x), 0.0)
    total = np.sqrt(left * (1.0 - x**2)).sum(axis=1)
    return np.asarray(half / count * np.sqrt(2.0 * mass_kg * ELEMENTARY_CHARGE_C) * total)
