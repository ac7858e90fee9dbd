"""Turning points, times of travel and actions in a potential that stands still."""

from __future__ import annotations

from math import pi, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tanh_tubes import EV, MASS_KG, tubes

from wellseq.clouds.forces import AxisPotential, Basin
from wellseq.clouds.orbits import action_Js, travel_s, turning_m
from wellseq.fields.hermite import FloatArray

# The worked example of adiabatic ramps (derived): V(z) = -12 V (1 - (S(z + 9 mm) - S(z - 9 mm))).
POTENTIAL = tubes([(-0.009, 0.009)], (-0.2, 0.2)).potential([12.0], -1)


def well_of(potential: AxisPotential) -> Basin:
    basin = potential.basin(0.0)
    assert basin is not None
    return basin


def period_s(potential: AxisPotential, above_eV: FloatArray) -> FloatArray:
    basin = well_of(potential)
    energy = basin.bottom_V + above_eV
    left = turning_m(potential, energy, basin.bottom_m, basin.left_m)
    right = turning_m(potential, energy, basin.bottom_m, basin.right_m)
    return 2.0 * travel_s(potential, energy, left, right, MASS_KG)


def test_period_and_action_of_the_worked_example() -> None:
    # E0 = 2.07781 eV: period 3.31741 us, J0 = 1.632021e-25 J s; w0/2pi = 346.66 kHz (derived).
    above = np.array([2.07781, 2.0820])
    basin = well_of(POTENTIAL)
    period = period_s(POTENTIAL, above)
    action = action_Js(POTENTIAL, basin, basin.bottom_V + above, MASS_KG)
    assert period[0] == pytest.approx(3.31741e-6, rel=1e-4)
    assert action[0] / 1.632021e-25 == pytest.approx(1.0, abs=1e-4)
    assert period[1] != pytest.approx(3.31741e-6, rel=1e-4)
    assert action[1] / 1.632021e-25 != pytest.approx(1.0, abs=1e-4)
    small = period_s(POTENTIAL, np.array([2e-4]))
    assert 1.0 / small[0] == pytest.approx(346.66e3, rel=3e-4)


def test_a_quarter_of_the_volts_at_the_same_action() -> None:
    # All voltages x 0.25: E at the same J is 0.960933 eV above the bottom (derived).
    lower = tubes([(-0.009, 0.009)], (-0.2, 0.2)).potential([3.0], -1)
    basin = well_of(lower)
    above = np.array([0.960933, 0.9620])
    action = action_Js(lower, basin, basin.bottom_V + above, MASS_KG)
    assert action[0] / 1.632021e-25 == pytest.approx(1.0, abs=1e-4)
    assert action[1] / 1.632021e-25 != pytest.approx(1.0, abs=1e-4)


def test_period_is_the_slope_of_the_action() -> None:
    # dJ/dE = 1/w (derived), so 2 pi dJ/dE is the period.
    basin = well_of(POTENTIAL)
    for above in (0.5, 3.0, 6.0):
        energy = basin.bottom_V + np.array([above - 1e-3, above + 1e-3])
        action = action_Js(POTENTIAL, basin, energy, MASS_KG)
        slope = 2.0 * pi * (action[1] - action[0]) / (2e-3 * EV)
        assert slope == pytest.approx(period_s(POTENTIAL, np.array([above]))[0], rel=2e-3)


def parabola(bend: float) -> AxisPotential:
    """U = bend z^2/2 in V between -0.1 and 0.1 m."""
    z_m = -0.1 + 2e-4 * np.arange(1001)
    return AxisPotential.of(-0.1, 2e-4, bend * z_m, bend * 0.005)


@settings(max_examples=40, deadline=None)
@given(bend=st.floats(10.0, 1e6), share=st.floats(1e-3, 0.95))
def test_a_parabola_is_harmonic(bend: float, share: float) -> None:
    # Period 2 pi sqrt(m/k), J = E/w (derived).
    potential = parabola(bend)
    energy = np.array([share * bend * 0.005])
    angular = sqrt(bend * EV / MASS_KG)
    right = turning_m(potential, energy, 0.0, 0.1)
    left = turning_m(potential, energy, 0.0, -0.1)
    assert right[0] == pytest.approx(sqrt(2 * energy[0] / bend), rel=1e-9)
    assert left[0] == pytest.approx(-right[0], rel=1e-9)
    whole = 2 * travel_s(potential, energy, left, right, MASS_KG)[0]
    assert whole == pytest.approx(2 * pi / angular, rel=1e-4)
    basin = Basin(0.0, 0.0, -0.1, bend * 0.005, 0.1, bend * 0.005)
    action = action_Js(potential, basin, energy, MASS_KG)[0]
    assert action / (energy[0] * EV / angular) == pytest.approx(1.0, abs=1e-5)


def test_falling_from_rest_in_an_even_field() -> None:
    # t = sqrt(2 m L/(q E)) (derived).
    slope = AxisPotential.of(0.0, 1e-3, np.full(101, -500.0), 0.0)
    found = travel_s(slope, np.zeros(1), np.zeros(1), np.array([0.08]), MASS_KG)[0]
    assert found == pytest.approx(sqrt(2 * MASS_KG * 0.08 / (EV * 500.0)), rel=1e-5)
    assert found != pytest.approx(sqrt(2 * MASS_KG * 0.081 / (EV * 500.0)), rel=1e-5)


def test_who_cannot_get_there_never_does() -> None:
    hill = parabola(-100.0)
    start = hill.at(-0.05)
    found = travel_s(
        hill, np.array([start - 1e-3, 0.1]), np.full(2, -0.05), np.full(2, 0.05), MASS_KG
    )
    assert np.isinf(found[0])
    assert np.isfinite(found[1])


def test_no_turning_point_above_the_barrier_or_below_the_start() -> None:
    basin = well_of(POTENTIAL)
    energies = np.array([0.5, basin.bottom_V - 0.1, basin.bottom_V + 1.0])
    found = turning_m(POTENTIAL, energies, basin.bottom_m, 0.19)
    assert np.isnan(found[:2]).all()
    assert POTENTIAL.at(found[2]) == pytest.approx(energies[2], abs=1e-12)
