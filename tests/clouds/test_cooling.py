"""Cooling: which model decides, worked values, goals that are never reached, intervals, trends."""

from __future__ import annotations

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.clouds.constants import ELECTRON_MASS_KG, PROTON_MASS_KG, THERMAL_EV_PER_K
from wellseq.clouds.cooling import ONE, TWO, Cooling, cool, cool_range
from wellseq.clouds.figures import around, exactly

CASE = {
    "start_K": 2500.0,
    "bore_K": 6.0,
    "magnetic_field_T": 2.0,
    "density_per_m3": 1e14,
    "mass_kg": ELECTRON_MASS_KG,
    "duration_s": 9.672,
}


def electrons(**changed: float) -> Cooling:
    return cool(**(CASE | changed))


def test_worked_time_of_one_temperature() -> None:
    found = electrons(start_K=4000.0, bore_K=12.0, goal_K=25.0, duration_s=3.0)
    assert found.model == ONE
    assert found.goal_s == pytest.approx(5.5386, rel=1e-3)
    assert electrons(start_K=4000.0, bore_K=12.2, goal_K=25.0).goal_s != pytest.approx(
        5.5386, rel=1e-3
    )


@pytest.mark.parametrize(
    ("density", "field_T", "duration_s", "across_K", "along_K", "model"),
    [
        (1e13, 4, 2.418, 6.11, 10.36, TWO),
        (1e13, 4, 20.0, 6.004, 7.08, TWO),
        (1e14, 2, 9.672, 6.114, 6.118, ONE),
    ],
)
def test_worked_temperatures(
    density: float, field_T: float, duration_s: float, across_K: float, along_K: float, model: str
) -> None:
    found = electrons(density_per_m3=density, magnetic_field_T=field_T, duration_s=duration_s)
    assert found.model == model
    assert found.perpendicular_K == pytest.approx(across_K, rel=0.01)
    assert found.parallel_K == pytest.approx(along_K, rel=0.01)
    assert found.extrapolated
    assert not found.outside


def test_one_temperature_where_allowed_is_what_two_say() -> None:
    one = electrons(goal_K=10.0)
    two = electrons(goal_K=10.0, start_parallel_K=2500.01)
    assert (one.model, two.model) == (ONE, TWO)
    assert one.temperature_K == pytest.approx(two.temperature_K, rel=1e-3)
    assert one.goal_s == pytest.approx(two.goal_s, rel=1e-3)
    assert two.both_s >= two.goal_s


def test_the_stall_is_dated() -> None:
    found = electrons(density_per_m3=1e13, magnetic_field_T=4.0, duration_s=20.0, goal_K=10.0)
    assert found.stalls_K == pytest.approx(12.2, rel=0.01)
    assert 0 < found.stalls_s < found.goal_s < found.both_s < found.searched_s
    assert math.isnan(electrons().stalls_s)


def test_collisions_fail_hot_too() -> None:
    hot = {"start_K": 50.0 / THERMAL_EV_PER_K, "density_per_m3": 1e12, "magnetic_field_T": 5.0}
    found = electrons(**hot, bore_K=10.0, goal_K=1000.0)
    assert found.model == TWO
    assert found.goal_s == pytest.approx(3.9, rel=0.02)


@pytest.mark.parametrize(("density", "field_T"), [(1e14, 2.0), (1e13, 4.0)])
def test_never_that_cold(density: float, field_T: float) -> None:
    at = {"density_per_m3": density, "magnetic_field_T": field_T, "heating_K_per_s": 10.0}
    found = electrons(**at, goal_K=7.0)
    assert found.floor_K == pytest.approx(6.0 + 10.0 * 3.869 / field_T**2, rel=1e-3)
    assert found.never_K == 7.0
    assert found.goal_s == found.both_s == math.inf
    assert math.isnan(electrons(**at, goal_K=found.floor_K + 1.0).never_K)


def test_a_goal_already_met_takes_no_time() -> None:
    assert electrons(goal_K=3000.0).goal_s == 0.0
    assert math.isnan(electrons().goal_s)


def test_antiprotons_alone_are_cooled_by_nothing() -> None:
    found = electrons(mass_kg=PROTON_MASS_KG, density_per_m3=1e12, goal_K=100.0, duration_s=100.0)
    assert found.temperature_K == pytest.approx(2500.0, rel=1e-6)
    assert found.goal_s > 3e9
    heated = electrons(mass_kg=PROTON_MASS_KG, heating_K_per_s=1e-3, goal_K=100.0, duration_s=1.0)
    assert heated.never_K == 100.0


def test_beyond_the_collision_table_there_is_no_figure() -> None:
    at = {"bore_K": 2.0, "magnetic_field_T": 4.0, "density_per_m3": 1e13, "start_K": 1000.0}
    found = electrons(**at, goal_K=8.0)
    assert found.goal_s == pytest.approx(1.279, rel=1e-2)
    assert math.isnan(found.temperature_K)
    assert math.isnan(found.both_s)
    (reason,) = found.outside
    assert reason.quantity.startswith("magnetisation")
    assert reason.limit == 300.0 < reason.value
    assert found.goal_outside == found.outside


@pytest.mark.parametrize(
    "changed",
    [
        {"bore_K": 0.0},
        {"start_K": 0.0},
        {"start_K": math.nan},
        {"density_per_m3": 0.0},
        {"magnetic_field_T": 0.0},
        {"heating_K_per_s": -1.0},
        {"heating_K_per_s": math.inf},
        {"duration_s": -1.0},
        {"goal_K": 0.0},
        {"charge_e": 0.0},
        {"start_K": 1e9},
    ],
)
def test_bad_input_is_a_reason(changed: dict[str, float]) -> None:
    found = electrons(**changed)
    assert len(found.outside) >= 1
    assert math.isnan(found.temperature_K)
    assert math.isnan(found.goal_s)


@settings(max_examples=60, deadline=None)
@given(
    st.floats(1.0, 1e6), st.floats(1.0, 300), st.floats(0.05, 9), st.floats(8, 16), st.floats(-6, 4)
)
def test_every_cloud_gets_an_answer(
    start_K: float, bore_K: float, field_T: float, density_log: float, duration_log: float
) -> None:
    found = electrons(
        start_K=start_K,
        bore_K=bore_K,
        magnetic_field_T=field_T,
        density_per_m3=10**density_log,
        duration_s=10**duration_log,
        goal_K=50.0,
    )
    known = math.isfinite(found.temperature_K)
    assert known == (found.outside == ())
    if known:
        low, high = sorted((start_K, bore_K))
        assert low * (1 - 1e-5) <= found.temperature_K <= high * (1 + 1e-5)
        assert found.perpendicular_K <= found.parallel_K * (1 + 1e-5) or start_K < bore_K


@settings(max_examples=15, deadline=None)
@given(st.floats(0, 1), st.floats(0, 1), st.floats(0, 1), st.floats(0, 1))
def test_the_interval_holds_every_case_inside(a: float, b: float, c: float, d: float) -> None:
    spread = {
        "start_K": around(2500.0, 300.0),
        "bore_K": around(9.0, 0.5),
        "density_per_m3": around(1e13, 3e12),
        "heating_K_per_s": around(1.0, 0.5),
    }
    rest = {"magnetic_field_T": 4.0, "mass_kg": ELECTRON_MASS_KG, "duration_s": 5.0}
    span = RANGES.setdefault("span", cool_range(**spread, goal_K=20.0, **rest))
    at = {
        name: item.low + share * (item.high - item.low)
        for (name, item), share in zip(spread.items(), (a, b, c, d), strict=True)
    }
    found = cool(**at, goal_K=20.0, **rest)
    for name in ("temperature_K", "perpendicular_K", "parallel_K", "floor_K", "goal_s", "both_s"):
        figure = getattr(span, name)
        assert figure.low * (1 - 1e-5) <= getattr(found, name) <= figure.high * (1 + 1e-5)


RANGES: dict[str, object] = {}
"""The one range that all examples of the property share."""


def test_an_interval_that_crosses_the_edge_has_no_figure() -> None:
    rest = {"magnetic_field_T": 4.0, "mass_kg": ELECTRON_MASS_KG, "duration_s": 20.0}
    spread = {
        "start_K": exactly(2500.0),
        "density_per_m3": exactly(1e13),
        "heating_K_per_s": exactly(0.0),
    }
    assert cool_range(bore_K=around(6.2, 0.1), **spread, **rest).temperature_K.known
    crossing = cool_range(bore_K=around(6.2, 1.0), **spread, **rest)
    assert not crossing.temperature_K.known
    assert crossing.outside
    assert not crossing.best.outside


def test_a_goal_near_the_floor_may_never_come() -> None:
    span = cool_range(
        start_K=exactly(2500.0),
        bore_K=around(10.0, 1.0),
        density_per_m3=exactly(1e14),
        heating_K_per_s=exactly(0.0),
        goal_K=10.5,
        magnetic_field_T=2.0,
        mass_kg=ELECTRON_MASS_KG,
        duration_s=20.0,
    )
    assert math.isfinite(span.goal_s.low)
    assert span.goal_s.high == math.inf
    assert span.floor_K.low < 10.5 < span.floor_K.high


@settings(max_examples=20, deadline=None)
@given(st.floats(0.5, 5.0), st.floats(1.05, 1.5))
def test_a_stronger_field_cools_faster_until_it_stalls(field_T: float, factor: float) -> None:
    # At 40 K the rate keeps up in all of these fields.
    weak, strong = (
        electrons(magnetic_field_T=value, goal_K=40.0, bore_K=10.0, start_K=1000.0)
        for value in (field_T, field_T * factor)
    )
    assert strong.goal_s < weak.goal_s


def test_a_field_can_be_too_strong() -> None:
    ends = [
        electrons(magnetic_field_T=field_T, density_per_m3=1e13, bore_K=8.0, duration_s=9.0)
        for field_T in (2.0, 5.0)
    ]
    assert ends[0].perpendicular_K > ends[1].perpendicular_K
    assert ends[0].parallel_K < ends[1].parallel_K
