"""Thermal equilibrium: the worked examples, ramps, measured profiles, and honest refusals.

The numbers of the examples are a prototype's (derived); the laws are exact.
"""

from __future__ import annotations

import math
import time
from dataclasses import fields, replace

import numpy as np
import pytest
from plasma_wells import E1, E2, E3, E4, FIELD_T, RADIUS_M, Example, solved

from wellseq.clouds.at_rest import FINDINGS, nothing
from wellseq.clouds.constants import COULOMB_VM, PROTON_MASS_KG
from wellseq.clouds.equilibrium import equilibrium
from wellseq.clouds.figures import Figure
from wellseq.clouds.layout import Cloud, RadialProfile, empty_wells, grid_of, tube_of
from wellseq.clouds.newton import CHARGES_PER_VM
from wellseq.clouds.wall import wall_of_steps

# Vacuum 0.1 %, full 0.3 %, n0 1 %; length and κ 1 %.
ROWS = [
    (E1, 69.857, 57.804, 3.707e14, 66.0e-3, 1.677e6),
    (E2, 2.6303, 2.5475, 2.463e13, 7.7e-3, 6.686e5),
    (E3, 7.5469, 6.2812, 5.055e13, 23.1e-3, 2.287e5),
    (E4, 49.086, 26.517, 1.726e15, 19.4e-3, 7.809e6),
]


@pytest.mark.parametrize(("example", "vacuum", "depth", "density", "length", "pressure"), ROWS)
def test_worked_examples(
    example: Example, vacuum: float, depth: float, density: float, length: float, pressure: float
) -> None:
    cloud = solved(example).clouds[0]
    assert cloud.outside == ()
    assert cloud.vacuum_depth_eV == pytest.approx(vacuum, rel=1e-3)
    assert cloud.depth_eV.value == pytest.approx(depth, rel=3e-3)
    assert cloud.density_per_m3.value == pytest.approx(density, rel=1e-2)
    assert cloud.length_m.value == pytest.approx(length, rel=1e-2)
    assert cloud.pressure_V_per_m2.value == pytest.approx(pressure, rel=1e-2)
    assert cloud.radius_m == pytest.approx(example.radius_m, rel=1e-9)
    assert cloud.depth_eV.low < depth < cloud.depth_eV.high


def test_rotation_and_debye_length_of_the_examples() -> None:
    # 266.9 kHz and 36.40 kHz at 2 T; lambda_D over rp 0.04, 0.83, 0.08, 0.04.
    for example, kilohertz in ((E1, 266.9), (E3, 36.40)):
        rotation = solved(example).clouds[0].rotation_rad_per_s.value
        assert rotation / (2e3 * math.pi) == pytest.approx(kilohertz, rel=5e-3)
    for example, share in ((E1, 0.04), (E2, 0.83), (E3, 0.08), (E4, 0.04)):
        debye = solved(example).clouds[0].debye_length_m
        assert debye / example.radius_m == pytest.approx(share, abs=6e-3)


def test_three_percent_of_particles_would_be_seen() -> None:
    cloud = E4.solved(number=1.03 * E4.number).clouds[0]
    assert cloud.depth_eV.value != pytest.approx(26.517, rel=3e-3)
    assert cloud.density_per_m3.value != pytest.approx(1.726e15, rel=1e-2)


# E4 filled further (eV): within 0.1 % of the vacuum depth, of which it is a small difference.
@pytest.mark.parametrize(("number", "depth"), [(8e7, 13.748), (1.1e8, 6.410), (1.4e8, 0.806)])
def test_filled_further(number: float, depth: float) -> None:
    cloud = E4.solved(number=number).clouds[0]
    assert cloud.depth_eV.value == pytest.approx(depth, abs=0.05)
    assert cloud.edge_share < 1e-18


def everything_unknown(cloud) -> bool:
    """Whether a cloud has no figure but its vacuum depth."""
    for field in fields(cloud):
        value = getattr(cloud, field.name)
        if field.name in ("vacuum_depth_eV", "outside"):
            continue
        if isinstance(value, Figure) and (value.known or not math.isnan(value.value)):
            return False
        if isinstance(value, float) and not math.isnan(value):
            return False
    return True


def test_overfull_has_no_figure() -> None:
    found = E4.solved(number=1.8e8)
    assert everything_unknown(found.clouds[0])
    assert {FINDINGS[reason.quantity] for reason in found.outside} == {"well-overfull"}
    assert found.outside[0].value > 1e-6
    assert not everything_unknown(solved(E4).clouds[0])
    assert everything_unknown(nothing(1.0, ()))


def test_gauss_number_and_radius() -> None:
    found = solved(E3)
    share = found.solved.shares[0]
    assert abs(share.sum() - 1) < 1e-10
    inside = found.grid.apply(found.solved.own_V).sum() * CHARGES_PER_VM
    assert inside == pytest.approx(E3.number, rel=1e-10)
    mean_r2 = (share * found.grid.r2_m2[: share.shape[1]]).sum()
    assert mean_r2 == pytest.approx(E3.radius_m**2 / 2, rel=1e-9)


def test_a_cold_core_has_the_density_of_its_rotation() -> None:
    cloud = solved(E1).clouds[0]
    cold = cloud.pressure_V_per_m2.value / (math.pi * COULOMB_VM)
    assert cloud.density_per_m3.value == pytest.approx(cold, rel=1e-3)
    plain = solved(E2).clouds[0]
    assert plain.density_per_m3.value < 0.2 * plain.pressure_V_per_m2.value / (math.pi * COULOMB_VM)


def test_given_rotation_gives_back_the_radius() -> None:
    held = solved(E3)
    pressure = held.clouds[0].pressure_V_per_m2.value
    free = E3.solved(radius_m=None, pressure_V_per_m2=pressure, grid=held.grid)
    assert free.clouds[0].radius_m == pytest.approx(E3.radius_m, rel=1e-4)
    assert free.clouds[0].depth_eV.value == pytest.approx(held.clouds[0].depth_eV.value, abs=1e-4)
    faster = E3.solved(radius_m=None, pressure_V_per_m2=1.1 * pressure)
    assert faster.clouds[0].radius_m < 0.98 * E3.radius_m


def test_own_profile_gives_the_same_potential() -> None:
    ends = (-E3.tube_m, E3.tube_m)
    wells = empty_wells(E3.wall.on_axis().exact, RADIUS_M, [E3.cloud()], ends)
    held = E3.solved(grid=grid_of(E3.wall, [E3.cloud()], wells, ends, fineness=0.7))
    rings = held.solved.shares[0].shape[1]
    column = held.solved.shares[0].sum(axis=0) / held.grid.area_m2[:rings]
    profile = RadialProfile(held.grid.r_m[:rings], column)
    own = E3.solved(radius_m=None, profile=profile, grid=held.grid)
    assert np.abs(own.solved.own_V - held.solved.own_V).max() < 1e-9
    assert own.clouds[0].outside == ()
    # A hollow profile of the same cloud is another one.
    hollow = RadialProfile(np.array([0.0, 0.8e-3, 1.1e-3]), np.array([0.0, 1.0, 0.0]))
    other = E3.solved(radius_m=None, profile=hollow, grid=held.grid)
    assert np.abs(other.solved.own_V - held.solved.own_V).max() > 0.05
    assert other.clouds[0].depth_eV.value > held.clouds[0].depth_eV.value


def test_a_ramp_goes_on_from_step_to_step() -> None:
    last, steps = None, []
    for end_V in np.linspace(8.0, 7.0, 4):
        example = replace(E3, end_V=float(end_V))
        last = example.solved(start=last)
        steps.append(last.solved.steps)
    cold = replace(E3, end_V=7.0).solved()
    assert last.clouds[0].depth_eV.value == pytest.approx(cold.clouds[0].depth_eV.value, rel=1e-3)
    assert min(steps[1:]) <= 11 < cold.solved.steps


def test_eight_debye_lengths_per_cell_converge() -> None:
    # 300 K to 0.3 K: depth 6.2784 to 6.2835 eV; at 0.3 K the plasma is too strongly coupled for
    # the forecast, but the solver must not mind.
    depths = []
    for kelvin in (300.0, 0.3):
        found = E3.solved(temperature_K=kelvin)
        assert found.solved.decrement <= 1e-8
        axis_V = found.total_on_axis_V
        depths.append(axis_V.max() - axis_V[np.abs(found.grid.z_m) < 0.02].min())
    assert depths == pytest.approx([6.2784, 6.2835], rel=5e-4)
    assert [reason.quantity for reason in found.outside] == ["coupling"]
    cell = found.grid.r_face_m[1]
    density = 5.05e13
    debye = math.sqrt(0.3 * 1.380649e-23 * 8.854e-12 / density) / 1.602177e-19
    assert cell / debye > 8


def test_too_dense_for_the_field() -> None:
    weak = equilibrium(
        wall=E3.wall,
        clouds=[E3.cloud(mass_kg=PROTON_MASS_KG)],
        magnetic_field_T=0.3,
        tube_m=(-0.13, 0.13),
    )
    assert [FINDINGS[reason.quantity] for reason in weak.outside][:1] == ["too-dense"]
    assert everything_unknown(weak.clouds[0])


def test_both_signs_lower_each_other_s_potential() -> None:
    wall = wall_of_steps(
        [-0.06, -0.02, 0.02, 0.06], [-40.0, 20.0, -20.0, 20.0, -40.0], RADIUS_M, 1e-3
    )
    base = {"mass_kg": PROTON_MASS_KG, "temperature_K": 300.0, "radius_m": 1e-3}
    lone = Cloud(charge_e=1, number=2e6, between_m=(-0.04, 0.04), **base)
    other = Cloud(charge_e=-1, number=2e6, between_m=(-0.08, 0.0), **base)
    alone = equilibrium(wall=wall, clouds=[lone], magnetic_field_T=FIELD_T)
    both = equilibrium(wall=wall, clouds=[lone, other], magnetic_field_T=FIELD_T)
    assert both.outside == ()
    left, right = both.clouds[0].depth_left_eV.value, both.clouds[0].depth_right_eV.value
    assert left < alone.clouds[0].depth_left_eV.value - 0.1
    assert right == pytest.approx(alone.clouds[0].depth_right_eV.value, abs=0.02)
    inside = both.grid.apply(both.solved.own_V).sum() * CHARGES_PER_VM
    assert abs(inside) < 1e-3


def test_a_field_s_own_axis_ties_the_depth() -> None:
    curve = E3.wall.on_axis()
    found = equilibrium(
        wall=E3.wall,
        clouds=[E3.cloud()],
        magnetic_field_T=FIELD_T,
        tube_m=(-0.13, 0.13),
        axis_V=lambda z_m: 1.01 * curve.exact(z_m),
    )
    gain = 0.01 * found.clouds[0].vacuum_depth_eV / 1.01
    depth = solved(E3).clouds[0].depth_eV.value
    # The filled depth rises by as much as the empty one.
    assert gain > 0.07
    assert found.clouds[0].depth_eV.value == pytest.approx(depth + gain, abs=1e-3)


def test_speed_of_a_solve() -> None:
    # 10,000 cells cold: at most 1 s of one core's time.
    cloud = E3.cloud()
    ends = (-E3.tube_m, E3.tube_m)
    wells = empty_wells(E3.wall.on_axis().exact, RADIUS_M, [cloud], ends)
    grid = grid_of(E3.wall, [cloud], wells, ends, fineness=0.82)
    assert 9_000 < grid.shape[0] * grid.shape[1] < 12_000
    before = time.thread_time()
    found = E3.solved(grid=grid)
    assert time.thread_time() - before < 1.0
    assert found.clouds[0].depth_eV.value == pytest.approx(6.2812, rel=3e-3)


BAD = [
    ({"number": 0.0}, "number of particles"),
    ({"number": math.nan}, "number of particles"),
    ({"number": 1e14}, "space charge of a full well"),
    ({"temperature_K": 0.0}, "temperature"),
    ({"temperature_K": 1e8}, "vacuum depth"),
    ({"radius_m": 0.02}, "radius"),
    ({"radius_m": math.nan}, "radius"),
    ({"radius_m": None, "pressure_V_per_m2": -1.0}, "pressure"),
    ({"between_m": (0.0, 0.001)}, "distance of the barriers"),
    ({"between_m": (math.nan, 0.001)}, "distance of the barriers"),
    ({"charge_e": 1}, "vacuum depth"),
]


@pytest.mark.parametrize(("changes", "quantity"), BAD)
def test_bad_input_has_no_figure(changes, quantity: str) -> None:
    found = E1.solved(**changes)
    assert quantity in {reason.quantity for reason in found.outside}
    assert everything_unknown(found.clouds[0])


def test_no_field_and_no_cloud() -> None:
    for clouds, field_T in (([E1.cloud()], 0.0), ([], 2.0)):
        assert equilibrium(wall=E1.wall, clouds=clouds, magnetic_field_T=field_T).outside
    with pytest.raises(ValueError, match="one of radius"):
        E1.solved(pressure_V_per_m2=1.0)
    with pytest.raises(ValueError, match="no solution"):
        _ = E1.solved(number=0.0).total_on_axis_V


def test_a_bore_too_long_for_the_grid() -> None:
    wall = wall_of_steps([-5.0, 5.0], [-70.0, 0.0, -70.0], 5e-3, 1e-3)
    cloud = replace(E1.cloud(), between_m=(-5.03, 5.03), number=1e8)
    found = equilibrium(wall=wall, clouds=[cloud], magnetic_field_T=FIELD_T)
    assert [reason.quantity for reason in found.outside] == ["cells of the grid"]


def test_same_input_same_bits() -> None:
    first, second = E2.solved(), E2.solved()
    assert first.solved.own_V.tobytes() == second.solved.own_V.tobytes()
    assert first.clouds == second.clouds


def test_the_tube_ends_do_not_matter() -> None:
    short = solved(E3).clouds[0].depth_eV.value
    cloud = replace(E3.cloud(), between_m=(-0.1, 0.1))
    ends = tube_of(E3.wall, [cloud])
    assert ends[1] == pytest.approx(0.1 + 6 * RADIUS_M)
    long = equilibrium(wall=E3.wall, clouds=[cloud], magnetic_field_T=FIELD_T)
    assert long.clouds[0].depth_eV.value == pytest.approx(short, rel=1e-3)
