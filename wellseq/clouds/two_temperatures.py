"""Perpendicular and parallel temperature under radiation, collisions and heating → their path.

    dT_perp/dt = nu(T) (T_par - T_perp) - gamma_c (T_perp - T_bore) + 1.5 (1 - p) H
    dT_par/dt = 2 nu(T) (T_perp - T_par) + 3 p H,         T = (2 T_perp + T_par)/3

Only gyration radiates; collisions must carry the parallel energy over, and in a strong field they
stop doing so.  H is the mean heating dT/dt, p the share of its energy that goes into the parallel
motion (1/3: evenly).  nu is that of `collisions`.

Shapes: scalars in; `Cooled.times_s` and the temperatures beside it (times,).  Units: K, s, T, 1/m3.
Accuracy: 0.1 % of the stated equations; measured against a second method and tighter tolerances in
tests/clouds/test_two_temperatures.py.
Source: as `radiation` and `collisions`.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from wellseq.clouds.stiff import Condition, Path, State, solve

ONE_TEMPERATURE_MIN = 10.0
"""One temperature is enough while nu exceeds gamma_c this many times."""


@dataclass(frozen=True, slots=True)
class Balance:
    """What works on the two temperatures.

    collision_rate: T in K → nu in 1/s; radiation_per_s: gamma_c; bore_K; heating_K_per_s: H;
    parallel_share: p.
    """

    collision_rate: Callable[[float], float]
    radiation_per_s: float
    bore_K: float
    heating_K_per_s: float = 0.0
    parallel_share: float = 1.0 / 3.0

    def slopes(self, time_s: float, state: State) -> Sequence[float]:
        """(dT_perp/dt, dT_par/dt) in K/s of (T_perp, T_par) in K; the time in s does not matter."""
        perpendicular_K, parallel_K = float(state[0]), float(state[1])
        # A trial step of the solver may overshoot zero; the rate must stay a number there.
        mean_K = max((2.0 * perpendicular_K + parallel_K) / 3.0, 1e-6)
        exchange = self.collision_rate(mean_K) * (parallel_K - perpendicular_K)
        lost = self.radiation_per_s * (perpendicular_K - self.bore_K)
        across = 1.5 * (1.0 - self.parallel_share) * self.heating_K_per_s
        along = 3.0 * self.parallel_share * self.heating_K_per_s
        return exchange - lost + across, -2.0 * exchange + along

    @property
    def floor_K(self) -> float:
        """T_bore + 1.5 H/gamma_c in K: the mean temperature cannot fall below it."""
        return self.bore_K + 1.5 * self.heating_K_per_s / self.radiation_per_s

    def isotropic(self, *temperatures_K: float) -> bool:
        """Whether collisions are fast enough for one temperature between these, in K.

        nu rises and then falls with T, so the ends of the interval decide.
        """
        least = min(self.collision_rate(item) for item in temperatures_K)
        return least > ONE_TEMPERATURE_MIN * self.radiation_per_s


@dataclass(frozen=True, slots=True, eq=False)
class Cooled:
    """The path of the two temperatures.

    times_s, perpendicular_K, parallel_K: (times,).  goal_s: when the mean temperature falls to the
    goal, both_s: when the hotter of the two does; NaN when not on this path.  stalls_s: when
    the cloud is as cold as `stalled_K`, NaN when it never is.  left_s: when the coldest valid
    temperature was passed and the path ended, NaN when it was not.  complaint: empty, or why the
    solver gave up.
    """

    times_s: State
    perpendicular_K: State
    parallel_K: State
    goal_s: float
    both_s: float
    stalls_s: float
    left_s: float
    complaint: str

    def at(self, time_s: float) -> tuple[float, float]:
        """(T_perp, T_par) in K at a time in s, NaN after the end of the path."""
        if not time_s <= self.times_s[-1]:
            return math.nan, math.nan
        return (
            float(np.interp(time_s, self.times_s, self.perpendicular_K)),
            float(np.interp(time_s, self.times_s, self.parallel_K)),
        )


def mean_K(perpendicular_K: float, parallel_K: float) -> float:
    """(2 T_perp + T_par)/3 in K."""
    return (2.0 * perpendicular_K + parallel_K) / 3.0


def cool_both(
    balance: Balance,
    *,
    perpendicular_K: float,
    parallel_K: float,
    duration_s: float,
    search_s: float = 0.0,
    goal_K: float = -math.inf,
    coldest_K: float = 0.0,
    stalled_K: float = 0.0,
) -> Cooled:
    """The path from two temperatures in K over `duration_s` s.

    Where the hotter of the two is above `goal_K` (K) by then, the search for it goes on up to
    `search_s` s.  The path ends at `coldest_K` (mean temperature, K): below it there is no rate.
    `stalled_K`: the mean temperature in K under which collisions count as stalled.
    """

    def mean_of(state: State) -> float:
        return mean_K(float(state[0]), float(state[1]))

    def leaves(_time_s: float, state: State) -> float:
        return mean_of(state) - coldest_K

    def reaches(_time_s: float, state: State) -> float:
        return mean_of(state) - goal_K

    def both_reach(_time_s: float, state: State) -> float:
        return float(max(state[0], state[1])) - goal_K

    def stalls(_time_s: float, state: State) -> float:
        return mean_of(state) - stalled_K

    watched = [Condition(leaves, ends=True), Condition(stalls)]
    if math.isfinite(goal_K):
        watched += [Condition(reaches), Condition(both_reach)]
    first = solve(balance.slopes, (perpendicular_K, parallel_K), duration_s, conditions=watched)
    crossings = dict(enumerate(first.crossings_s))
    paths = [first]
    unreached = math.isfinite(goal_K) and math.isnan(crossings[3])
    if first.whole and unreached and search_s > duration_s:
        watched[3] = Condition(both_reach, ends=True)
        more = solve(balance.slopes, first.end.tolist(), search_s - duration_s, conditions=watched)
        paths.append(more)
        for number, time_s in enumerate(more.crossings_s):
            if math.isnan(crossings[number]):
                crossings[number] = duration_s + time_s
    return _joined(paths, crossings, duration_s)


def _joined(paths: list[Path], crossings: dict[int, float], duration_s: float) -> Cooled:
    times, states = paths[0].times_s, paths[0].states
    if len(paths) > 1 and not paths[1].complaint:
        # The second path begins with the last point of the first.
        times = np.concatenate([times, duration_s + paths[1].times_s[1:]])
        states = np.concatenate([states, paths[1].states[:, 1:]], axis=1)
    return Cooled(
        times,
        states[0],
        states[1],
        crossings.get(2, math.nan),
        crossings.get(3, math.nan),
        crossings[1],
        crossings[0],
        next((path.complaint for path in paths if path.complaint), ""),
    )
