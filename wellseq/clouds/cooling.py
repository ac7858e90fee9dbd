"""A cloud, its field and its bore → how cold it gets, when, and whether it can at all.

One temperature (closed form, see `radiation`) decides while collisions exceed ten times the
radiation over the whole path; otherwise both are followed (see `two_temperatures`).

Units: K, K/s, T, 1/m3, s, kg, elementary charges.  Shapes: scalars in, a record out.
Valid for kbar <= 300 (above 100 the collision rate is extrapolated, and said to be), temperatures
far from relativistic, uniform B, no cavity resonance near the cyclotron frequency.
Accuracy: closed form 1e-9, two temperatures 0.1 % of the stated equations; worked examples in
tests/clouds/test_cooling.py.
Source (from memory): Cooling of a pure electron plasma by cyclotron radiation, Phys. Fluids 23,
725 (1980); Collisional equipartition rate for a magnetized pure electron plasma, Phys. Fluids B 4,
1156 (1992).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from wellseq.clouds import collisions, radiation
from wellseq.clouds.constants import BOLTZMANN_J_PER_K, LIGHT_SPEED_M_PER_S
from wellseq.clouds.corners import all_reasons, spanned
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.inputs import negative, unusable
from wellseq.clouds.stiff import WORK_MAX
from wellseq.clouds.two_temperatures import Balance, Cooled, cool_both, mean_K

ONE = "radiative cooling, one temperature"
TWO = "radiative cooling, two temperatures"
SEARCH_TIME_CONSTANTS = 100.0
"""So many tau_T after the end of a step the goal is still looked for."""
RATE_FACTOR = 1.17
"""The widest factor of the collision rate below kbar = 100."""
REST_ENERGY_SHARE_MAX = 0.05
"""Largest kT/mc^2: beyond it the radiation is not the one of slow particles."""


@dataclass(frozen=True, slots=True)
class Cooling:
    """What radiation does to one cloud: K and s, NaN where there is no figure.

    model: which of the two decided.  temperature_K: (2 T_perp + T_par)/3 at the end, with the two
    beside it.  floor_K: no colder ever; `never_K` repeats the goal when it is not above the floor
    (`never-that-cold`), else NaN.  goal_s: when the mean temperature falls to the goal, both_s:
    when the hotter of the two does; infinity for never or not within searched_s.  stalls_K: below
    it collisions are slower than radiation; stalls_s: when the cloud gets there
    (`parallel-cooling-stalls`), NaN when it does not.  extrapolated: the rate above kbar = 100 was
    used.  outside: why the end is not known; goal_outside: why the time of the goal is not known.
    """

    model: str
    temperature_K: float
    perpendicular_K: float
    parallel_K: float
    floor_K: float
    never_K: float
    goal_s: float
    both_s: float
    searched_s: float
    stalls_K: float
    stalls_s: float
    extrapolated: bool
    outside: tuple[Outside, ...]
    goal_outside: tuple[Outside, ...]


def cool(
    *,
    start_K: float,
    bore_K: float,
    magnetic_field_T: float,
    density_per_m3: float,
    mass_kg: float,
    duration_s: float,
    charge_e: float = 1.0,
    heating_K_per_s: float = 0.0,
    goal_K: float | None = None,
    start_parallel_K: float | None = None,
    parallel_share: float = 1.0 / 3.0,
    collision_scale: float = 1.0,
) -> Cooling:
    """Cool from `start_K` over `duration_s`; K, T, 1/m3, kg, s, charge in e.

    start_parallel_K: where it differs from the perpendicular `start_K`.  parallel_share: share of
    the heating (K/s, of the mean temperature) that goes into the parallel motion.
    collision_scale: multiplies nu, for its own uncertainty.  Raises nothing.
    """
    parallel_K = start_K if start_parallel_K is None else start_parallel_K
    wrong = _wrong(start_K, parallel_K, bore_K, magnetic_field_T, density_per_m3, mass_kg)
    wrong += negative(ONE, heating_K_per_s=heating_K_per_s, duration_s=duration_s)
    wrong += unusable(ONE, charge_e=abs(charge_e), collision_scale=collision_scale)
    if goal_K is not None:
        wrong += unusable(ONE, goal_K=goal_K)
    if wrong:
        return _nothing(ONE, wrong)
    matter = {"magnetic_field_T": magnetic_field_T, "mass_kg": mass_kg, "charge_e": charge_e}
    rate = collisions.anisotropy_rate_of(density_per_m3=density_per_m3 * collision_scale, **matter)
    balance = Balance(
        rate,
        radiation.radiation_rate_per_s(**matter),
        bore_K,
        heating_K_per_s,
        parallel_share,
    )
    plan = _Plan(
        balance,
        mean_K(start_K, parallel_K),
        duration_s,
        -math.inf if goal_K is None else goal_K,
        collisions.temperature_at_magnetisation_K(collisions.MAGNETISATION_MAX, **matter),
        collisions.temperature_at_magnetisation_K(collisions.TABLE_MAX, **matter),
        collisions.stalling_K(
            rate_per_s=balance.radiation_per_s / 1.5,
            density_per_m3=density_per_m3 * collision_scale,
            **matter,
        ),
    )
    alone = _one_temperature(plan) if parallel_K == start_K else None
    return alone or _two_temperatures(plan, start_K, parallel_K)


@dataclass(frozen=True, slots=True)
class _Plan:
    """One cooling problem, with the temperatures at which the models end; K and s."""

    balance: Balance
    start_K: float
    duration_s: float
    goal_K: float
    coldest_K: float
    extrapolated_K: float
    stalls_K: float

    @property
    def time_constant_s(self) -> float:
        return 1.5 / self.balance.radiation_per_s

    @property
    def never_K(self) -> float:
        """The goal when it is not above the floor and not reached already; else NaN."""
        unreachable = self.start_K > self.goal_K and -math.inf < self.goal_K <= self.balance.floor_K
        return self.goal_K if unreachable else math.nan


def _ended(plan: _Plan, found: Cooled) -> tuple[Outside, ...]:
    """Why the path of two temperatures ended before the time in question."""
    if found.complaint:
        return (Outside(TWO, "work of the solver", WORK_MAX, WORK_MAX, "evaluations"),)
    if math.isnan(found.left_s):
        return ()
    limit = collisions.MAGNETISATION_MAX
    heading_for = limit * (plan.coldest_K / plan.balance.floor_K) ** 1.5
    return (Outside(TWO, "magnetisation kbar on the way to the floor", heading_for, limit),)


def _one_temperature(plan: _Plan) -> Cooling | None:
    """The closed form, or None where collisions do not keep one temperature over the path."""
    balance, tau_s = plan.balance, plan.time_constant_s
    end_K = radiation.isotropic_K(
        start_K=plan.start_K,
        floor_K=balance.floor_K,
        time_constant_s=tau_s,
        after_s=plan.duration_s,
    )
    goal_s = math.nan
    if plan.goal_K > -math.inf:
        goal_s = radiation.isotropic_time_s(
            start_K=plan.start_K,
            goal_K=plan.goal_K,
            floor_K=balance.floor_K,
            time_constant_s=tau_s,
        )
    ends_K = [plan.start_K, end_K]
    if math.isfinite(goal_s) and goal_s > plan.duration_s:
        ends_K.append(plan.goal_K)
    if min(ends_K) < plan.coldest_K or not balance.isotropic(*ends_K):
        return None
    return Cooling(
        ONE,
        end_K,
        end_K,
        end_K,
        balance.floor_K,
        plan.never_K,
        goal_s,
        goal_s,
        math.inf,
        plan.stalls_K,
        math.nan,
        min(ends_K) < plan.extrapolated_K,
        (),
        (),
    )


def _two_temperatures(plan: _Plan, perpendicular_K: float, parallel_K: float) -> Cooling:
    balance = plan.balance
    searched_s = plan.duration_s + SEARCH_TIME_CONSTANTS * plan.time_constant_s
    found = cool_both(
        balance,
        perpendicular_K=perpendicular_K,
        parallel_K=parallel_K,
        duration_s=plan.duration_s,
        search_s=searched_s if math.isnan(plan.never_K) else 0.0,
        goal_K=plan.goal_K,
        coldest_K=plan.coldest_K,
        stalled_K=plan.stalls_K,
    )
    across_K, along_K = found.at(plan.duration_s)
    outside = _ended(plan, found) if math.isnan(across_K) else ()
    times_s = [found.goal_s, found.both_s]
    goal_outside: tuple[Outside, ...] = ()
    if plan.goal_K > -math.inf and math.isnan(found.both_s):
        goal_outside = _ended(plan, found) if math.isnan(plan.never_K) else ()
        blank = math.nan if goal_outside else math.inf
        times_s = [blank if math.isnan(item) else item for item in times_s]
    stalls_s = found.stalls_s if found.stalls_s <= plan.duration_s else math.nan
    coldest_K = mean_K(float(found.perpendicular_K[-1]), float(found.parallel_K[-1]))
    return Cooling(
        TWO,
        mean_K(across_K, along_K),
        across_K,
        along_K,
        balance.floor_K,
        plan.never_K,
        times_s[0],
        times_s[1],
        searched_s,
        plan.stalls_K,
        stalls_s,
        coldest_K < plan.extrapolated_K,
        outside,
        goal_outside,
    )


def _wrong(
    start_K: float,
    parallel_K: float,
    bore_K: float,
    magnetic_field_T: float,
    density_per_m3: float,
    mass_kg: float,
) -> tuple[Outside, ...]:
    wrong = unusable(
        ONE,
        start_K=start_K,
        start_parallel_K=parallel_K,
        bore_K=bore_K,
        magnetic_field_T=magnetic_field_T,
        density_per_m3=density_per_m3,
        mass_kg=mass_kg,
    )
    if wrong:
        return wrong
    rest_K = mass_kg * LIGHT_SPEED_M_PER_S**2 / BOLTZMANN_J_PER_K
    limit_K = REST_ENERGY_SHARE_MAX * rest_K
    hottest_K = max(start_K, parallel_K)
    if hottest_K > limit_K:
        return (Outside(ONE, "start temperature", hottest_K, limit_K, "K"),)
    return ()


def _nothing(model: str, outside: tuple[Outside, ...]) -> Cooling:
    blank = math.nan
    return Cooling(model, *(blank,) * 10, extrapolated=False, outside=outside, goal_outside=outside)


@dataclass(frozen=True, slots=True)
class CoolingRange:
    """The interval forecast: `best` for the stated values, the figures around it in K and s.

    A time that reaches to infinity is one that may never come; compare floor_K with the goal for
    `never-that-cold`: surely below floor_K.low, possibly below floor_K.high.
    """

    best: Cooling
    temperature_K: Figure
    perpendicular_K: Figure
    parallel_K: Figure
    floor_K: Figure
    goal_s: Figure
    both_s: Figure
    outside: tuple[Outside, ...]
    goal_outside: tuple[Outside, ...]


def cool_range(
    *,
    start_K: Figure,
    bore_K: Figure,
    density_per_m3: Figure,
    heating_K_per_s: Figure,
    **fixed: Any,
) -> CoolingRange:
    """`cool` for intervals of start, bore (K), density (1/m3) and heating (K/s); the rest fixed.

    Temperatures and times rise with start, bore and heating.  With the collision rate the mean and
    parallel ones fall while the perpendicular one rises, so both ends of the rate, widened by its
    own factor, are tried with both ends of the rest.  Takes what `cool` takes.
    """
    thermal = {"start_K": start_K, "bore_K": bore_K, "heating_K_per_s": heating_K_per_s}
    best = cool(
        density_per_m3=density_per_m3.value,
        **{name: item.value for name, item in thermal.items()},
        **fixed,
    )
    factor = RATE_FACTOR if not best.extrapolated else collisions.EXTRAPOLATION_FACTOR
    every = [best]
    for density, scale in ((density_per_m3.high, factor), (density_per_m3.low, 1.0 / factor)):
        for end in ("low", "high"):
            ends = {name: getattr(item, end) for name, item in thermal.items()}
            ends |= {"density_per_m3": density, "collision_scale": scale}
            every.append(cool(**ends, **fixed))
    outside = all_reasons(every)
    blank = NOT_KNOWN if outside else None

    def span(name: str) -> Figure:
        return spanned(getattr(best, name), (getattr(item, name) for item in every))

    return CoolingRange(
        best,
        blank or span("temperature_K"),
        blank or span("perpendicular_K"),
        blank or span("parallel_K"),
        span("floor_K"),
        span("goal_s"),
        span("both_s"),
        outside,
        tuple(dict.fromkeys(reason for item in every for reason in item.goal_outside)),
    )
