"""A well opened slowly → when its particles leave, with what energy, and what the slope would say.

Hybrid of two pictures: each particle keeps its action J of the start; at some sixty instants the
action of the separatrix is computed, and a particle leaves when J exceeds it.  The cloud starts in
thermal equilibrium along the axis, f(J) ~ e^{-E(J)/kT} up to the barrier, so the share that has
left at any time is a quantile of J: no particle is drawn.

The *apparent* temperature is what a plot of ln(number released) against the own depth gives,
-1/k (d ln N/dU)^-1, between 0.5 and 10 % released.  It differs from the true one because the
opening well cools what it holds and cuts the hottest off.

Valid while the opening is slow, eps = |d ln w/dt|/w < 0.3 (w of a thermal particle, up to the time
when half have left), without collisions and space charge (unless the table holds it), on the axis;
the slope for kT below 0.15 of the depth.

Units: s, K, eV, V, m, kg, e.
Accuracy: the table of ratios of tests/clouds/test_release.py within 2 %; barrier at exit against
direct flights there.
Source: D. L. Eggleston et al., Parallel energy analyzer for pure electron plasma devices, Phys.
Fluids B 4, 3432 (1992), from memory.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import nan

import numpy as np

from wellseq.clouds.constants import THERMAL_EV_PER_K
from wellseq.clouds.corners import spanned
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.forces import AxisPotential, Basin, ForceTable
from wellseq.clouds.inputs import unusable
from wellseq.clouds.orbits import action_Js, travel_s, turning_m
from wellseq.clouds.waveforms import Waveforms
from wellseq.fields.hermite import FloatArray

MODEL = "release"
SLOPE = "slope of the release"
SNAPSHOTS = 30
CLOSER_MAX = 4
SLOPE_MARGIN = 0.01
"""Half-width, as a share, for the instants looked at and the fit."""
DELAY_BOUNCES = 2.5
"""A particle needs about so many bounces to get out once it may: it lingers at the top."""
RIPPLE_V = 1e-5
"""A well shallower than this has opened."""
ENERGIES = 500
HOTTEST_THETA = 40.0
ADIABATIC_MAX = 0.3
HOT_SHARE_MAX = 0.15
FITTED = (0.005, 0.1)
_FIT_POINTS = 400


@dataclass(frozen=True, slots=True)
class Opening:
    """A well while it opens, at instants (n,) in s: separatrix action (J s), depth and barrier (V).

    `over_right` is 1 where the lower barrier stands on the right; `bounce_per_s` (1/s) is how often
    a thermal particle goes to and fro.  Once the well has gone, action and depth are 0.
    """

    time_s: FloatArray
    action_Js: FloatArray
    depth_V: FloatArray
    barrier_V: FloatArray
    over_right: FloatArray
    bounce_per_s: FloatArray


@dataclass(frozen=True, slots=True)
class Release:
    """What comes out, when (s after the start) and how; energies in eV, from ground.

    `share_out`: of all particles, by the end of the opening; `share_through`: of all, over the side
    asked for; `share_reaching`: of all, with enough energy to get beyond the exit plane there.
    `early_s`, `middle_s`, `late_s`: when 10, 50 and 90 % have left; `energy_eV` the mean energy at
    ground of those that get there.  `apparent_K` is what the slope would say, `correction` true
    over apparent.  `adiabaticity` is the greatest eps.
    """

    share_out: Figure
    share_through: Figure
    share_reaching: Figure
    early_s: Figure
    middle_s: Figure
    late_s: Figure
    energy_eV: Figure
    apparent_K: Figure
    correction: Figure
    adiabaticity: float
    outside: tuple[Outside, ...] = ()


def release(
    *,
    table: ForceTable,
    waves: Waveforms,
    mass_kg: float,
    charge_e: float,
    temperature_K: Figure,
    at_m: float,
    towards: int,
    exit_m: float,
    start_s: float,
    end_s: float,
) -> Release:
    """Open the well at `at_m` (m) by `waves` from `start_s` to `end_s` (s), towards +1 or -1.

    `temperature_K` in K along the axis; mass in kg, charge in e with its sign.  Beyond `exit_m` (m)
    a particle is at the detector.  Intervals reach from the lowest to the highest temperature;
    times have two and a half bounces more above, which particles need to get out.
    Above 0.15 of the depth the apparent temperature alone has no figure.
    """
    reasons = unusable(
        MODEL, mass_kg=mass_kg, temperature_K=temperature_K.low, duration_s=end_s - start_s
    )
    charges, sign = abs(charge_e), 1 if charge_e > 0 else -1
    basin = table.potential(waves.at(start_s), sign).basin(at_m, RIPPLE_V)
    if basin is None:
        reasons += (Outside(MODEL, "depth of the well", 0.0, 0.0, "V", "above"),)
    if reasons or basin is None:
        return _nothing(nan, reasons)
    temperatures = (temperature_K.value, temperature_K.low, temperature_K.high)
    thetas = [THERMAL_EV_PER_K * one / charges for one in temperatures]
    well = _Emptying(table, waves, sign, mass_kg / charges, basin, thetas[0])
    actions = well.actions(start_s, max(thetas))
    seen = well.watch(start_s, end_s, actions, thetas)
    outflows = [_Outflow(seen, actions.left(seen, theta), theta) for theta in thetas]
    eps = float(np.max([one.adiabaticity() for one in outflows]))
    if not eps <= ADIABATIC_MAX:
        return _nothing(eps, (Outside(MODEL, "adiabaticity of the ramp", eps, ADIABATIC_MAX),))
    climb = _climb_V(table.potential(waves.at(end_s), sign), basin, towards, exit_m)
    told = [one.told(start_s, towards, climb, charges) for one in outflows]
    delay_s = DELAY_BOUNCES / float(seen.bounce_per_s[0])
    spans = [spanned(best, others) for best, *others in zip(*told, strict=True)]
    hot = max(thetas) / basin.depth_V
    if hot > HOT_SHARE_MAX:
        reasons = (Outside(SLOPE, "kT over the depth", hot, HOT_SHARE_MAX),)
        spans[7:] = [NOT_KNOWN, NOT_KNOWN]
    return Release(
        share_out=spans[0],
        share_through=spans[1],
        share_reaching=spans[2],
        early_s=_delayed(spans[3], delay_s),
        middle_s=_delayed(spans[4], delay_s),
        late_s=_delayed(spans[5], delay_s),
        energy_eV=spans[6],
        apparent_K=_widened(spans[7]),
        correction=_widened(spans[8]),
        adiabaticity=eps,
        outside=reasons,
    )


def _widened(slope: Figure) -> Figure:
    low, high = slope.low * (1.0 - SLOPE_MARGIN), slope.high * (1.0 + SLOPE_MARGIN)
    return Figure(slope.value, low, high)


def _delayed(time_s: Figure, delay_s: float) -> Figure:
    return Figure(time_s.value, time_s.low, time_s.high + delay_s)


def opening(
    *,
    table: ForceTable,
    waves: Waveforms,
    mass_kg: float,
    charge_e: float,
    temperature_K: float,
    at_m: float,
    times_s: FloatArray,
) -> Opening:
    """The well at `at_m` (m) at rising times (n,) in s; mass in kg, charge in e with its sign.

    `temperature_K` (K) says whose bounces are meant.  Raises ValueError when there is no well at
    the first time.
    """
    charges, sign = abs(charge_e), 1 if charge_e > 0 else -1
    basin = table.potential(waves.at(float(times_s[0])), sign).basin(at_m, RIPPLE_V)
    if basin is None:
        raise ValueError("there is no well to open")
    theta_V = THERMAL_EV_PER_K * temperature_K / charges
    return _Emptying(table, waves, sign, mass_kg / charges, basin, theta_V).at(times_s)


def _nothing(adiabaticity: float, outside: tuple[Outside, ...]) -> Release:
    """No figure, and why."""
    no = NOT_KNOWN
    return Release(no, no, no, no, no, no, no, no, no, adiabaticity, outside)


def _climb_V(potential: AxisPotential, basin: Basin, towards: int, exit_m: float) -> float:
    """The highest U in V between the barrier and the exit plane (m)."""
    first = basin.right_m if towards > 0 else basin.left_m
    low, high = min(first, exit_m), max(first, exit_m)
    z_m = potential.z_m
    way = (z_m >= low) & (z_m <= high)
    return float(potential.node_V[way].max()) if way.any() else float(potential.at(exit_m))


@dataclass(frozen=True, slots=True)
class _Actions:
    """Energies (n,) above the bottom (V) of the well at the start, and their actions (n,) J s."""

    above_V: FloatArray
    action_Js: FloatArray

    def left(self, opening: Opening, theta_V: float) -> FloatArray:
        """Share of a cloud of kT = `theta_V` (V per charge) that is out, at every instant."""
        weight = np.exp(-self.above_V / theta_V)
        part = (weight[1:] + weight[:-1]) / 2.0 * np.diff(self.action_Js)
        below = np.concatenate(([0.0], np.cumsum(part)))
        kept = np.interp(opening.action_Js, self.action_Js, below / below[-1])
        # Whoever has left does not come back when a barrier rises again.
        return np.asarray(1.0 - np.minimum.accumulate(kept))


@dataclass(frozen=True, slots=True)
class _Emptying:
    """The well that is opened: what is needed to look at it at any time."""

    table: ForceTable
    waves: Waveforms
    sign: int
    per_charge_kg: float
    basin: Basin
    theta_V: float

    def actions(self, start_s: float, hottest_V: float) -> _Actions:
        """Actions at the start, up to the barrier or forty kT."""
        highest = min(self.basin.depth_V, HOTTEST_THETA * hottest_V)
        above = highest * (np.arange(ENERGIES) / (ENERGIES - 1.0)) ** 2
        potential = self.table.potential(self.waves.at(start_s), self.sign)
        energy = self.basin.bottom_V + above
        return _Actions(above, action_Js(potential, self.basin, energy, self.per_charge_kg))

    def watch(
        self, start_s: float, end_s: float, actions: _Actions, thetas_V: list[float]
    ) -> Opening:
        """Look at thirty instants, then more closely until thirty fall on those who leave."""
        seen = self.at(np.linspace(start_s, end_s, SNAPSHOTS))
        for _ in range(CLOSER_MAX):
            left = [actions.left(seen, theta) for theta in thetas_V]
            first = max(int(np.argmax(np.max(left, axis=0) > 1e-3)) - 1, 0)
            last = int(np.argmax(np.min(left, axis=0) > 1.0 - 1e-3)) or seen.time_s.size - 1
            if last - first >= SNAPSHOTS - 2:
                break
            inner = np.linspace(seen.time_s[first], seen.time_s[last], SNAPSHOTS + 2)
            seen = self.at(np.union1d(seen.time_s, inner))
        return seen

    def at(self, times_s: FloatArray) -> Opening:
        """The well at times (n,) in s."""
        rows: list[tuple[float, ...]] = []
        gone = False
        bottom_m, barrier_V = self.basin.bottom_m, self.basin.barrier_V
        for time_s in times_s.tolist():
            potential = self.table.potential(self.waves.at(time_s), self.sign)
            found = None if gone else potential.basin(bottom_m, RIPPLE_V)
            # A bottom beyond the old barriers is another well: this one has opened.
            gone = found is None or not self.basin.left_m < found.bottom_m < self.basin.right_m
            if found is None or gone:
                rows.append((0.0, 0.0, barrier_V, rows[-1][3] if rows else 1.0, 0.0))
                continue
            bottom_m, barrier_V = found.bottom_m, found.barrier_V
            top = np.array([barrier_V])
            action = float(action_Js(potential, found, top, self.per_charge_kg)[0])
            right = float(found.right_V < found.left_V)
            rows.append((action, found.depth_V, barrier_V, right, self._bounce(potential, found)))
        return Opening(times_s, *np.array(rows).T)

    def _bounce(self, potential: AxisPotential, basin: Basin) -> float:
        """Bounces per second of a particle with kT, at most half the depth, above the bottom."""
        energy = np.array([basin.bottom_V + min(self.theta_V, basin.depth_V / 2)])
        left = turning_m(potential, energy, basin.bottom_m, basin.left_m)
        right = turning_m(potential, energy, basin.bottom_m, basin.right_m)
        return float(0.5 / travel_s(potential, energy, left, right, self.per_charge_kg)[0])


@dataclass(frozen=True, slots=True)
class _Outflow:
    """How a cloud of kT = `theta_V` leaves: the share that is out at each instant."""

    opening: Opening
    share: FloatArray
    theta_V: float

    def adiabaticity(self) -> float:
        """The greatest |d ln w/dt|/w until half have left."""
        opening = self.opening
        known = (opening.bounce_per_s > 0.0) & (self.share <= 0.5)
        if np.count_nonzero(known) < 2:
            return nan
        angular = 2.0 * np.pi * opening.bounce_per_s[known]
        change = np.gradient(np.log(angular), opening.time_s[known])
        return float(np.max(np.abs(change) / angular))

    def told(self, start_s: float, towards: int, climb_V: float, charges: float) -> list[float]:
        """The nine figures of a `Release`, in order."""
        opening, share = self.opening, self.share
        leaving = np.diff(share, prepend=0.0)
        right = opening.over_right if towards > 0 else 1.0 - opening.over_right
        through = leaving * right
        reaching = through * (opening.barrier_V >= climb_V)
        total = float(reaching.sum())
        energy = float(reaching @ opening.barrier_V) / total * charges if total > 0.0 else nan
        times = [self._when(part) - start_s for part in (0.1, 0.5, 0.9)]
        slope_K = self._apparent_V() * charges / THERMAL_EV_PER_K
        true_K = self.theta_V * charges / THERMAL_EV_PER_K
        shares = [float(share[-1]), float(through.sum()), total]
        return [*shares, *times, energy, slope_K, true_K / slope_K]

    def _when(self, part: float) -> float:
        """When this part of all has left, s; NaN when it never has."""
        if not self.share[-1] >= part:
            return nan
        return float(np.interp(part, self.share, self.opening.time_s))

    def _apparent_V(self) -> float:
        """-(d ln N/dU)^-1 in V, of straight lines through equal steps of the number released."""
        low, high = FITTED
        if not self.share[-1] >= high:
            return nan
        part = np.linspace(low, high, _FIT_POINTS)
        depth = np.interp(part, self.share, self.opening.depth_V)
        slope = np.polyfit(depth - depth.mean(), np.log(part), 1)[0]
        return float(-1.0 / slope) if slope < 0.0 else nan
