"""Radiation rates against published times, and the closed form against its equation."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.clouds import radiation
from wellseq.clouds.constants import ELECTRON_MASS_KG, PROTON_MASS_KG
from wellseq.clouds.stiff import solve

ELECTRONS = {"mass_kg": ELECTRON_MASS_KG}
YEAR_S = 365.25 * 86400


def damping_s(field_T: float) -> float:
    return 1.0 / radiation.radiation_rate_per_s(magnetic_field_T=field_T, **ELECTRONS)


def test_damping_of_the_gyration() -> None:
    # Geonium theory, Rev. Mod. Phys. 58, 233 (1986): 2.58 s at 1 T (from memory).
    assert damping_s(1.0) == pytest.approx(2.58, abs=0.01)
    assert damping_s(1.0) == pytest.approx(2.579333, rel=1e-6)
    assert damping_s(1.01) != pytest.approx(2.58, abs=0.01)


def test_damping_at_a_published_field() -> None:
    # Phys. Rev. A 83, 052122 (2011): about 0.1 s in free space at 5.36 T (from memory).
    assert damping_s(5.36) == pytest.approx(0.09, abs=0.005)
    assert damping_s(5.36) == pytest.approx(0.08977963, rel=1e-6)


@pytest.mark.parametrize(("field_T", "time_s"), [(1, 3.869), (2, 0.9672), (4, 0.2418)])
def test_time_constant_of_a_plasma(field_T: float, time_s: float) -> None:
    # Phys. Fluids 23, 725 (1980): 3.9 s at 1 T (from memory).
    found = radiation.time_constant_s(magnetic_field_T=field_T, **ELECTRONS)
    assert found == pytest.approx(time_s, rel=2e-4)
    assert found * field_T**2 == pytest.approx(3.9, abs=0.05)


def test_heavy_particles_do_not_radiate() -> None:
    found = radiation.time_constant_s(magnetic_field_T=2.0, mass_kg=PROTON_MASS_KG)
    assert found == pytest.approx(190 * YEAR_S, rel=0.01)


def test_worked_cooling_time() -> None:
    tau_s = radiation.time_constant_s(magnetic_field_T=2.0, **ELECTRONS)
    rest = {"start_K": 4000.0, "floor_K": 12.0, "time_constant_s": tau_s}
    assert radiation.isotropic_time_s(goal_K=25.0, **rest) == pytest.approx(5.5386, rel=1e-3)
    assert radiation.isotropic_time_s(goal_K=25.1, **rest) != pytest.approx(5.5386, rel=1e-3)


@given(st.floats(20, 1e5), st.floats(1, 19), st.floats(0.1, 10), st.floats(0.01, 30))
def test_time_and_temperature_are_inverse(
    start_K: float, floor_K: float, tau_s: float, ratio: float
) -> None:
    at = {"start_K": start_K, "floor_K": floor_K, "time_constant_s": tau_s}
    goal_K = radiation.isotropic_K(after_s=ratio * tau_s, **at)
    # Close to the floor the goal itself is only known to its last digit.
    blur = 1e-9 + 4e-16 * goal_K / (goal_K - floor_K)
    assert radiation.isotropic_time_s(goal_K=goal_K, **at) == pytest.approx(
        ratio * tau_s, rel=blur / ratio + 1e-9
    )


def test_closed_form_is_the_equation() -> None:
    start_K, bore_K, heating, tau_s = 900.0, 12.0, 20.0, 0.97
    floor_K = radiation.floor_K(bore_K=bore_K, heating_K_per_s=heating, time_constant_s=tau_s)
    path = solve(
        lambda _, y: (-(y[0] - bore_K) / tau_s + heating,), (start_K,), 4.0, relative=1e-11
    )
    at = {"start_K": start_K, "time_constant_s": tau_s, "after_s": 4.0}
    assert radiation.isotropic_K(floor_K=floor_K, **at) == pytest.approx(path.end[0], rel=1e-9)
    assert radiation.isotropic_K(floor_K=bore_K, **at) != pytest.approx(path.end[0], rel=1e-9)


def test_a_goal_under_the_floor_is_never_reached() -> None:
    at = {"start_K": 100.0, "floor_K": 10.0, "time_constant_s": 1.0}
    assert radiation.isotropic_time_s(goal_K=10.0, **at) == math.inf
    assert radiation.isotropic_time_s(goal_K=9.0, **at) == math.inf
    assert radiation.isotropic_time_s(goal_K=100.0, **at) == 0.0


@pytest.mark.parametrize(("field_T", "rise_K"), [(1, 47.89), (2, 11.97), (4, 2.99)])
def test_worked_expansion_heating(field_T: float, rise_K: float) -> None:
    heating = radiation.expansion_heating_K_per_s(number=8e7, length_m=0.09, expansion_time_s=800)
    assert heating == pytest.approx(12.378, rel=5e-3)
    tau_s = radiation.time_constant_s(magnetic_field_T=field_T, **ELECTRONS)
    floor_K = radiation.floor_K(bore_K=10.0, heating_K_per_s=heating, time_constant_s=tau_s)
    assert floor_K - 10.0 == pytest.approx(rise_K, rel=5e-3)
    faster = radiation.expansion_heating_K_per_s(number=8e7, length_m=0.09, expansion_time_s=790)
    assert faster * tau_s != pytest.approx(rise_K, rel=5e-3)


def test_noise_fitted_to_a_base_temperature_gives_it_back() -> None:
    noise = radiation.noise_heating_K_per_s(base_K=31.0, bore_K=12.0, time_constant_s=0.97)
    floor_K = radiation.floor_K(bore_K=12.0, heating_K_per_s=noise, time_constant_s=0.97)
    assert floor_K == pytest.approx(31.0, rel=1e-12)
    assert radiation.noise_heating_K_per_s(base_K=5.0, bore_K=12.0, time_constant_s=0.97) == 0.0
