"""Tracks and a moving gate → from which places on the tracks a particle is caught.

Every sample of every track is flown through the real edge.  What the bunch's arrival times make of
it is an exact integral: caught(E, tau) is taken as straight between samples, and the share of the
bunch between two samples follows from the arrival's cumulative distribution.

Shapes: maps (samples, energies).  Units: s, eV, m.
Accuracy and source: catching.py.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import nan

import numpy as np
from numpy.typing import NDArray

from wellseq.clouds.approach import Tracks
from wellseq.clouds.figures import Outside
from wellseq.clouds.flight import fly
from wellseq.clouds.forces import AxisPotential, ForceTable
from wellseq.clouds.swarm import Spreading
from wellseq.clouds.waveforms import Waveforms
from wellseq.fields.hermite import FloatArray

EDGE_WAY_M = 2e-3
"""The fastest particle goes so far in one step while the gate moves."""
_SURE_WAY = 1.2
_SEEN = 1e-6


@dataclass(frozen=True, slots=True)
class CaptureMap:
    """Which samples are caught: `caught`, `leaving` (lost on the way out), 0 or 1 (samples, n).

    `window_s`: when the gate begins to move; `kept_eV` (samples, n) total energies once it is shut.
    `each`: the share of the bunch that one energy stands for.  What no gate holds has no track:
    `energetic` is its share.
    """

    tracks: Tracks
    window_s: float
    caught: FloatArray
    leaving: FloatArray
    kept_eV: FloatArray
    each: float
    energetic: float
    particle_steps: int

    def share(self, arrival_s: Spreading, begin_s: FloatArray) -> FloatArray:
        """Share caught (k,) when the gate begins to move at `begin_s` (k,), in s."""
        return self._integral(self.caught, arrival_s, begin_s)

    def late(self, arrival_s: Spreading) -> float:
        """Share that was on its way out, or out already, at `window_s` (s)."""
        begin = np.array([self.window_s])
        gone = arrival_s.below(self.window_s - self.tracks.since_s[-1])
        return float(self._integral(self.leaving, arrival_s, begin)[0] + self.each * gone.sum())

    def _integral(
        self, marked: FloatArray, arrival_s: Spreading, begin_s: FloatArray
    ) -> FloatArray:
        # Only the steps of the map count: sum over them of height times distribution.
        cell = (marked[1:] + marked[:-1]) / 2.0
        step = np.diff(cell, axis=0, prepend=0.0, append=0.0)
        here = np.nonzero(step)
        below = arrival_s.below(np.asarray(begin_s)[:, None] - self.tracks.since_s[here])
        return np.asarray(self.each * (below @ step[here]))

    def weights(self, arrival_s: Spreading) -> FloatArray:
        """Share of the bunch (samples, n) that each caught sample stands for."""
        below = arrival_s.below(self.window_s - self.tracks.since_s)
        part = below[:-1] - below[1:]
        whole = np.zeros_like(below)
        whole[:-1] += part / 2.0
        whole[1:] += part / 2.0
        return np.asarray(self.each * whole * self.caught)

    def energies(self, arrival_s: Spreading) -> tuple[float, float, float]:
        """Of what is caught: mean energy gained, mean and highest total energy, eV, from ground."""
        weight = self.weights(arrival_s)
        total = float(weight.sum())
        if not total > 0.0:
            return nan, nan, nan
        gain = float((weight * (self.kept_eV - self.tracks.entered_eV)).sum()) / total
        mean = float((weight * self.kept_eV).sum()) / total
        return gain, mean, float(self.kept_eV[weight > _SEEN * total].max())


def capture_map(
    *,
    table: ForceTable,
    waves: Waveforms,
    mass_kg: float,
    charge_e: float,
    tracks: Tracks,
    each: float,
    energetic: float,
    near_m: float,
    far_m: float,
) -> CaptureMap | tuple[Outside, ...]:
    """Fly every sample through all that moves in `waves`; reasons when that is too much work.

    Gates at `near_m` and `far_m` (m), mass in kg, charge in e with its sign.
    """
    begin_s, end_s = waves.moving_s()
    lasting_s = end_s - begin_s
    z_m, speed = tracks.z_m, tracks.speed_m_per_s
    chosen = _chosen(tracks, near_m, far_m, lasting_s)
    fastest = float(np.abs(speed).max())
    flown = fly(
        table=table,
        waves=waves,
        mass_kg=mass_kg,
        charge_e=charge_e,
        z_m=z_m[chosen],
        speed_m_per_s=speed[chosen],
        start_s=begin_s,
        end_s=end_s,
        step_s=EDGE_WAY_M / fastest,
    )
    if flown.outside:
        return flown.outside
    shut = table.potential(waves.at(end_s), 1 if charge_e > 0 else -1)
    low, high = min(near_m, far_m), max(near_m, far_m)
    inside = (flown.z_m > low) & (flown.z_m < high)
    held = inside & shut.holds(flown.z_m, flown.energy_eV / abs(charge_e))
    caught = np.zeros(z_m.shape)
    caught[chosen] = held
    kept = np.zeros(z_m.shape)
    kept[chosen] = flown.energy_eV
    leaving = _outbound(tracks, near_m, far_m, lasting_s / 2.0) * (1.0 - caught)
    return CaptureMap(tracks, begin_s, caught, leaving, kept, each, energetic, flown.particle_steps)


def held_V(potentials: tuple[AxisPotential, ...], near_m: float, far_m: float) -> float:
    """The energy per charge (eV) that both gates turn round in all of these potentials, in V."""
    middle = (near_m + far_m) / 2.0
    walls = []
    for potential in potentials:
        cell = round((middle - potential.start_m) / potential.step_m)
        walls += [potential.crest_V[:cell].max(), potential.crest_V[cell:].max()]
    return float(min(walls))


def _chosen(tracks: Tracks, near_m: float, far_m: float, lasting_s: float) -> NDArray[np.bool_]:
    """Samples that may be caught: not beyond the far gate, not out again, not too far outside."""
    way = 1.0 if far_m > near_m else -1.0
    place = way * (tracks.z_m - near_m)
    inward = way * tracks.speed_m_per_s > 0.0
    reached = place + _SURE_WAY * np.abs(tracks.speed_m_per_s) * lasting_s
    within = np.where(inward, reached, place) > 0.0
    return np.asarray(within & (place < abs(far_m - near_m)))


def _outbound(tracks: Tracks, near_m: float, far_m: float, after_s: float) -> FloatArray:
    """1 where a particle is on its way out `after_s` (s) after the sample, gate left open."""
    way = 1.0 if far_m > near_m else -1.0
    outward = way * tracks.speed_m_per_s < 0.0
    count, energies = outward.shape
    ahead = np.rint(after_s / tracks.apart_s).astype(np.intp)
    row = np.minimum(np.arange(count)[:, None] + ahead, count - 1)
    return np.asarray(outward[row, np.arange(energies)], dtype=float)
