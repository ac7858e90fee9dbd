"""Slow changes: eps, the action under direct simulation, and what a moved well does."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from wellseq.clouds.action import Profile, bounces, energies_at, profile
from wellseq.clouds.adiabatic import (
    Stretch,
    follow,
    plasma_frequency_cap_rad_per_s,
    slowness,
)
from wellseq.clouds.constants import (
    ELECTRON_MASS_KG,
    ELEMENTARY_CHARGE_C,
    PROTON_MASS_KG,
)
from wellseq.clouds.stiff import solve

HALF_M, WALL_M, PERIOD_S = 9e-3, 18e-3, 3.31741e-6
W0_RAD_PER_S = 2 * math.pi * 346.66e3


def shape(z_m: np.ndarray) -> np.ndarray:
    """U per volt of the worked well, in eV: 1 - (S(z+h) - S(z-h))."""
    up, down = (np.tanh(1.318 * (z_m + side) / WALL_M) for side in (HALF_M, -HALF_M))
    return 1.0 - 0.5 * (up - down)


def push(z_m: np.ndarray) -> np.ndarray:
    """-d shape/dz in 1/m."""
    up, down = (np.tanh(1.318 * (z_m + side) / WALL_M) for side in (HALF_M, -HALF_M))
    return 0.5 * 1.318 / WALL_M * (down**2 - up**2)


def well(volts: float) -> Profile:
    z = np.linspace(-60e-3, 60e-3, 401)
    return profile(z, volts * shape(z), PROTON_MASS_KG)


def straight(share: float) -> float:
    return 12.0 - 9.0 * share


def cosine(share: float) -> float:
    return 7.5 + 4.5 * math.cos(math.pi * share)


def stretch_of(ramp: Callable[[float], float], periods: float, samples: int = 33) -> Stretch:
    shares = np.linspace(0, 1, samples)
    volts = np.array([ramp(share) for share in shares])
    frequency = W0_RAD_PER_S * np.sqrt(volts / 12.0)
    return Stretch(shares * periods * PERIOD_S, frequency, np.zeros(samples))


@pytest.mark.parametrize(
    ("ramp", "periods", "eps"),
    [
        (straight, 1, 0.415),
        (straight, 3, 0.138),
        (straight, 10, 0.0415),
        (straight, 300, 0.00138),
        (cosine, 1, 0.268),
        (cosine, 3, 0.089),
        (cosine, 100, 0.0027),
    ],
)
def test_worked_slowness(ramp: Callable[[float], float], periods: float, eps: float) -> None:
    found = slowness([stretch_of(ramp, periods)], 0.01)
    assert found.eps == pytest.approx(eps, rel=0.012)
    assert found.eps_move == 0.0
    assert slowness([stretch_of(ramp, periods * 1.05)], 0.01).eps != pytest.approx(eps, rel=0.012)


def energies_after(ramp: Callable[[float], float], periods: int, steps: int = 250) -> np.ndarray:
    """64 antiprotons of one action and even phases, flown through the ramp: energies in eV."""
    per_eV = ELEMENTARY_CHARGE_C / PROTON_MASS_KG
    start = 0.3 * well(12.0).depth_eV
    z = np.full(64, float(bounces(well(12.0), start).right_m[0]))
    v = np.zeros(64)
    dt = PERIOD_S / 512
    # One particle at each 64th of the static orbit.
    for tick in range(512):
        moving = np.arange(64) * 8 > tick
        v = np.where(moving, v + 0.5 * dt * 12.0 * per_eV * push(z), v)
        z = np.where(moving, z + dt * v, z)
        v = np.where(moving, v + 0.5 * dt * 12.0 * per_eV * push(z), v)
    count = steps * periods
    dt = PERIOD_S / steps
    volts = [ramp(number / count) for number in range(count + 1)]
    for number in range(count):
        v = v + 0.5 * dt * volts[number] * per_eV * push(z)
        z = z + dt * v
        v = v + 0.5 * dt * volts[number + 1] * per_eV * push(z)
    height = shape(z) - shape(np.zeros(1))
    return 0.5 * v * v / per_eV + volts[-1] * height


@pytest.mark.parametrize(
    ("ramp", "periods", "rms"),
    [
        (straight, 1, 0.205),
        (straight, 3, 0.081),
        (straight, 10, 0.0227),
        (straight, 30, 0.0087),
        (cosine, 1, 0.179),
        (cosine, 3, 0.033),
        (cosine, 10, 0.0023),
    ],
)
def test_action_under_direct_simulation(
    ramp: Callable[[float], float], periods: int, rms: float
) -> None:
    energies = energies_after(ramp, periods)
    action = bounces(well(12.0), 0.3 * well(12.0).depth_eV).action_Js[0]
    changes = bounces(well(3.0), energies).action_Js / action - 1
    assert math.sqrt((changes**2).mean()) == pytest.approx(rms, rel=0.1)
    # What the model carries: the mean energy follows the action within 0.15 eps.
    wanted = energies_at(well(3.0), action)[0]
    eps = slowness([stretch_of(ramp, periods)], 0.01).eps
    assert abs(energies.mean() / wanted - 1) < 0.15 * eps


def test_a_smooth_ramp_is_ten_times_better() -> None:
    action = bounces(well(12.0), 0.3 * well(12.0).depth_eV).action_Js[0]
    spread = [
        (bounces(well(3.0), energies_after(ramp, 10)).action_Js / action - 1).std()
        for ramp in (straight, cosine)
    ]
    assert spread[0] > 8 * spread[1]


def test_moving_a_well_at_constant_frequency() -> None:
    times, frequency, length_m = np.linspace(0, 1e-4, 33), np.full(33, 1e6), 5e-3
    straight_on = Stretch(times, frequency, 0.02 * times / 1e-4)
    found = slowness([straight_on], length_m)
    assert found.eps == pytest.approx(0.0, abs=1e-9)
    # 200 m/s at once: 200/(1e6 * 5e-3), at the start and again at the end.
    assert found.eps_move == pytest.approx(0.04, rel=1e-6)
    assert found.kick_m_per_s == pytest.approx(400.0, rel=1e-6)
    gently = Stretch(times, frequency, 0.01 * (1 - np.cos(np.pi * times / 1e-4)))
    smooth = slowness([gently], length_m)
    acceleration = 0.01 * (math.pi / 1e-4) ** 2
    assert smooth.eps_move == pytest.approx(acceleration / 1e12 / length_m, rel=1e-2)
    assert smooth.kick_m_per_s < 0.1 * found.kick_m_per_s


def slosh_m_per_s(track: Callable[[float], float], duration_s: float, w: float) -> float:
    """Speed amplitude left in a harmonic well whose middle follows the track, m/s."""
    path = solve(
        lambda t, y: (y[1], -w * w * (y[0] - track(t))),
        (track(0.0), 0.0),
        duration_s,
        absolute=1e-12,
        longest_step_s=0.1 / w,
    )
    return math.hypot(float(path.end[1]), w * (float(path.end[0]) - track(duration_s)))


@pytest.mark.parametrize("duration_s", [1.7e-5, 2.9e-5, 1e-4])
def test_the_kick_bounds_the_slosh(duration_s: float) -> None:
    w, reach_m = 1e6, 0.002
    tracks: list[Callable[[float], float]] = [
        lambda t: reach_m * t / duration_s,
        lambda t: 0.5 * reach_m * (1 - math.cos(math.pi * t / duration_s)),
    ]
    for track in tracks:
        times = np.linspace(0, duration_s, 65)
        places = np.array([track(t) for t in times])
        kick = slowness([Stretch(times, np.full(65, w), places)], 0.01).kick_m_per_s
        assert slosh_m_per_s(track, duration_s, w) <= kick * 1.01
    # Two jumps in step are no less than that: the bound is not idle.
    turn_s = math.pi / w
    reached = slosh_m_per_s(lambda t: reach_m * t / turn_s, turn_s, w)
    assert reached == pytest.approx(2 * reach_m / turn_s, rel=1e-3)


def test_a_cap_for_plasmas() -> None:
    # E3 and E1: thermal bounces v_th/2L of 0.65 and 0.32 MHz (derived).
    for temperature_K, length_m, megahertz in ((60, 23.1e-3, 0.65), (120, 66e-3, 0.32)):
        capped = plasma_frequency_cap_rad_per_s(
            vacuum_rad_per_s=2e6 * math.pi * 5,
            temperature_K=temperature_K,
            length_m=length_m,
            mass_kg=ELECTRON_MASS_KG,
        )
        assert capped == pytest.approx(2e6 * math.pi * megahertz, rel=0.015)
    free = {"temperature_K": 1e6, "length_m": 1e-3, "mass_kg": ELECTRON_MASS_KG}
    assert plasma_frequency_cap_rad_per_s(vacuum_rad_per_s=3.0, **free) == 3.0


def test_a_particle_followed() -> None:
    wells = [well(volts) for volts in (12.0, 9.0, 6.0, 3.0)]
    found = follow(wells, 0.3 * wells[0].depth_eV)
    assert (found.lost_at, found.divided_at) == (-1, -1)
    assert found.energies_eV[-1] == pytest.approx(0.960933, rel=1e-5)
    shallow = follow([well(volts) for volts in (12.0, 3.0, 0.1)], 0.3 * wells[0].depth_eV)
    assert shallow.lost_at == 2
    assert math.isnan(shallow.energies_eV[2])
    z = np.linspace(-60e-3, 60e-3, 401)
    split = profile(z, 12 * shape(z) + 9 * np.exp(-((z / 4e-3) ** 2)), PROTON_MASS_KG)
    assert follow([wells[0], split], 0.05 * wells[0].depth_eV).divided_at == 1


@pytest.mark.parametrize(
    ("times", "frequency", "length_m"),
    [
        ([0.0, 1.0, 2.0], [1.0] * 3, 1.0),
        ([0.0, 1.0, 1.0, 2.0, 3.0], [1.0] * 5, 1.0),
        ([0.0, 1.0, 2.0, 3.0, 4.0], [1.0, 1.0, 0.0, 1.0, 1.0], 1.0),
        ([0.0, 1.0, 2.0, 3.0, 4.0], [1.0] * 5, 0.0),
    ],
)
def test_what_is_no_stretch_is_refused(
    times: list[float], frequency: list[float], length_m: float
) -> None:
    stretch = Stretch(np.array(times), np.array(frequency), np.zeros(len(times)))
    with pytest.raises(ValueError, match=r"stretch|length"):
        slowness([stretch], length_m)


def test_nothing_moves_in_no_time() -> None:
    assert slowness([], 1.0).eps == slowness([], 1.0).eps_move == 0.0
