"""The field of a trap: what users call, its accuracy between nodes, and its refusals."""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import atomic_mass, elementary_charge
from stacks import bench, pitched, stand, unit_step

from wellseq.fields.field import Field
from wellseq.fields.uniform import Axis, stack_of, unit_potentials


@dataclass(frozen=True)
class Particle:
    mass_kg: float
    charge_C: float


def test_attributes():
    field = bench(5)
    assert field.electrodes == ("E0", "E1", "E2", "E3", "E4")
    assert field.radius_m == 0.015
    assert field.phi.shape == (5, 5, field.z_m.size)
    assert field.z_m[1] - field.z_m[0] == pytest.approx(field.step_m)
    assert field.error_V_per_V < 1e-10
    assert field.gap_error_V_per_V.shape == (5,)
    assert field.span_m("E1") == (0.0134, 0.0134 * 2 - 0.001)
    with pytest.raises(ValueError, match="read-only"):
        field.phi[0, 0, 0] = 1.0


def test_between_nodes_the_quintic_is_within_its_error():
    field = bench(5)
    stack = stack_of(pitched(5).electrodes)
    fine = Axis(field.z_m[0], field.step_m / 7, (field.z_m.size - 1) * 7 + 1)
    exact = unit_potentials(stack, fine, (0.0,), (0, 1, 2))[0]
    for order in (0, 1, 2):
        worst = max(
            np.abs(field.at(unit, fine.z_m, order) - exact[order, e]).max()
            for e, unit in enumerate(np.eye(5))
        )
        assert 0.05 * field.error(order) < worst < field.error(order)


def test_potential_is_exact_to_rounding_on_and_off_the_axis():
    field = Field(stand([(0.0, 30.0)], 1.0))
    z = np.array([-2.0, -0.7654321, 0.7123456, 3.3])
    for r in (0.0, 0.25, 0.9):
        found = field.potential({"E0": 100.0}, z, r)
        np.testing.assert_allclose(found, 100 * unit_step(z, r), rtol=0, atol=2e-11)
        wrong = field.potential({"E0": 100.1}, z, r)
        assert np.abs(wrong - 100 * unit_step(z, r)).max() > 1e-2


def test_potential_keeps_the_shape_and_reaches_beyond_the_nodes():
    field = bench(5)
    assert field.potential({"E1": 1.0}, 0.01).shape == ()
    assert field.potential({"E1": 1.0}, np.zeros((2, 3)), 0.005).shape == (2, 3)
    assert field.potential({}, [0.0, 0.1]).tolist() == [0.0, 0.0]
    far = field.z_m[-1] + 0.03
    longer = Axis(far, 0.001, 2)
    exact = unit_potentials(stack_of(pitched(5).electrodes), longer)[0, 0, 1, 0]
    assert field.potential({"E1": 1.0}, far) == pytest.approx(exact, rel=1e-5, abs=1e-16)


@settings(max_examples=30, deadline=None, derandomize=True)
@given(st.lists(st.floats(-200, 200), min_size=5, max_size=5), st.floats(-3, 3))
def test_superposition_and_linearity(levels, factor):
    field = bench(5)
    z = np.linspace(-0.05, 0.12, 40)
    whole = field.potential(dict(zip(field.electrodes, levels, strict=True)), z)
    parts = sum(
        field.potential({name: v}, z) for name, v in zip(field.electrodes, levels, strict=True)
    )
    np.testing.assert_allclose(whole, parts, rtol=0, atol=1e-10)
    vector = np.array(levels)
    np.testing.assert_allclose(
        field.at(factor * vector, z), factor * field.at(vector, z), rtol=0, atol=1e-10
    )


def test_axial_frequency_from_a_published_coefficient():
    # Open-endcap trap: C2 = 0.5449 +- 0.0003 (Int. J. Mass Spectrom. Ion Processes 88, 319 (1989),
    # from memory); omega_z^2 = q V0 C2/(m d^2) with the ring at -V0/2, endcaps at +V0/2.
    z0, rho0, dzc, ze, volts = 0.01, 1.0239, 0.8351, 4.327, 10.0
    half = [0.0, 1 - dzc, 1.0, 1 + ze]
    spans = list(pairwise(half))
    edges = [(-q, -p) for p, q in reversed(spans[1:])] + [(-half[1], half[1])] + spans[1:]
    field = Field(stand([(p * z0, q * z0) for p, q in edges], rho0 * z0))
    levels = {"E0": volts / 2, "E2": -volts / 2, "E4": volts / 2}
    # The published trap ends in grounded planes 5.3 z0 away; here the tube goes on: 1e-5 apart.
    (well,) = field.wells(levels, +1, (-z0, z0))
    ion = Particle(12 * atomic_mass, elementary_charge)
    d2 = (z0**2 + (rho0 * z0) ** 2 / 2) / 2
    omega = 2 * np.pi * field.axial_frequency_Hz(well, ion)
    assert omega**2 * ion.mass_kg * d2 / (ion.charge_C * volts) == pytest.approx(0.5449, abs=3e-4)
    (well,) = field.wells({name: v * 1.001 for name, v in levels.items()}, +1, (-z0, z0))
    omega = 2 * np.pi * field.axial_frequency_Hz(well, ion)
    assert omega**2 * ion.mass_kg * d2 / (ion.charge_C * volts) != pytest.approx(0.5449, abs=3e-4)


def test_frequency_goes_with_the_root_of_charge_over_mass():
    field = bench(5)
    (well,) = field.wells({"E1": 10.0, "E3": 10.0}, +1)
    light = field.axial_frequency_Hz(well, Particle(1.0, 1.0))
    assert field.axial_frequency_Hz(well, Particle(4.0, -1.0)) == pytest.approx(light / 2)


def test_names_are_compared_in_one_form_and_unknown_ones_refused():
    field = Field(stand([(0.0, 1.0), (1.0, 2.0)]))
    with pytest.raises(ValueError, match=r"no electrode 'E7'.*E"):
        field.vector({"E7": 1.0})
    with pytest.raises(ValueError, match="no electrode 'C9'"):
        field.span_m("C9")
    with pytest.raises(ValueError, match="cannot be at nan V"):
        field.vector({"E0": float("nan")})
    assert field.vector({"E1": -2}).tolist() == [0.0, -2.0]


@pytest.mark.parametrize(
    ("call", "said"),
    [
        (lambda f: f.potential({"E0": 1.0}, 0.0, 0.0149), "0.9 of the bore"),
        (lambda f: f.potential({"E0": 1.0}, [0.0, np.nan]), "not a number"),
        (lambda f: f.wells({"E0": 1.0}, 0), "sign of a charge"),
        (lambda f: f.wells({"F0": 1.0}, 1), "did you mean|electrodes"),
        (lambda f: f.nodes_within((0.02, 0.01)), "not a span"),
        (lambda f: f.nodes_within((0.0, 9.0)), "not a span"),
        (lambda f: f.nodes_within(tuple(f.z_m[5] + f.step_m * np.array([0.1, 0.2]))), "narrower"),
    ],
)
def test_refusals_say_what_is_wrong(call, said):
    with pytest.raises(ValueError, match=said):
        call(bench(5))


def test_least_depth_of_a_ramp():
    field = bench(7)
    start = {"E2": 30.0, "E3": -10.0, "E4": 30.0}
    end = {"E2": 10.0, "E3": -10.0, "E4": 40.0}
    (well,) = field.wells(start, 1)
    spans = [field.span_m(name) for name in ("E2", "E3", "E4")]
    bound = field.least_depth(start, end, 1, spans[1], (-0.05, spans[0][1]), (spans[2][0], 0.14))
    assert 0.0 <= bound.left.upper_bound_V - bound.left.lower_bound_V < 1e-5
    assert bound.least is bound.left
    assert bound.left.fraction == 1.0
    (later,) = field.wells(end, 1)
    assert bound.left.lower_bound_V == pytest.approx(later.depth_left_V, abs=1e-5)
    assert bound.right.lower_bound_V == pytest.approx(well.depth_right_V, abs=1e-5)
    # Regions in metres are taken inwards: a narrower well region can only cost depth.
    narrow = (spans[1][0] + 0.004, spans[1][1] - 0.0061)
    less = field.least_depth(start, end, 1, narrow, (-0.05, spans[0][1]), (spans[2][0], 0.14))
    assert less.least.lower_bound_V < bound.least.lower_bound_V
