"""Sympathetic cooling: worked values, the three ways out of validity, intervals and trends."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

from wellseq.clouds.collisions import species_rate_per_s
from wellseq.clouds.constants import ELECTRON_MASS_KG, PROTON_MASS_KG, THERMAL_EV_PER_K
from wellseq.clouds.figures import around
from wellseq.clouds.sympathetic import (
    Mixture,
    Sympathetic,
    SympatheticRange,
    cool_with,
    cool_with_range,
)

GOALS_K = (1000.0, 100.0, 30.0)
MIXTURE = Mixture(
    heavy_number=8e4,
    heavy_K=4.0 / THERMAL_EV_PER_K,
    heavy_mass_kg=PROTON_MASS_KG,
    coolant_number=1.5e7,
    coolant_density_per_m3=4e13,
    coolant_K=120.0,
    coolant_mass_kg=ELECTRON_MASS_KG,
    magnetic_field_T=2.0,
    bore_K=18.0,
    coolant_depth_eV=50.0,
    rotation_rad_per_s=2.0 * math.pi * 30e3,
    radius_m=0.5e-3,
)


def cooled(duration_s: float = 5.0, **changed: object) -> Sympathetic:
    return cool_with(replace(MIXTURE, **changed), duration_s=duration_s, goals_K=GOALS_K)


def is_the_worked_case(found: Sympathetic) -> bool:
    wanted = (357.8, 0.0196, 16.2e-3, 1.408, 3.276)
    got = (found.peak_K, found.peak_s, *found.goals_s)
    return got == pytest.approx(wanted, rel=0.02)


def test_worked_case() -> None:
    # 8e4 antiprotons at 4 eV in 1.5e7 electrons of 4e13 1/m3 at 120 K, 2 T, bore 18 K (derived).
    assert is_the_worked_case(cooled())
    assert not is_the_worked_case(cooled(coolant_number=1.4e7))
    assert not is_the_worked_case(cooled(coolant_density_per_m3=4.2e13))


def test_goals_are_found_after_the_step_too() -> None:
    early, late = cooled(duration_s=0.5), cooled(duration_s=5.0)
    assert early.goals_s == pytest.approx(late.goals_s, rel=1e-4)
    assert early.heavy_K > late.heavy_K > 18.0


def test_against_a_second_method() -> None:
    found = cooled(duration_s=1.0)
    tau_s = 3.868999 / 4

    def slopes(_: float, state: list[float]) -> list[float]:
        heavy_K, light_K = state
        rate = species_rate_per_s(
            light_density_per_m3=4e13,
            light_K=light_K,
            heavy_K=heavy_K,
            light_mass_kg=ELECTRON_MASS_KG,
            heavy_mass_kg=PROTON_MASS_KG,
        )
        flow = rate * (heavy_K - light_K)
        return [-flow, 8e4 / 1.5e7 * flow - (light_K - 18.0) / tau_s]

    exact = solve_ivp(slopes, (0, 1.0), [MIXTURE.heavy_K, 120.0], method="Radau", rtol=1e-9)
    assert found.heavy_K == pytest.approx(exact.y[0, -1], rel=1e-4)
    assert found.coolant_K == pytest.approx(exact.y[1, -1], rel=1e-4)


def test_without_radiation_the_energy_is_shared() -> None:
    # A weak field: (N_h T_h + N_e T_e)/(N_h + N_e) (derived).
    found = cooled(magnetic_field_T=1e-3, duration_s=10.0)
    mixed_K = (8e4 * MIXTURE.heavy_K + 1.5e7 * 120.0) / (8e4 + 1.5e7)
    assert found.heavy_K == pytest.approx(mixed_K, rel=1e-3)
    assert found.coolant_K == pytest.approx(mixed_K, rel=1e-3)


def test_a_coolant_that_boils_out_gives_no_figure() -> None:
    found = cooled(coolant_depth_eV=0.2)
    assert 0 < found.leaks_s < 0.0196
    assert math.isnan(found.heavy_K)
    assert math.isnan(found.peak_K)
    assert all(math.isnan(goal) for goal in found.goals_s)
    (reason,) = found.outside
    assert reason.quantity == "kT of the coolant"
    assert reason.value == pytest.approx(357.8 * THERMAL_EV_PER_K, rel=0.01)
    assert reason.limit == pytest.approx(0.02)
    assert math.isnan(cooled(coolant_depth_eV=0.4).leaks_s)


def test_clouds_that_separate_give_no_figure_after_that() -> None:
    found = cooled(rotation_rad_per_s=2.0 * math.pi * 600e3)
    assert found.goals_s[0] == pytest.approx(16.2e-3, rel=0.02)
    assert math.isnan(found.goals_s[2])
    assert math.isnan(found.heavy_K)
    (reason,) = found.outside
    assert reason.quantity.startswith("centrifugal exponent")
    assert reason.value > reason.limit == 0.5


def test_an_overlap_brings_the_figure_back_within_its_factor() -> None:
    spun = {"rotation_rad_per_s": 2.0 * math.pi * 600e3, "overlap": lambda heavy_K: 0.5}
    found = cooled(**spun)
    assert not found.outside
    assert found.widened
    assert found.goals_s[0] > 1.8 * cooled().goals_s[0]
    span = cool_with_range(replace(MIXTURE, **spun), duration_s=5.0, goals_K=GOALS_K)
    assert span.goals_s[0].low < found.goals_s[0] < span.goals_s[0].high


def test_hot_heavies_need_a_measured_temperature() -> None:
    found = cooled(heavy_K=2000.0 / THERMAL_EV_PER_K)
    (reason,) = found.outside
    assert reason.quantity == "mean energy of the heavy cloud"
    assert math.isnan(found.heavy_K)


@pytest.mark.parametrize(
    "changed",
    [
        {"coolant_charge_e": -1.0},
        {"coolant_number": 0.0},
        {"heavy_number": 0.0},
        {"bore_K": 0.0},
        {"coolant_density_per_m3": math.nan},
        {"heating_K_per_s": -1.0},
        {"coolant_depth_eV": 0.0},
        {"duration_s": -1.0},
    ],
)
def test_bad_input_is_a_reason(changed: dict[str, float]) -> None:
    found = cooled(**changed)
    assert found.outside
    assert math.isnan(found.heavy_K)
    assert all(math.isnan(goal) for goal in found.goals_s)


def test_a_floor_above_the_goal_is_said() -> None:
    found = cooled(heating_K_per_s=30.0)
    assert found.floor_K == pytest.approx(18.0 + 30.0 * 0.9672, rel=1e-3)
    assert found.goals_s[2] == math.inf
    assert math.isfinite(found.goals_s[1])
    assert not found.goal_outside


def test_the_factor_of_a_magnetised_coolant_is_in_the_interval() -> None:
    warm = replace(MIXTURE, coolant_K=200.0)
    span = cool_with_range(warm, duration_s=5.0, goals_K=GOALS_K)
    assert span.best.widened_K == pytest.approx(166.0, rel=0.01)
    # The first goal is reached with a hot coolant, the last with a magnetised one.
    widths = [(item.high - item.low) / item.value for item in span.goals_s]
    assert widths[0] < 1e-4
    assert widths[2] > 10 * widths[0]
    assert span.goals_s[2].low < span.best.goals_s[2] < span.goals_s[2].high


RANGES: list[SympatheticRange] = []
"""The one range that all examples of the property share."""
SPREAD = {
    "heavy_number": around(8e4, 2e4),
    "heavy_K": around(46418.0, 5000.0),
    "coolant_number": around(1.5e7, 2e6),
    "coolant_density_per_m3": around(4e13, 1e13),
    "bore_K": around(18.0, 2.0),
}


@settings(max_examples=15, deadline=None)
@given(st.tuples(*[st.floats(0, 1)] * 5))
def test_the_interval_holds_every_case_inside(shares: tuple[float, ...]) -> None:
    if not RANGES:
        RANGES.append(cool_with_range(MIXTURE, duration_s=2.0, goals_K=GOALS_K, **SPREAD))
    (span,) = RANGES
    at = {
        name: item.low + share * (item.high - item.low)
        for (name, item), share in zip(SPREAD.items(), shares, strict=True)
    }
    found = cooled(duration_s=2.0, **at)
    for name in ("heavy_K", "coolant_K", "peak_K"):
        figure = getattr(span, name)
        assert figure.low * (1 - 1e-4) <= getattr(found, name) <= figure.high * (1 + 1e-4)
    for figure, goal_s in zip(span.goals_s, found.goals_s, strict=True):
        assert figure.low * (1 - 1e-4) <= goal_s <= figure.high * (1 + 1e-4)


@settings(max_examples=20, deadline=None)
@given(st.floats(5.5, 8), st.floats(1.05, 4), st.floats(1.05, 4))
def test_more_coolant_never_cools_later(number_log: float, more: float, denser: float) -> None:
    few = {"coolant_number": 10**number_log, "coolant_depth_eV": 1e4}
    many = few | {"coolant_number": more * 10**number_log}
    dense = few | {"coolant_density_per_m3": denser * 4e13}
    for better in (many, dense):
        for soon, late in zip(cooled(**better).goals_s, cooled(**few).goals_s, strict=True):
            assert soon <= late * (1 + 1e-5)
