"""A changing well → whether the change is slow, and what it does to energy, temperature and length.

    eps      = max |d ln w/dt|/w                       how fast the frequency changes
    eps_move = max(|z_w''|/(w^2 L), |dv|/(w L))         how hard the well is moved (dv: jumps)
    w        = min(vacuum frequency, pi v_th/L)        v_th = sqrt(kT/m); a plasma is slower

Slow changes conserve the action J.  With L = sqrt(12) z_rms at the temperature in question,

    T_par L^2 = const       without collisions (harmonic: T_par ~ w; box: T_par ~ L^-2)
    T L^(2/3) = const       with equipartition (harmonic: T ~ w^(1/2); flattened: T ~ L^(-2/3))

one law each for every shape that stays similar: T^(3/2) L is the entropy of a column.

Units: s, rad/s, m, K, kg, m/s; energies in eV.  Shapes: samples of a stretch (samples,).
Accuracy: eps 1 % with 33 samples; the mean energy follows the action within 0.15 eps
(measured by direct simulation in tests/clouds/test_adiabatic.py).
Source: adiabatic invariants, Mechanics (Course of Theoretical Physics vol. 1), 3rd ed., sec. 49-50
(from memory); the two laws in L (derived).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from wellseq.clouds.action import Profile, bounces, energies_at
from wellseq.clouds.constants import BOLTZMANN_J_PER_K, ELEMENTARY_CHARGE_C
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.inputs import unusable
from wellseq.clouds.scales import thermal_bounce_Hz

Array = NDArray[np.float64]
MODEL = "adiabatic ramp"
SLOWNESS_MAX = 0.3
"""Largest eps, and eps_move, of a ramp that still conserves the action."""
SHARED_MIN, FREE_MAX = 10.0, 0.1
"""nu times the duration: above, collisions share the energy; below, they do nothing."""
ENERGY_MARGIN = 0.15
"""Relative uncertainty of the energy after a ramp, in units of eps."""
SAMPLES_MIN = 5
COLUMN = math.sqrt(12.0)
"""L/z_rms of a uniform column: what length means throughout."""


@dataclass(frozen=True, slots=True, eq=False)
class Stretch:
    """A smooth piece of a ramp: times in s rising, frequency in rad/s, place of the well in m."""

    times_s: Array
    frequency_rad_per_s: Array
    place_m: Array


@dataclass(frozen=True, slots=True)
class Slowness:
    """eps and eps_move, dimensionless, when each is largest (s), and the speed of a kick (m/s).

    kick_m_per_s bounds the speed at which the cloud sloshes afterwards: all jumps of speed added
    up, and the acceleration's start and stop.
    """

    eps: float
    eps_s: float
    eps_move: float
    eps_move_s: float
    kick_m_per_s: float


def plasma_frequency_cap_rad_per_s(
    *, vacuum_rad_per_s: float, temperature_K: float, length_m: float, mass_kg: float
) -> float:
    """min(vacuum w, pi v_th/L) in rad/s at T in K, for L in m, mass in kg."""
    thermal_Hz = thermal_bounce_Hz(temperature_K=temperature_K, length_m=length_m, mass_kg=mass_kg)
    return min(vacuum_rad_per_s, 2.0 * math.pi * thermal_Hz)


def slowness(stretches: Sequence[Stretch], length_m: float) -> Slowness:
    """How slow a ramp made of smooth stretches is, for a cloud of that length in m.

    The well rests before the first stretch and after the last.  Raises ValueError for a stretch of
    fewer than 5 samples, times that do not rise, or a frequency or length that is not positive.
    """
    if not length_m > 0.0:
        raise ValueError("a cloud's length is above 0 m")
    from scipy.interpolate import CubicSpline

    eps = eps_move = (0.0, math.nan)
    speed, jumps, steadiest = 0.0, 0.0, 0.0
    for stretch in stretches:
        times, frequency = stretch.times_s, stretch.frequency_rad_per_s
        _refuse(stretch)
        change = np.abs(CubicSpline(times, np.log(frequency))(times, 1)) / frequency
        eps = max(eps, _largest(change, times), key=_first)
        place = CubicSpline(times, stretch.place_m)
        accelerated = np.abs(place(times, 2))
        eps_move = max(eps_move, _largest(accelerated / frequency**2 / length_m, times), key=_first)
        steadiest = max(steadiest, float((accelerated / frequency).max()))
        jump = abs(float(place(times[0], 1)) - speed)
        eps_move = max(eps_move, (jump / frequency[0] / length_m, times[0]), key=_first)
        jumps += jump
        speed = float(place(times[-1], 1))
    if stretches:
        last = stretches[-1]
        stop = abs(speed) / last.frequency_rad_per_s[-1] / length_m
        eps_move = max(eps_move, (stop, last.times_s[-1]), key=_first)
    kick = jumps + abs(speed) + 2.0 * steadiest
    return Slowness(*(float(item) for item in (*eps, *eps_move, kick)))


def _first(pair: tuple[float, float]) -> float:
    return pair[0]


def _largest(values: Array, times: Array) -> tuple[float, float]:
    at = int(values.argmax())
    return float(values[at]), float(times[at])


def _refuse(stretch: Stretch) -> None:
    times, frequency = stretch.times_s, stretch.frequency_rad_per_s
    if len(times) < SAMPLES_MIN or not (np.diff(times) > 0.0).all():
        raise ValueError(f"a stretch has at least {SAMPLES_MIN} samples at times that rise")
    if not (frequency > 0.0).all():
        raise ValueError("a stretch's frequency is above 0 rad/s")


@dataclass(frozen=True, slots=True, eq=False)
class Followed:
    """A particle of conserved action: its energy in eV above each profile's bottom; (profiles,).

    lost_at: number of the first profile that does not hold it (`well-lost`), -1 when all do.
    divided_at: the first in which it runs below a barrier between two minima (`well-splits`), or
    -1.  From either on there is no energy (NaN).
    """

    action_Js: float
    energies_eV: Array
    lost_at: int
    divided_at: int


def follow(profiles: Sequence[Profile], energy_eV: float) -> Followed:
    """The particle that starts at an energy in eV above the first profile's bottom."""
    action_Js = float(bounces(profiles[0], energy_eV).action_Js[0])
    energies = np.full(len(profiles), math.nan)
    for number, well in enumerate(profiles):
        energy = float(energies_at(well, action_Js)[0])
        if math.isnan(energy):
            return Followed(action_Js, energies, number, -1)
        if energy <= well.inner_eV:
            return Followed(action_Js, energies, -1, number)
        energies[number] = energy
    return Followed(action_Js, energies, -1, -1)


def harmonic_length_m(*, temperature_K: float, frequency_rad_per_s: float, mass_kg: float) -> float:
    """sqrt(12) z_rms in m of a cloud without space charge: sqrt(12 kT/m)/w; K, rad/s, kg."""
    speed_m_per_s = math.sqrt(BOLTZMANN_J_PER_K * temperature_K / mass_kg)
    return COLUMN * speed_m_per_s / frequency_rad_per_s


@dataclass(frozen=True, slots=True)
class Ramped:
    """A cloud after a ramp: temperatures in K, length in m, with intervals.

    law: "free" (no collisions), "shared" (equipartition) or "between" (both, as the interval).
    """

    law: str
    temperature_K: Figure
    perpendicular_K: Figure
    parallel_K: Figure
    length_m: Figure
    outside: tuple[Outside, ...]


def after_ramp(
    *,
    perpendicular_K: float,
    parallel_K: float,
    length_m: float,
    length_after_m: Callable[[float], float] | float,
    exchanges: Figure,
    slow: Slowness,
    mass_kg: float,
) -> Ramped:
    """The cloud after a ramp, from its temperatures in K and length in m before.

    length_after_m: the length in the new well, in m, or as a function of T in K that rises with it
    and is cheap (60 calls).  exchanges: nu times the duration, least and greatest along the ramp.
    mass_kg: of the particles, in kg.  Raises nothing.
    """
    wrong = unusable(
        MODEL,
        perpendicular_K=perpendicular_K,
        parallel_K=parallel_K,
        length_m=length_m,
        mass_kg=mass_kg,
    )
    for quantity, value in (("eps", slow.eps), ("eps_move", slow.eps_move)):
        if not value <= SLOWNESS_MAX:
            wrong += (Outside(MODEL, quantity, value, SLOWNESS_MAX),)
    if not exchanges.known:
        wrong += (Outside(MODEL, "collisions during the ramp", exchanges.value, 0.0, "", "above"),)
    if wrong:
        return Ramped("", NOT_KNOWN, NOT_KNOWN, NOT_KNOWN, NOT_KNOWN, wrong)
    after = length_after_m if callable(length_after_m) else _always(length_after_m)
    start_K = (2.0 * perpendicular_K + parallel_K) / 3.0
    shared = _conserving(start_K, length_m, after, 2.0 / 3.0)
    free = _conserving(parallel_K, length_m, after, 2.0)
    kick_K = 0.5 * mass_kg * slow.kick_m_per_s**2 / BOLTZMANN_J_PER_K
    ends = []
    if exchanges.high >= FREE_MAX:
        ends.append((shared, shared, shared, 2.0 / 3.0 * kick_K))
    if exchanges.low <= SHARED_MIN:
        ends.append(((2.0 * perpendicular_K + free) / 3.0, perpendicular_K, free, kick_K))
    law = "between" if len(ends) == 2 else "shared" if exchanges.low > SHARED_MIN else "free"
    margin = ENERGY_MARGIN * slow.eps
    heated = max(item[3] for item in ends)
    spans = [_span([item[n] for item in ends], margin, heated) for n in range(3)]
    lengths = sorted(after(value) for value in (spans[2].low, spans[2].value, spans[2].high))
    length = Figure(lengths[1], lengths[0], lengths[2])
    return Ramped(law, spans[0], spans[1], spans[2], length, ())


def _span(values: list[float], margin: float, heated_K: float) -> Figure:
    best = sum(values) / len(values)
    low = min(values) * (1.0 - margin)
    return Figure(best, low, max(values) * (1.0 + margin) + heated_K)


def _always(value: float) -> Callable[[float], float]:
    return lambda _: value


def _conserving(
    start_K: float, length_m: float, after: Callable[[float], float], power: float
) -> float:
    """The T in K at which T L(T)^power is what it was; L rises with T, so bisection finds it."""
    wanted = math.log(start_K) + power * math.log(length_m)
    low, high = math.log(start_K) - 25.0, math.log(start_K) + 25.0
    for _ in range(60):
        middle = 0.5 * (low + high)
        if middle + power * math.log(after(math.exp(middle))) < wanted:
            low = middle
        else:
            high = middle
    return math.exp(0.5 * (low + high))


def slosh_eV(mass_kg: float, kick_m_per_s: float) -> float:
    """m v^2/2 in eV per particle of a cloud that sloshes at v in m/s; mass in kg."""
    return 0.5 * mass_kg * kick_m_per_s * kick_m_per_s / ELEMENTARY_CHARGE_C
