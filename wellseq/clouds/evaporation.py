"""A depth that falls, and a cloud → how many stay, and how cold.

    dN/dt = -N/t_ev - gamma N;                     alpha = (eta + kappa_x)/(delta + 3/2) - 1
    dT/dt = -alpha T/t_ev + P;                     eta = U/kT
    1/t_ev = c(eta) nu 3 exp(-eta)/(sqrt2 eta), never above nu
    <r^2> N = const;   n = N/(pi rp^2 L)

nu is that of `collisions`.  U is the *effective* depth: the vacuum depth less the cloud's own space
charge, phi = W (1 + 2 ln(Rw/rp)) with W = e N/(4 pi eps0 L), which changes as particles leave.

Units: eV for depths, K, K/s, T, m, s, kg, 1/m3.  Shapes: scalars; the path (points,).
Valid for eta > 4, |d ln U/dt| < nu/50 and one losing side; otherwise no figure.
Accuracy: 2 % of the stated equations (tests/clouds/test_evaporation.py).  Against the published
case the temperature agrees within a factor 2 and the number within a factor 5: those are the
intervals of the forecast.
Source (from memory): Evaporative cooling of trapped atoms, Adv. At. Mol. Opt. Phys. 37, 181 (1996);
compared with Evaporative cooling of antiprotons to cryogenic temperatures, Phys. Rev. Lett. 105,
013003 (2010).  c(eta): particles with Coulomb drag and diffusion and an absorbing end (derived).
"""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import pairwise, product
from typing import Any

from wellseq.clouds import collisions
from wellseq.clouds.constants import THERMAL_EV_PER_K
from wellseq.clouds.corners import all_reasons, spanned
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.inputs import negative, unusable
from wellseq.clouds.scales import space_charge_scale_V
from wellseq.clouds.stiff import WORK_MAX, Condition, Path, State, solve

MODEL = "evaporation"
ETA_MIN = 4.0
"""Smallest eta of a cloud that still sheds only its tail."""
COLLISIONS_MIN = 50.0
"""nu exceeds |d ln U/dt| at least this many times."""
TEMPERATURE_FACTOR, NUMBER_FACTOR = 2.0, 5.0
"""How far the published case may be from the model; the forecast's intervals."""
C_ETA, C_VALUE = (2.0, 4.0, 6.0, 8.0), (2.4, 2.96, 3.24, 3.49)
"""c(eta), linear between and constant outside."""
KAPPA_X = 1.0
"""Energy in kT that an escaper carries across the field (0.8 to 1.3 measured)."""
DELTA_HARMONIC, DELTA_BOX = 0.5, 0.0
STEPS_MIN = 100
"""So many steps of the solver at least over the path."""


def escape_factor(eta: float) -> float:
    """c(eta), dimensionless."""
    if eta <= C_ETA[0]:
        return C_VALUE[0]
    if eta >= C_ETA[-1]:
        return C_VALUE[-1]
    right = bisect_right(C_ETA, eta)
    share = (eta - C_ETA[right - 1]) / (C_ETA[right] - C_ETA[right - 1])
    return C_VALUE[right - 1] + share * (C_VALUE[right] - C_VALUE[right - 1])


def times_per_collision(eta: float) -> float:
    """(sqrt2/3) eta exp(eta): the literature's t_ev/t_col, dimensionless."""
    return math.sqrt(2.0) / 3.0 * eta * math.exp(eta)


def depth_in_kT(depth_eV: float, temperature_K: float) -> float:
    """eta, dimensionless, for a depth in eV and T in K."""
    return depth_eV / (THERMAL_EV_PER_K * temperature_K)


def share_above(eta: float) -> float:
    """erfc(sqrt(eta)): the share of a cloud whose energy along the axis is above eta kT."""
    return math.erfc(math.sqrt(eta))


def escape_rate_per_s(*, eta: float, collision_rate_per_s: float) -> float:
    """1/t_ev in 1/s for nu in 1/s; never above nu."""
    if eta <= 0.0:
        return collision_rate_per_s
    per_collision = 3.0 * math.exp(-eta) / (math.sqrt(2.0) * eta)
    return min(escape_factor(eta) * per_collision, 1.0) * collision_rate_per_s


def self_potential_eV(*, number: float, radius_m: float, length_m: float, wall_m: float) -> float:
    """W (1 + 2 ln(Rw/rp)) in eV on the axis of a column of single charges; lengths in m."""
    scale_V = space_charge_scale_V(number=number, length_m=length_m)
    return scale_V * (1.0 + 2.0 * math.log(wall_m / radius_m))


@dataclass(frozen=True, slots=True, kw_only=True)
class Evaporating:
    """A cloud and the path of its depth; units in the names.

    path: (time in s from 0, depth in eV) at the corners of the ramp, straight lines between.
    wall_m: the bore's radius when the path is the *vacuum* depth, None when it is the effective
    one.  heating_K_per_s: P; loss_per_s: gamma, other losses.
    """

    number: float
    temperature_K: float
    radius_m: float
    length_m: float
    magnetic_field_T: float
    mass_kg: float
    path: tuple[tuple[float, float], ...]
    wall_m: float | None = None
    heating_K_per_s: float = 0.0
    loss_per_s: float = 0.0
    kappa_x: float = KAPPA_X
    delta: float = DELTA_HARMONIC


@dataclass(frozen=True, slots=True)
class Evaporated:
    """The cloud at the end of the path; NaN where there is no figure.

    number, temperature_K, radius_m, density_per_m3, effective_eV (U), self_eV (its own potential)
    and eta are the model's best values; the figures beside them carry its factors.  left_s: when
    the model was left (NaN: never).  runs_out: U itself fell to nothing before the end.
    """

    number: float
    temperature_K: float
    radius_m: float
    density_per_m3: float
    effective_eV: float
    self_eV: float
    eta: float
    number_range: Figure
    temperature_range_K: Figure
    radius_range_m: Figure
    density_range_per_m3: Figure
    left_s: float
    runs_out: bool
    outside: tuple[Outside, ...]


def evaporate(cloud: Evaporating) -> Evaporated:
    """Let the hottest particles of a cloud go over a lowered side.  Raises nothing."""
    wrong = _wrong(cloud)
    if wrong:
        return _nothing(wrong)
    equations = _Equations(cloud)
    conditions = [
        Condition(equations.depth, ends=True),
        Condition(lambda t, state: equations.eta(t, state) - ETA_MIN, ends=True),
        Condition(equations.patience, ends=True),
        Condition(lambda _, state: _exp(state[1]) - equations.coldest_K, ends=True),
    ]
    pieces = len(cloud.path) - 1
    steps = max(4, STEPS_MIN // pieces)
    start = (math.log(cloud.number), math.log(cloud.temperature_K))
    for number in range(pieces):
        equations.enter(number)
        duration_s = cloud.path[number + 1][0] - cloud.path[number][0]
        found = solve(
            equations.slopes,
            start,
            duration_s,
            conditions=conditions,
            longest_step_s=duration_s / steps,
        )
        if not found.whole:
            return _left(equations, found, number)
        start = (float(found.end[0]), float(found.end[1]))
    return _read(equations, found)


def _exp(logarithm: float) -> float:
    """exp, kept a number where a trial step of the solver overshoots."""
    return math.exp(min(max(logarithm, -80.0), 80.0))


class _Equations:
    """The slopes of (ln N, ln T) on one straight piece of the path, and what ends it."""

    def __init__(self, cloud: Evaporating) -> None:
        self.cloud = cloud
        self.rate_alone = collisions.anisotropy_rate_of(
            density_per_m3=1.0, magnetic_field_T=cloud.magnetic_field_T, mass_kg=cloud.mass_kg
        )
        self.coldest_K = collisions.temperature_at_magnetisation_K(
            collisions.MAGNETISATION_MAX,
            magnetic_field_T=cloud.magnetic_field_T,
            mass_kg=cloud.mass_kg,
        )
        self.spread_m2 = cloud.radius_m**2 * cloud.number
        self.start_s = self.start_eV = self.slope_eV_per_s = 0.0

    def enter(self, piece: int) -> None:
        (self.start_s, self.start_eV), (end_s, end_eV) = self.cloud.path[piece : piece + 2]
        self.slope_eV_per_s = (end_eV - self.start_eV) / (end_s - self.start_s)

    def radius_m(self, number: float) -> float:
        return math.sqrt(self.spread_m2 / number)

    def density_per_m3(self, number: float) -> float:
        return number / (math.pi * self.spread_m2 / number * self.cloud.length_m)

    def self_eV(self, number: float) -> float:
        wall_m = self.cloud.wall_m
        if wall_m is None:
            return 0.0
        return self_potential_eV(
            number=number,
            radius_m=self.radius_m(number),
            length_m=self.cloud.length_m,
            wall_m=wall_m,
        )

    def depth(self, time_s: float, state: State) -> float:
        """The effective depth in eV, a time in s into the piece."""
        return self.start_eV + self.slope_eV_per_s * time_s - self.self_eV(_exp(state[0]))

    def eta(self, time_s: float, state: State) -> float:
        return depth_in_kT(self.depth(time_s, state), _exp(state[1]))

    def collision_rate_per_s(self, state: State) -> float:
        return self.density_per_m3(_exp(state[0])) * self.rate_alone(_exp(state[1]))

    def patience(self, time_s: float, state: State) -> float:
        """nu - 50 |d ln U/dt| in 1/s."""
        limit = COLLISIONS_MIN * self.change_per_s(time_s, state)
        return self.collision_rate_per_s(state) - limit

    def change_per_s(self, time_s: float, state: State) -> float:
        """|d ln U/dt| in 1/s; what leaving particles do to U counts."""
        depth_eV = max(self.depth(time_s, state), 1e-12)
        own_eV_per_s = self._self_slope_eV(state) * self.slopes(time_s, state)[0]
        return abs(self.slope_eV_per_s - own_eV_per_s) / depth_eV

    def _self_slope_eV(self, state: State) -> float:
        """d self_eV/d ln N: the potential grows with N, and with N as the column narrows."""
        if self.cloud.wall_m is None:
            return 0.0
        number = _exp(state[0])
        scale_V = space_charge_scale_V(number=number, length_m=self.cloud.length_m)
        return self.self_eV(number) + scale_V

    def slopes(self, time_s: float, state: State) -> Sequence[float]:
        """(d ln N/dt, d ln T/dt) in 1/s, a time in s into the piece."""
        cloud = self.cloud
        eta = self.eta(time_s, state)
        escape = escape_rate_per_s(eta=eta, collision_rate_per_s=self.collision_rate_per_s(state))
        alpha = (eta + cloud.kappa_x) / (cloud.delta + 1.5) - 1.0
        heated = cloud.heating_K_per_s / _exp(state[1])
        return -escape - cloud.loss_per_s, -alpha * escape + heated


def _read(equations: _Equations, found: Path) -> Evaporated:
    """The cloud at the end of the last piece."""
    cloud = equations.cloud
    number, temperature_K = math.exp(found.end[0]), math.exp(found.end[1])
    most = min(number * NUMBER_FACTOR, cloud.number)
    least = number / NUMBER_FACTOR
    # Nothing here heats a cloud beyond what its heating alone would do.
    heated_K = cloud.temperature_K + cloud.heating_K_per_s * cloud.path[-1][0]
    hottest_K = max(temperature_K, min(temperature_K * TEMPERATURE_FACTOR, heated_K))
    radius_m, density = equations.radius_m(number), equations.density_per_m3(number)
    if cloud.wall_m is not None and not radius_m < cloud.wall_m:
        return _nothing((Outside(MODEL, "radius", radius_m, cloud.wall_m, "m", "below"),))
    return Evaporated(
        number,
        temperature_K,
        radius_m,
        density,
        equations.depth(float(found.times_s[-1]), found.end),
        self_potential_eV(
            number=number, radius_m=radius_m, length_m=cloud.length_m, wall_m=cloud.wall_m
        )
        if cloud.wall_m is not None
        else math.nan,
        equations.eta(float(found.times_s[-1]), found.end),
        Figure(number, least, most),
        Figure(temperature_K, temperature_K / TEMPERATURE_FACTOR, hottest_K),
        Figure(radius_m, equations.radius_m(most), equations.radius_m(least)),
        Figure(density, equations.density_per_m3(least), equations.density_per_m3(most)),
        math.nan,
        False,
        (),
    )


def _left(equations: _Equations, found: Path, piece: int) -> Evaporated:
    """No figure: which limit ended the path, and how far beyond it the rest of the path lies."""
    if found.complaint:
        return _nothing((Outside(MODEL, "work of the solver", WORK_MAX, WORK_MAX, "evaluations"),))
    at_s, state, path = float(found.times_s[-1]), found.end, equations.cloud.path
    left_s = equations.start_s + at_s
    own_eV = equations.self_eV(math.exp(state[0]))
    rest_eV = [equations.depth(at_s, state), *(end - own_eV for _, end in path[piece + 1 :])]
    if found.ended_by == 3:
        kbar = collisions.magnetisation(
            temperature_K=_exp(state[1]),
            magnetic_field_T=equations.cloud.magnetic_field_T,
            mass_kg=equations.cloud.mass_kg,
        )
        reason = Outside(MODEL, "magnetisation kbar", kbar, collisions.MAGNETISATION_MAX)
    elif found.ended_by == 2:
        now = equations.change_per_s(at_s, state) / equations.collision_rate_per_s(state)
        # The same slope at the depth where this piece ends: how far beyond the limit it goes.
        change = now * max(rest_eV[0] / rest_eV[1], 1.0) if rest_eV[1] > 0.0 else math.inf
        reason = Outside(MODEL, "change of the depth per collision", change, 1.0 / COLLISIONS_MIN)
    else:
        eta = depth_in_kT(min(rest_eV), math.exp(state[1]))
        reason = Outside(MODEL, "eta, effective depth over kT", eta, ETA_MIN, "", "at least")
    return _nothing((reason,), left_s, rest_eV[-1] <= 0.0)


def _wrong(cloud: Evaporating) -> tuple[Outside, ...]:
    wrong = unusable(
        MODEL,
        number=cloud.number,
        temperature_K=cloud.temperature_K,
        radius_m=cloud.radius_m,
        length_m=cloud.length_m,
        magnetic_field_T=cloud.magnetic_field_T,
        mass_kg=cloud.mass_kg,
        delta=cloud.delta + 1.0,
    )
    wrong += negative(
        MODEL,
        heating_K_per_s=cloud.heating_K_per_s,
        loss_per_s=cloud.loss_per_s,
        kappa_x=cloud.kappa_x,
    )
    times = [time for time, _ in cloud.path]
    durations = [later - sooner for sooner, later in pairwise(times)]
    wrong += unusable(MODEL, duration_s=min(durations, default=0.0))
    # A sum is finite only where every one of its terms is.
    wrong += unusable(MODEL, depth_eV=_least_or_nan([depth for _, depth in cloud.path]))
    if cloud.wall_m is not None and not cloud.radius_m < cloud.wall_m:
        wrong += (Outside(MODEL, "radius", cloud.radius_m, cloud.wall_m, "m", "below"),)
    return wrong


def _least_or_nan(values: Sequence[float]) -> float:
    return min(values) if values and math.isfinite(sum(values)) else math.nan


def _nothing(
    outside: tuple[Outside, ...], left_s: float = math.nan, runs_out: bool = False
) -> Evaporated:
    blank = math.nan
    figures = (NOT_KNOWN,) * 4
    return Evaporated(
        *(blank, blank, blank, blank, blank, blank, blank), *figures, left_s, runs_out, outside
    )


def evaporate_range(cloud: Evaporating, **spread: Figure) -> Evaporated:
    """`evaporate` for intervals of the cloud's fields: every corner of them is tried.

    The answer is not monotone in number and temperature (a larger cloud has a lower effective
    depth), so 2^n + 1 solves for n intervals; the figures span them all, with the model's factors.
    """
    middle: dict[str, Any] = {name: item.value for name, item in spread.items()}
    best = evaporate(replace(cloud, **middle))
    ends = [((name, item.low), (name, item.high)) for name, item in spread.items()]
    corners: list[dict[str, Any]] = [dict(corner) for corner in product(*ends)]
    every = [best, *(evaporate(replace(cloud, **corner)) for corner in corners)]
    outside = all_reasons(every)

    def span(name: str) -> Figure:
        figures: list[Figure] = [getattr(item, name) for item in every]
        if outside:
            return NOT_KNOWN
        return spanned(figures[0].value, (end for item in figures for end in (item.low, item.high)))

    return replace(
        best,
        number_range=span("number_range"),
        temperature_range_K=span("temperature_range_K"),
        radius_range_m=span("radius_range_m"),
        density_range_per_m3=span("density_range_per_m3"),
        outside=outside,
    )
