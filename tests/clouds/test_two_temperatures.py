"""The two temperatures against a second method, worked values, and their laws."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

from wellseq.clouds.collisions import anisotropy_rate_of, temperature_at_magnetisation_K
from wellseq.clouds.constants import ELECTRON_MASS_KG, THERMAL_EV_PER_K
from wellseq.clouds.radiation import radiation_rate_per_s
from wellseq.clouds.two_temperatures import Balance, Cooled, cool_both, mean_K


def electrons(density: float, field_T: float, bore_K: float, **more: float) -> Balance:
    matter = {"magnetic_field_T": field_T, "mass_kg": ELECTRON_MASS_KG}
    rate = anisotropy_rate_of(density_per_m3=density, **matter)
    return Balance(rate, radiation_rate_per_s(**matter), bore_K, **more)


def from_2500_K(balance: Balance, duration_s: float) -> tuple[float, float]:
    hot = {"perpendicular_K": 2500.0, "parallel_K": 2500.0}
    return cool_both(balance, duration_s=duration_s, **hot).at(duration_s)


@pytest.mark.parametrize(
    ("density", "field_T", "duration_s", "across_K", "along_K", "tolerance"),
    [
        (1e13, 4, 2.418, 6.11, 10.36, 0.02),
        (1e13, 4, 20.0, 6.004, 7.08, 0.02),
        (1e14, 2, 9.672, 6.114, 6.118, 0.01),
    ],
)
def test_worked_temperatures(
    density: float,
    field_T: float,
    duration_s: float,
    across_K: float,
    along_K: float,
    tolerance: float,
) -> None:
    found = from_2500_K(electrons(density, field_T, 6.0), duration_s)
    assert found == pytest.approx((across_K, along_K), rel=tolerance)
    warmer = from_2500_K(electrons(density, field_T, 6.2), duration_s)
    assert warmer != pytest.approx((across_K, along_K), rel=tolerance)


def cooled_positrons() -> Cooled:
    start_K = 50.0 / THERMAL_EV_PER_K
    return cool_both(
        electrons(1e12, 5.0, 10.0),
        perpendicular_K=start_K,
        parallel_K=start_K,
        duration_s=10.0,
        goal_K=1000.0,
    )


def test_collisions_fail_hot_too() -> None:
    # 50 eV to 1000 K at 1e12 1/m3 and 5 T: 3.9 s, where one temperature says 0.99 s (derived).
    assert cooled_positrons().goal_s == pytest.approx(3.9, rel=0.02)
    assert not electrons(1e12, 5.0, 10.0).isotropic(1000.0, 50.0 / THERMAL_EV_PER_K)


def test_against_a_second_method() -> None:
    balance = electrons(1e13, 4.0, 6.0, heating_K_per_s=3.0)
    exact = solve_ivp(
        balance.slopes, (0, 2.418), [2500.0, 2500.0], method="Radau", rtol=1e-9, atol=1e-9
    ).y[:, -1]
    assert from_2500_K(balance, 2.418) == pytest.approx(tuple(exact), rel=1e-4)
    unheated = from_2500_K(electrons(1e13, 4.0, 6.0), 2.418)
    assert unheated != pytest.approx(tuple(exact), rel=1e-4)


@settings(max_examples=25, deadline=None)
@given(st.floats(20, 3000), st.floats(20, 3000), st.floats(0.5, 8))
def test_collisions_alone_keep_the_energy(across_K: float, along_K: float, field_T: float) -> None:
    still = electrons(1e13, field_T, 10.0)
    alone = Balance(still.collision_rate, 1e-30, 10.0)
    end = cool_both(alone, perpendicular_K=across_K, parallel_K=along_K, duration_s=1e-4).at(1e-4)
    assert mean_K(*end) == pytest.approx(mean_K(across_K, along_K), rel=1e-6)
    assert min(across_K, along_K) * (1 - 1e-6) <= min(end)


def test_heating_settles_at_the_floor() -> None:
    for share in (0.0, 1 / 3, 1.0):
        balance = electrons(1e14, 2.0, 20.0, heating_K_per_s=30.0, parallel_share=share)
        across_K, _ = cool_both(
            balance, perpendicular_K=500.0, parallel_K=500.0, duration_s=40.0
        ).at(40.0)
        assert across_K == pytest.approx(balance.floor_K, rel=1e-5)
    assert balance.floor_K == pytest.approx(20.0 + 1.5 * 30.0 / balance.radiation_per_s)


def test_noise_along_the_axis_holds_the_parallel_motion_up() -> None:
    along = [
        from_2500_K(electrons(1e13, 4.0, 6.0, heating_K_per_s=2.0, parallel_share=share), 5.0)[1]
        for share in (0.0, 1 / 3, 1.0)
    ]
    assert along[0] < along[1] < along[2]


def test_the_path_ends_where_the_rate_does() -> None:
    coldest_K = temperature_at_magnetisation_K(
        300.0, magnetic_field_T=4.0, mass_kg=ELECTRON_MASS_KG
    )
    found = cool_both(
        electrons(1e13, 4.0, 2.0),
        perpendicular_K=1000.0,
        parallel_K=1000.0,
        duration_s=10.0,
        goal_K=8.0,
        coldest_K=coldest_K,
    )
    assert 0 < found.goal_s < found.left_s < 10.0
    assert math.isnan(found.at(10.0)[0])
    assert mean_K(float(found.perpendicular_K[-1]), float(found.parallel_K[-1])) == pytest.approx(
        coldest_K, rel=1e-6
    )


def test_the_search_goes_on_after_the_step() -> None:
    hot = {"perpendicular_K": 2500.0, "parallel_K": 2500.0, "goal_K": 10.0}
    balance = electrons(1e13, 4.0, 6.0)
    whole = cool_both(balance, duration_s=4.0, **hot)
    split = cool_both(balance, duration_s=1.0, search_s=20.0, **hot)
    assert split.both_s == pytest.approx(whole.both_s, rel=1e-4)
    assert split.at(1.0) == pytest.approx(whole.at(1.0), rel=5e-3)
    assert (np.diff(split.times_s) > 0).all()
    assert math.isnan(cool_both(balance, duration_s=1.0, **hot).both_s)
