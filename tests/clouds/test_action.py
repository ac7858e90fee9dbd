"""Bounce action and period against closed forms: pendulum, Morse, quartic, harmonic wells."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.special import ellipk

from wellseq.clouds.action import Profile, bounces, energies_at, profile
from wellseq.clouds.constants import ELEMENTARY_CHARGE_C, PROTON_MASS_KG

WALL_M = 18e-3


def step_up(z_m: np.ndarray) -> np.ndarray:
    """The tanh stand-in for the edge of an electrode; Bell Syst. Tech. J. 18, 1 (1939)."""
    return (1.0 + np.tanh(1.318 * z_m / WALL_M)) / 2.0


def tanh_well(volts: float, half_m: float = 9e-3, points: int = 401) -> Profile:
    """An antiproton between z = -60 and 60 mm, V = -volts (1 - (S(z+h) - S(z-h)))."""
    z = np.linspace(-60e-3, 60e-3, points)
    return profile(z, volts * (1.0 - step_up(z + half_m) + step_up(z - half_m)), PROTON_MASS_KG)


def pendulum(points: int) -> Profile:
    """U = (1 - cos pi z)/2 eV over one period."""
    z = np.linspace(-1.0, 1.0, points)
    return profile(z, (1.0 - np.cos(math.pi * z)) / 2.0, PROTON_MASS_KG)


def pendulum_errors(points: int, shares: list[float]) -> np.ndarray:
    """Relative error of the period at shares of the depth: 4 K(sqrt share)/w0."""
    small = math.pi * math.sqrt(0.5 * ELEMENTARY_CHARGE_C / PROTON_MASS_KG)
    return np.abs(bounces(pendulum(points), shares).period_s * small / (4 * ellipk(shares)) - 1)


def test_pendulum_period_at_a_right_angle() -> None:
    # Handbook of Mathematical Functions, Table 17.1: (2/pi) K(sin 45 deg) = 1.180341.
    well = pendulum(401)
    small = 2.0 / math.sqrt(0.5 * ELEMENTARY_CHARGE_C / PROTON_MASS_KG)
    ratios = bounces(well, [0.5, 0.51]).period_s / small
    assert ratios[0] == pytest.approx(1.180341, abs=1e-6)
    assert ratios[1] != pytest.approx(1.180341, abs=1e-6)


def test_pendulum_period_at_all_energies() -> None:
    errors = pendulum_errors(401, [0.1, 0.3, 0.5, 0.99, 1e-4])
    assert (errors < [3e-9, 6e-10, 6e-10, 6e-9, 5e-7]).all()
    coarse = pendulum_errors(101, [0.1])
    assert 3e-9 < coarse[0] < 3e-7


def test_period_of_the_quartic_well() -> None:
    # x'' = -x^3, amplitude 1: 4 K(1/sqrt2) = 7.416299; Handbook of Mathematical Functions 17.3
    # (from memory).
    x = np.linspace(-1.5, 1.5, 401)
    well = profile(x, x**4 / 4 / ELEMENTARY_CHARGE_C, 1.0)
    periods = bounces(well, np.array([0.25, 0.2501]) / ELEMENTARY_CHARGE_C).period_s
    assert periods[0] == pytest.approx(7.416299, abs=1e-6)
    assert periods[1] != pytest.approx(7.416299, abs=1e-6)


@pytest.mark.parametrize(("points", "tolerance"), [(401, 4e-7), (3001, 1e-10)])
def test_morse_well(points: int, tolerance: float) -> None:
    # w/2pi = w0 sqrt(1-E/D), J = (2D/w0)(1 - sqrt(1-E/D)): exact; values derived.
    depth_eV, steepness = 2.0, 70.0
    z = np.linspace(-0.04, 0.1, points)
    well = profile(z, depth_eV * (1 - np.exp(-steepness * z)) ** 2, PROTON_MASS_KG)
    found = bounces(well, np.array([0.1, 0.5, 0.9]) * depth_eV)
    assert 1 / found.period_s == pytest.approx(
        [206_883.439, 154_201.811, 68_961.146], rel=tolerance + 8e-9
    )
    actions = np.array([2.4001854e-26, 1.3699205e-25, 3.1981403e-25])
    errors = np.abs(found.action_Js / actions - 1)
    assert errors.max() < tolerance + 3e-8
    assert np.abs(1.000001 * found.action_Js / actions - 1).max() > tolerance + 3e-8
    small = steepness * math.sqrt(2 * depth_eV * ELEMENTARY_CHARGE_C / PROTON_MASS_KG)
    exact = 2 * math.pi / (small * np.sqrt(1 - np.array([0.1, 0.5, 0.9])))
    assert np.abs(found.period_s / exact - 1).max() < tolerance


def test_worked_well() -> None:
    well = tanh_well(12.0)
    assert well.depth_eV == pytest.approx(6.9260, rel=1e-4)
    assert well.frequency_rad_per_s / (2 * math.pi) == pytest.approx(346_660, rel=1e-4)
    start_eV = 0.3 * well.depth_eV
    found = bounces(well, start_eV)
    assert found.period_s[0] == pytest.approx(3.31741e-6, rel=1e-4)
    assert found.action_Js[0] / 1.632021e-25 == pytest.approx(1.0, abs=1e-6)
    assert bounces(well, 1.00001 * start_eV).action_Js[0] / 1.632021e-25 > 1.000001
    shallow = tanh_well(3.0)
    assert shallow.depth_eV == pytest.approx(1.73150, rel=1e-4)
    assert energies_at(shallow, found.action_Js)[0] == pytest.approx(0.960933, rel=1e-5)
    assert energies_at(tanh_well(3.001), found.action_Js)[0] != pytest.approx(0.960933, rel=1e-5)


def test_turning_points_are_on_the_spline() -> None:
    well = tanh_well(12.0, points=61)
    shares = np.array([1e-3, 0.2, 0.9, 0.999])
    found = bounces(well, shares * well.depth_eV)
    for places in (found.left_m, found.right_m):
        assert well.above_bottom_eV(places) == pytest.approx(shares * well.depth_eV, rel=1e-11)
    assert (np.diff(found.left_m) < 0).all()
    assert (np.diff(found.right_m) > 0).all()


@settings(max_examples=40, deadline=None)
@given(st.floats(0.2, 20.0), st.floats(4e-3, 14e-3), st.floats(0.01, 0.98), st.floats(1.001, 1.02))
def test_action_rises_as_the_period_says(
    volts: float, half_m: float, share: float, step: float
) -> None:
    well = tanh_well(volts, half_m)
    energy = share * well.depth_eV
    found = bounces(well, [energy, energy * step])
    assert found.action_Js[1] > found.action_Js[0]
    near = bounces(well, [energy * (1 - 1e-5), energy * (1 + 1e-5)]).action_Js
    slope_s = (near[1] - near[0]) / (2e-5 * energy * ELEMENTARY_CHARGE_C)
    assert slope_s / found.period_s[0] == pytest.approx(1 / (2 * math.pi), rel=1e-4)
    assert energies_at(well, found.action_Js) == pytest.approx([energy, energy * step], rel=1e-10)


@given(st.floats(1e-3, 30.0), st.floats(1e-6, 3.0))
def test_harmonic_action_is_energy_over_frequency(megahertz: float, energy_eV: float) -> None:
    w = 2e6 * math.pi * megahertz
    reach_m = 1.5 * math.sqrt(2 * energy_eV * ELEMENTARY_CHARGE_C / PROTON_MASS_KG) / w
    z = np.linspace(-reach_m, reach_m, 41)
    well = profile(z, 0.5 * PROTON_MASS_KG * w * w * z * z / ELEMENTARY_CHARGE_C, PROTON_MASS_KG)
    found = bounces(well, energy_eV)
    exact_Js = energy_eV * ELEMENTARY_CHARGE_C / w
    assert found.action_Js[0] / exact_Js == pytest.approx(1.0, rel=1e-9)
    assert found.period_s[0] * w / (2 * math.pi) == pytest.approx(1.0, rel=1e-9)
    assert well.frequency_rad_per_s == pytest.approx(w, rel=1e-9)


def test_what_is_not_held_has_no_action() -> None:
    well = tanh_well(12.0)
    energies = [-1.0, 0.0, well.depth_eV, 100.0, 1.0]
    assert np.isnan(bounces(well, energies).action_Js).tolist() == [True] * 4 + [False]
    actions = [0.0, 1e-20, bounces(well, 1.0).action_Js[0]]
    assert np.isnan(energies_at(well, actions)).tolist() == [True, True, False]


def test_two_minima_are_told() -> None:
    z = np.linspace(-2.0, 2.0, 201)
    double = profile(z, (z * z - 1) ** 2 + 0.1 * z, PROTON_MASS_KG)
    assert double.bottom_m == pytest.approx(-1.01, abs=0.01)
    assert double.inner_eV == pytest.approx(1.1, abs=0.02)
    assert tanh_well(12.0).inner_eV < 1e-9


@pytest.mark.parametrize(
    ("z", "energy", "mass"),
    [
        (range(7), [1] * 7, 1.0),
        (range(9), range(9), 1.0),
        ([0] * 9, [4, 3, 2, 1, 0, 1, 2, 3, 4], 1.0),
        (range(9), [4, 3, 2, 1, math.nan, 1, 2, 3, 4], 1.0),
        (range(9), [4, 3, 2, 1, 0, 1, 2, 3, 4], 0.0),
    ],
)
def test_what_is_no_well_is_refused(z: list[float], energy: list[float], mass: float) -> None:
    with pytest.raises(ValueError, match=r"profile|mass"):
        profile(list(z), list(energy), mass)
