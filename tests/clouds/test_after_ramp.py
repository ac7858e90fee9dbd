"""Temperatures and length after a slow ramp, against the equations of motion."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.clouds.adiabatic import Ramped, Slowness, after_ramp, harmonic_length_m, slosh_eV
from wellseq.clouds.constants import BOLTZMANN_J_PER_K, PROTON_MASS_KG
from wellseq.clouds.figures import NOT_KNOWN, Figure, exactly
from wellseq.clouds.stiff import solve

STILL = Slowness(0.0, 0.0, 0.0, 0.0, 0.0)
MASS = PROTON_MASS_KG


def ramped(
    after: Callable[[float], float] | float,
    exchanges: float,
    across_K: float = 400.0,
    along_K: float = 400.0,
    slow: Slowness = STILL,
) -> Ramped:
    return after_ramp(
        perpendicular_K=across_K,
        parallel_K=along_K,
        length_m=harmonic(2e6)(max(along_K, 1.0)),
        length_after_m=after,
        exchanges=exactly(exchanges),
        slow=slow,
        mass_kg=MASS,
    )


def harmonic(frequency: float) -> Callable[[float], float]:
    return lambda kelvin: harmonic_length_m(
        temperature_K=kelvin, frequency_rad_per_s=frequency, mass_kg=MASS
    )


def test_harmonic_well_slowed_to_half() -> None:
    # E/w conserved: Mechanics (Course of Theoretical Physics vol. 1), sec. 49-50 (from memory).
    found = ramped(harmonic(1e6), exchanges=0.0)
    assert found.law == "free"
    assert found.parallel_K.value == pytest.approx(200.0, rel=1e-9)
    assert found.perpendicular_K.value == 400.0
    assert found.temperature_K.value == pytest.approx(1000.0 / 3, rel=1e-9)
    # Against the equation of motion, 8 phases, 2 MHz to 1 MHz in 100 periods, smoothly.
    phases = np.arange(8) * math.pi / 4
    duration_s = 100 * 2 * math.pi

    def slopes(t: float, y: np.ndarray) -> np.ndarray:
        w = 0.75 + 0.25 * math.cos(math.pi * t / duration_s)
        return np.concatenate([y[8:], -w * w * y[:8]])

    start = np.concatenate([np.sin(phases), np.cos(phases)])
    end = solve(slopes, start.tolist(), duration_s, relative=1e-9).end
    energy = 0.5 * float((end[8:] ** 2 + 0.25 * end[:8] ** 2).mean())
    assert energy / 0.5 == pytest.approx(0.5, abs=0.002)
    assert found.parallel_K.value / 400 == pytest.approx(energy / 0.5, rel=1e-3)


def test_harmonic_well_with_equipartition() -> None:
    found = ramped(harmonic(1e6), exchanges=100.0)
    assert found.law == "shared"
    assert found.parallel_K.value == pytest.approx(400.0 / math.sqrt(2.0), rel=1e-9)
    assert found.temperature_K == found.parallel_K == found.perpendicular_K
    assert found.length_m.value == pytest.approx(harmonic(1e6)(found.parallel_K.value))


def moving_wall_ratio(speed: float) -> float:
    """T_par after over before: particles between a fixed wall and one that doubles the length."""
    rng_free = (np.arange(400) + 0.5) / 400
    v = math.sqrt(2.0) * np.array([math.sqrt(-math.log(share)) for share in rng_free])
    v = v * np.where(np.arange(400) % 2, 1.0, -1.0)
    z = (np.arange(400) * 0.618034) % 1.0
    time, first = np.zeros(400), (v * v).mean()
    end_s = 1.0 / speed
    for _ in range(20_000):
        # To the moving wall at 1 + speed t; left-going particles meet the fixed wall first.
        distance = np.where(v > 0, 1.0 + speed * time - z, 1.0 + speed * time + z)
        closing = np.abs(v) - speed
        ahead = np.where(closing > 0, distance / np.where(closing > 0, closing, 1.0), math.inf)
        hit = time + ahead < end_s
        if not hit.any():
            break
        time = np.where(hit, time + ahead, time)
        z = np.where(hit, 1.0 + speed * time, z)
        v = np.where(hit, -(np.abs(v) - 2.0 * speed), v)
    return float((v * v).mean() / first)


def test_box_lengthened_twice() -> None:
    # T_par L^2 conserved: Mechanics, sec. 49-50 (from memory); 0.2491 by moving-wall particles.
    start_m = harmonic(2e6)(400.0)
    found = ramped(2.0 * start_m, exchanges=0.0)
    assert found.parallel_K.value / 400 == pytest.approx(0.25, rel=1e-9)
    assert found.length_m == exactly(2.0 * start_m)
    slow, fast = moving_wall_ratio(0.002), moving_wall_ratio(0.3)
    assert slow == pytest.approx(found.parallel_K.value / 400, abs=0.01)
    assert fast != pytest.approx(found.parallel_K.value / 400, abs=0.01)


def test_box_lengthened_twice_with_collisions() -> None:
    # T L^(2/3) conserved: the monatomic adiabat (derived); here by two shared temperatures.
    found = ramped(2.0 * harmonic(2e6)(400.0), exchanges=50.0)
    assert found.temperature_K.value / 400 == pytest.approx(0.6299605, abs=1e-6)

    def shared(rate: float) -> float:
        def slopes(t: float, y: np.ndarray) -> tuple[float, float]:
            flow = rate * (y[1] - y[0])
            return flow, -2 * flow - 2 * y[1] / (1 + t)

        end = solve(slopes, (1.0, 1.0), 1.0).end
        return float(2 * end[0] + end[1]) / 3

    assert shared(1e4) == pytest.approx(0.6299605, abs=0.001)
    assert shared(1.0) != pytest.approx(0.6299605, abs=0.001)


def test_between_the_two_laws_both_are_the_interval() -> None:
    after = 2.0 * harmonic(2e6)(400.0)
    free, shared, between = (ramped(after, exchanges) for exchanges in (0.01, 100.0, 1.0))
    assert between.law == "between"
    for name in ("temperature_K", "perpendicular_K", "parallel_K"):
        ends = sorted(getattr(item, name).value for item in (free, shared))
        figure = getattr(between, name)
        assert (figure.low, figure.high) == pytest.approx(tuple(ends))
        assert ends[0] < figure.value < ends[1]
    # A rate that crosses a limit on the way is between, too.
    crossing = after_ramp(
        perpendicular_K=400.0,
        parallel_K=400.0,
        length_m=after / 2,
        length_after_m=after,
        exchanges=Figure(20.0, 5.0, 40.0),
        slow=STILL,
        mass_kg=MASS,
    )
    assert crossing.law == "between"


def test_the_margin_and_the_kick_widen_the_interval() -> None:
    after = harmonic(1e6)
    kick_m_per_s = 1000.0
    loose = ramped(after, 0.0, slow=Slowness(0.2, 0.0, 0.1, 0.0, kick_m_per_s))
    hotter_K = 0.5 * MASS * kick_m_per_s**2 / BOLTZMANN_J_PER_K
    assert loose.parallel_K.low == pytest.approx(200.0 * 0.97)
    assert loose.parallel_K.high == pytest.approx(200.0 * 1.03 + hotter_K)
    assert slosh_eV(MASS, kick_m_per_s) == pytest.approx(5.22e-3, rel=1e-3)


@pytest.mark.parametrize("slow", [(0.31, 0.0), (0.0, 0.31), (math.nan, 0.0)])
def test_a_fast_ramp_has_no_figure(slow: tuple[float, float]) -> None:
    found = ramped(harmonic(1e6), 0.0, slow=Slowness(slow[0], 0.0, slow[1], 0.0, 0.0))
    (reason,) = found.outside
    assert reason.limit == 0.3
    assert found.temperature_K is NOT_KNOWN
    assert not ramped(harmonic(1e6), 0.0, slow=Slowness(0.3, 0.0, 0.3, 0.0, 0.0)).outside


@pytest.mark.parametrize("changed", [{"across_K": 0.0}, {"along_K": -1.0}, {"exchanges": math.nan}])
def test_bad_input_is_a_reason(changed: dict[str, float]) -> None:
    found = ramped(0.01, **({"exchanges": 1.0} | changed))
    assert found.outside
    assert not found.temperature_K.known


@settings(max_examples=50)
@given(st.floats(0.1, 1e4), st.floats(0.1, 1e4), st.floats(0.3, 3.0), st.floats(1.01, 2.0))
def test_longer_is_colder_and_order_is_kept(
    across_K: float, along_K: float, ratio: float, more: float
) -> None:
    start_m = harmonic(2e6)(along_K)
    for exchanges in (0.0, 100.0):
        near = ramped(ratio * start_m, exchanges, across_K, along_K)
        far = ramped(more * ratio * start_m, exchanges, across_K, along_K)
        warm = ramped(ratio * start_m, exchanges, 1.1 * across_K, along_K)
        assert far.temperature_K.value < near.temperature_K.value < warm.temperature_K.value
