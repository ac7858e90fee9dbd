"""A heavy cloud in a coolant that radiates → both temperatures, and whether the coolant boils out.

    dT_h/dt = -f nu (T_h - T_e)
    dT_e/dt = (N_h/N_e) f nu (T_h - T_e) - (T_e - T_bore)/tau_T + H

nu is `collisions.species_rate_per_s`, f the overlap of the two clouds (1 unless given).

Units: K, K/s, 1/m3, T, s, m, kg, rad/s; depths in eV, charges in elementary charges.  Shapes:
scalars in; times (goals,).
Valid without a figure beyond: the coolant's peak kT_e under a tenth of its depth (it leaks above),
the heavy cloud's mean energy under 1 keV (above, radial overlap sets the first phase), and
(m_h - m_e) w_r^2 rp^2/(2 k T_h) under 0.5 (above, the heavy species is spun to the edge) unless the
overlap of the two-species equilibrium is given.  Coolant above kbar = 1, or an overlap that is
needed: nu is uncertain by a factor 3, and that is the interval.
Accuracy: 1 % of the stated equations (tests/clouds/test_sympathetic.py).
Source (from memory): Cooling antiprotons in an ion trap, Hyperfine Interact. 44, 233 (1989);
Centrifugal separation of a multispecies pure ion plasma, Phys. Fluids 24, 1447 (1981).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from wellseq.clouds import collisions, radiation
from wellseq.clouds.constants import THERMAL_EV_PER_K
from wellseq.clouds.corners import all_reasons, spanned
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.inputs import negative, unusable
from wellseq.clouds.scales import separation_exponent
from wellseq.clouds.stiff import WORK_MAX, Condition, Path, State, solve

MODEL = "sympathetic cooling"
LEAK_SHARE = 0.1
"""The coolant leaks when its kT exceeds this share of its depth."""
HEAVY_ENERGY_EV_MAX = 1000.0
"""Largest mean energy 1.5 kT_h of the heavy cloud at the start."""
SEPARATION_MAX = 0.5
"""Largest centrifugal exponent of well mixed clouds."""
RATE_FACTOR = 3.0
"""nu is uncertain by this where the coolant is magnetised or the clouds separate."""
SEARCH_TIME_CONSTANTS = 100.0
"""So many tau_T after the end of a step the goals are still looked for."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Mixture:
    """Two clouds in one place: what `cool_with` needs; units in the names, charges in e with sign.

    coolant_depth_eV: what holds the coolant, its own space charge taken off.  rotation_rad_per_s
    and radius_m: of the coolant.  overlap: T_h in K → the share of the coolant's density that the
    heavy cloud meets, from the two-species equilibrium; None where the clouds are taken as mixed.
    """

    heavy_number: float
    heavy_K: float
    heavy_mass_kg: float
    coolant_number: float
    coolant_density_per_m3: float
    coolant_K: float
    coolant_mass_kg: float
    magnetic_field_T: float
    bore_K: float
    coolant_depth_eV: float
    rotation_rad_per_s: float
    radius_m: float
    heating_K_per_s: float = 0.0
    heavy_charge_e: float = 1.0
    coolant_charge_e: float = 1.0
    overlap: Callable[[float], float] | None = None


@dataclass(frozen=True, slots=True)
class Sympathetic:
    """What the coolant does: K and s, NaN where there is no figure.

    heavy_K, coolant_K: at the end of the step.  peak_K, peak_s: the hottest the coolant becomes,
    and when.  goals_s: when T_h falls to each goal; infinity for not within searched_s or never.
    floor_K: neither gets colder.  widened: nu carried its factor 3 somewhere on the path, as it
    does with a coolant below widened_K.  leaks_s: when the coolant's kT exceeds a tenth of its
    depth, NaN when it does not.  outside: why the end is not known; goal_outside: why a goal is
    not.
    """

    heavy_K: float
    coolant_K: float
    peak_K: float
    peak_s: float
    goals_s: tuple[float, ...]
    searched_s: float
    floor_K: float
    widened_K: float
    widened: bool
    leaks_s: float
    outside: tuple[Outside, ...]
    goal_outside: tuple[Outside, ...]


def cool_with(
    mixture: Mixture, *, duration_s: float, goals_K: Sequence[float] = (), rate_scale: float = 1.0
) -> Sympathetic:
    """The heavy cloud over `duration_s` s with its coolant; goals in K.

    rate_scale: multiplies nu where nu carries its factor 3 (and nowhere else).  Raises nothing.
    """
    goals = tuple(goals_K)
    wrong = _wrong(mixture, duration_s, goals, rate_scale)
    if wrong:
        return _nothing(wrong, len(goals))
    equations = _Equations(mixture, rate_scale)
    watched = [
        Condition(lambda _, state: equations.leak_K - float(state[1])),
        Condition(lambda _, state: float(state[0]) - equations.mixed_K, ends=True),
        Condition(lambda t, state: equations.slopes(t, state)[1]),
        *(Condition(_above(goal)) for goal in goals),
    ]
    start = (mixture.heavy_K, mixture.coolant_K)
    first = solve(equations.slopes, start, duration_s, conditions=watched)
    paths = [first]
    search_s = SEARCH_TIME_CONSTANTS * equations.time_constant_s
    missed = [
        number
        for number, goal in enumerate(goals)
        if math.isnan(first.crossings_s[3 + number]) and goal > equations.floor_K
    ]
    if first.whole and missed and math.isnan(first.crossings_s[0]):
        last = 3 + min(missed, key=lambda number: goals[number])
        watched[last] = Condition(watched[last].value, ends=True)
        paths.append(solve(equations.slopes, first.end.tolist(), search_s, conditions=watched))
    return _read(equations, paths, duration_s, search_s, goals)


def _above(goal_K: float) -> Callable[[float, State], float]:
    return lambda _, state: float(state[0]) - goal_K


class _Equations:
    """The two slopes of one mixture, with the temperatures at which the model ends."""

    def __init__(self, mixture: Mixture, rate_scale: float) -> None:
        self.mixture = mixture
        self.scale_log = math.log(rate_scale)
        matter = {
            "magnetic_field_T": mixture.magnetic_field_T,
            "mass_kg": mixture.coolant_mass_kg,
            "charge_e": mixture.coolant_charge_e,
        }
        self.time_constant_s = radiation.time_constant_s(**matter)
        self.floor_K = radiation.floor_K(
            bore_K=mixture.bore_K,
            heating_K_per_s=mixture.heating_K_per_s,
            time_constant_s=self.time_constant_s,
        )
        self.magnetised_K = collisions.temperature_at_magnetisation_K(1.0, **matter)
        self.leak_K = LEAK_SHARE * mixture.coolant_depth_eV / THERMAL_EV_PER_K
        self.separation_K = self.separation(1.0) / SEPARATION_MAX
        self.mixed_K = self.separation_K if mixture.overlap is None else 0.0
        self.charges_e2 = abs(mixture.heavy_charge_e * mixture.coolant_charge_e)
        self.numbers = mixture.heavy_number / mixture.coolant_number

    def separation(self, heavy_K: float) -> float:
        mixture = self.mixture
        return separation_exponent(
            temperature_K=heavy_K,
            rotation_rad_per_s=mixture.rotation_rad_per_s,
            radius_m=mixture.radius_m,
            light_kg=mixture.coolant_mass_kg,
            heavy_kg=mixture.heavy_mass_kg,
        )

    def widened(self, heavy_K: float, coolant_K: float) -> float:
        """0 where nu is as sure as its formula, 1 where it carries its factor; no jump between."""
        magnetised = math.pow(self.magnetised_K / coolant_K, 1.5)
        separated = self.separation_K / heavy_K if self.mixture.overlap else 0.0
        return min(max(10.0 * (max(magnetised, separated) - 0.9), 0.0), 1.0)

    def slopes(self, time_s: float, state: State) -> Sequence[float]:
        # A trial step of the solver may overshoot zero; the rate must stay a number there.
        heavy_K, coolant_K = max(float(state[0]), 1e-6), max(float(state[1]), 1e-6)
        mixture = self.mixture
        rate = collisions.species_rate_per_s(
            light_density_per_m3=mixture.coolant_density_per_m3,
            light_K=coolant_K,
            heavy_K=heavy_K,
            light_mass_kg=mixture.coolant_mass_kg,
            heavy_mass_kg=mixture.heavy_mass_kg,
            charges_e2=self.charges_e2,
        )
        if mixture.overlap is not None:
            rate *= mixture.overlap(heavy_K)
        if self.scale_log:
            rate *= math.exp(self.scale_log * self.widened(heavy_K, coolant_K))
        flow = rate * (heavy_K - coolant_K)
        radiated = (float(state[1]) - mixture.bore_K) / self.time_constant_s
        return -flow, self.numbers * flow - radiated + mixture.heating_K_per_s


def _read(
    equations: _Equations,
    paths: list[Path],
    duration_s: float,
    search_s: float,
    goals_K: tuple[float, ...],
) -> Sympathetic:
    first = paths[0]
    reasons = _ended(equations, first)
    searched = reasons if len(paths) == 1 else reasons + _ended(equations, paths[1])
    leaks_s, goals_s = first.crossings_s[0], list(first.crossings_s[3:])
    if len(paths) > 1:
        for number, later_s in enumerate(paths[1].crossings_s[3:]):
            if math.isnan(goals_s[number]):
                goals_s[number] = duration_s + later_s
    unfound = False
    for number, goal in enumerate(goals_K):
        known = goals_s[number] <= leaks_s if math.isfinite(leaks_s) else goals_s[number] >= 0.0
        if not known:
            beyond = goal <= equations.floor_K or not searched
            goals_s[number] = math.inf if beyond else math.nan
            unfound = unfound or not beyond
    peak = int(first.states[1].argmax())
    widened = any(
        equations.widened(float(heavy), float(light)) > 0.0
        for path in paths
        for heavy, light in path.states.T
    )
    blank = math.nan if reasons else 0.0
    return Sympathetic(
        float(first.end[0]) + blank,
        float(first.end[1]) + blank,
        math.nan if math.isfinite(leaks_s) else float(first.states[1, peak]),
        float(first.times_s[peak]),
        tuple(goals_s),
        duration_s + search_s,
        equations.floor_K,
        equations.magnetised_K,
        widened,
        leaks_s,
        reasons,
        searched if unfound else (),
    )


def _ended(equations: _Equations, path: Path) -> tuple[Outside, ...]:
    """Why there is no figure at the end of a path."""
    if path.complaint:
        return (Outside(MODEL, "work of the solver", WORK_MAX, WORK_MAX, "evaluations"),)
    outside: tuple[Outside, ...] = ()
    if math.isfinite(path.crossings_s[0]):
        hottest_eV = THERMAL_EV_PER_K * float(path.states[1].max())
        limit_eV = THERMAL_EV_PER_K * equations.leak_K
        outside += (Outside(MODEL, "kT of the coolant", hottest_eV, limit_eV, "eV"),)
    if path.ended_by == 1:
        exponent = equations.separation(equations.floor_K)
        quantity = "centrifugal exponent on the way to the floor"
        outside += (Outside(MODEL, quantity, exponent, SEPARATION_MAX),)
    return outside


def _wrong(
    mixture: Mixture, duration_s: float, goals_K: tuple[float, ...], rate_scale: float
) -> tuple[Outside, ...]:
    given = {
        name: getattr(mixture, name)
        for name in Mixture.__dataclass_fields__
        if name not in ("heating_K_per_s", "rotation_rad_per_s", "overlap")
    }
    charges_e2 = given.pop("heavy_charge_e") * given.pop("coolant_charge_e")
    goals = {f"goal_{number}_K": goal for number, goal in enumerate(goals_K, 1)}
    wrong = unusable(MODEL, **given, **goals, rate_scale=rate_scale)
    # Opposite charges do not share a well at all.
    wrong += unusable(MODEL, product_of_the_charges=charges_e2)
    wrong += negative(
        MODEL,
        heating_K_per_s=mixture.heating_K_per_s,
        rotation_rad_per_s=abs(mixture.rotation_rad_per_s),
        duration_s=duration_s,
    )
    energy_eV = 1.5 * THERMAL_EV_PER_K * mixture.heavy_K
    if energy_eV > HEAVY_ENERGY_EV_MAX:
        quantity = "mean energy of the heavy cloud"
        wrong += (Outside(MODEL, quantity, energy_eV, HEAVY_ENERGY_EV_MAX, "eV"),)
    return wrong


def _nothing(outside: tuple[Outside, ...], goals: int) -> Sympathetic:
    blank = math.nan
    nowhere = (blank,) * goals
    return Sympathetic(
        blank, blank, blank, blank, nowhere, blank, blank, blank, False, blank, outside, outside
    )


@dataclass(frozen=True, slots=True)
class SympatheticRange:
    """The interval forecast: `best` for the stated values, the figures around it in K and s."""

    best: Sympathetic
    heavy_K: Figure
    coolant_K: Figure
    peak_K: Figure
    goals_s: tuple[Figure, ...]
    outside: tuple[Outside, ...]
    goal_outside: tuple[Outside, ...]


def cool_with_range(
    mixture: Mixture,
    *,
    duration_s: float,
    goals_K: Sequence[float] = (),
    **spread: Figure,
) -> SympatheticRange:
    """`cool_with` for intervals (`spread`: fields of the mixture → figures); s and K.

    Times and T_h rise with the heavy number and temperature, the coolant's, the bore's and the
    heating; they fall with the coolant's number and with its density, that is with nu.  T_e rises
    with nu first and falls with it later, so both ends of nu (where it carries its factor, times
    that) are tried with both ends of the rest.  Validity is tried at its worst end throughout.
    """
    best = cool_with(_at(mixture, spread, {}), duration_s=duration_s, goals_K=goals_K)
    every = [best]
    for dense, scale in (("high", RATE_FACTOR), ("low", 1.0 / RATE_FACTOR)):
        for warm, cold in (("low", "high"), ("high", "low")):
            ends = dict.fromkeys(spread, warm) | {"coolant_number": cold} | _WORST
            corner = _at(mixture, spread, ends | {"coolant_density_per_m3": dense})
            every.append(
                cool_with(corner, duration_s=duration_s, goals_K=goals_K, rate_scale=scale)
            )
    outside = all_reasons(every)
    blank = NOT_KNOWN if outside else None

    def span(name: str) -> Figure:
        return spanned(getattr(best, name), (getattr(item, name) for item in every))

    goals = range(len(goals_K))
    return SympatheticRange(
        best,
        blank or span("heavy_K"),
        blank or span("coolant_K"),
        blank or span("peak_K"),
        tuple(spanned(best.goals_s[n], (item.goals_s[n] for item in every)) for n in goals),
        outside,
        tuple(dict.fromkeys(reason for item in every for reason in item.goal_outside)),
    )


_WORST = {"radius_m": "high", "rotation_rad_per_s": "high", "coolant_depth_eV": "low"}


def _at(mixture: Mixture, spread: Mapping[str, Figure], ends: Mapping[str, str]) -> Mixture:
    values: dict[str, Any] = {
        name: getattr(figure, ends.get(name, "value")) for name, figure in spread.items()
    }
    return replace(mixture, **values)
