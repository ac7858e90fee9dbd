"""The table of forces: its slopes, the potential that fits them, and the wells in it."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tanh_tubes import lined_up, step, tubes

from wellseq.clouds.forces import AxisPotential, table_of, tabulated
from wellseq.fields.field import Field
from wellseq.model.hardware import Converter, Electrode
from wellseq.model.surroundings import MagneticField
from wellseq.model.trap import Trap

WELL = tubes([(-0.08, -0.012), (-0.012, 0.012), (0.012, 0.036), (0.036, 0.4)], (-0.25, 0.57))


def small_trap() -> Trap:
    """Three rings of a bore of 12 mm radius."""
    spans = ((-0.03, -0.011), (-0.01, 0.01), (0.011, 0.03))
    outputs = [
        Converter(
            name=f"out{k}", range_V=(-100.0, 100.0), slew_V_per_s=1e6, bits=16, clock_s="1 us"
        )
        for k in range(3)
    ]
    electrodes = [
        Electrode(name=f"E{k}", from_m=low, to_m=high, radius_m=0.012, output=f"out{k}")
        for k, (low, high) in enumerate(spans)
    ]
    return Trap(
        name="three rings",
        field=MagneticField(uniform_T=1.0),
        electrodes=tuple(electrodes),
        outputs=tuple(outputs),
    )


def test_a_trap_s_table_is_its_field() -> None:
    field = Field(small_trap())
    table = table_of(field)
    assert table.step_m <= 2e-4
    volts = np.array([-40.0, 7.0, 25.0])
    found = table.potential(volts, 1)
    z_m = np.linspace(-0.1, 0.1, 1237)
    inside = (found.z_m > -0.1) & (found.z_m < 0.1)
    assert found.slope_V_per_m[inside] == pytest.approx(
        field.at(volts, found.z_m[inside], 1), rel=2e-3, abs=0.5
    )
    assert found.at(z_m) == pytest.approx(field.at(volts, z_m), abs=1e-5)
    assert not np.allclose(found.at(z_m), field.at(volts * 1.000002, z_m), rtol=0, atol=1e-5)


def test_charges_of_the_other_sign_see_it_upside_down() -> None:
    plus, minus = (WELL.potential([-25, 0, -14, 12], sign) for sign in (1, -1))
    z_m = np.linspace(-0.1, 0.3, 99)
    assert plus.at(z_m) == pytest.approx(-minus.at(z_m))


def test_potential_and_slope_fit_each_other() -> None:
    potential = WELL.potential([-25, 0, -14, 12], -1)
    z_m = np.linspace(-0.1, 0.3, 2003)
    for half in (1e-6, 3e-6):
        differenced = (potential.at(z_m + half) - potential.at(z_m - half)) / (2 * half)
        place = (z_m - potential.start_m) / potential.step_m
        slope = np.interp(place, np.arange(potential.node_V.size), potential.slope_V_per_m)
        assert differenced == pytest.approx(slope, abs=2.0)


def test_the_well_of_the_worked_example() -> None:
    # Depth 3.398 eV of the example of section "test-particle flight" (derived; invented trap).
    basin = WELL.potential([-25, 0, -14, 12], -1).basin(0.0)
    assert basin is not None
    assert basin.depth_V == pytest.approx(3.398, abs=0.001)
    assert basin.barrier_V == basin.right_V < basin.left_V
    shallow = WELL.potential([-25, 0, -13.9, 12], -1).basin(0.0)
    assert shallow is not None
    assert shallow.depth_V != pytest.approx(3.398, abs=0.001)


def test_extrema_lie_between_nodes() -> None:
    fine = np.linspace(-0.1, 0.1, 400_001)
    exact = 50.0 * (step(fine + 0.05) - step(fine + 0.01) + step(fine - 0.01) - step(fine - 0.05))
    depth = exact.max() - exact[fine.size // 2]
    for step_m, near in ((2e-4, 1e-5), (7e-4, 1e-3)):
        table = tubes([(-0.05, -0.01), (-0.01, 0.01), (0.01, 0.05)], (-0.25, 0.25), step_m)
        basin = table.potential([-50.0, 0.0, -50.0], -1).basin(0.004)
        assert basin is not None
        assert basin.bottom_m == pytest.approx(0.0, abs=1e-9)
        assert basin.right_m == pytest.approx(abs(fine[np.argmax(exact)]), abs=2e-5)
        assert basin.depth_V == pytest.approx(depth, abs=near)
        assert basin.depth_V != pytest.approx(depth * 1.0001, abs=near)


def test_no_well_where_everything_slides_out() -> None:
    assert WELL.potential([0, 10, 0, 0], 1).basin(0.005) is None
    assert WELL.potential([0, 0, 0, 0], -1).basin(0.0) is None
    assert WELL.potential([-25, 0, -14, 12], -1).basin(9.0) is None


def test_a_particle_is_held_below_both_walls_only() -> None:
    potential = WELL.potential([-25, 0, -14, 12], -1)
    basin = potential.basin(0.0)
    assert basin is not None
    place = np.full(3, basin.bottom_m)
    energies = np.array([basin.barrier_V - 0.01, basin.barrier_V + 0.01, 30.0])
    assert potential.holds(place, energies).tolist() == [True, False, False]
    outside = np.array([-0.24999, 0.9, -3.0])
    assert not potential.holds(outside, np.full(3, -50.0)).any()


def test_a_table_must_reach_out_to_where_there_is_no_field() -> None:
    with pytest.raises(ValueError, match="slope at the ends"):
        tubes([(-0.03, 0.03)], (-0.05, 0.05))


def test_one_more_column_for_a_cloud_s_own_potential() -> None:
    own = WELL.potential([0, 1, 0, 0], 1)
    more = WELL.plus("own", own.slope_V_per_m, float(own.node_V[0]))
    assert more.names[-1] == "own"
    both = more.potential([0, 2, 0, 0, 1.0], 1)
    assert both.node_V == pytest.approx(3 * own.node_V, abs=1e-12)


@settings(max_examples=40, deadline=None)
@given(volts=st.lists(st.floats(-100, 100), min_size=4, max_size=4), at=st.floats(-0.1, 0.4))
def test_barriers_stand_above_the_bottom_and_around_it(volts: list[float], at: float) -> None:
    basin = WELL.potential(volts, 1).basin(at)
    if basin is not None:
        assert basin.left_m < basin.bottom_m < basin.right_m
        assert basin.depth_V > 0.0
        again = WELL.potential(volts, 1).basin(basin.bottom_m)
        assert again is not None
        assert again.bottom_V == pytest.approx(basin.bottom_V, abs=1e-3)


def test_slopes_of_given_potentials_are_differenced_finely() -> None:
    table = tabulated(["one"], lambda z: step(z + 0.01)[None] - step(z - 0.01)[None], (-0.2, 0.2))
    z_m = table.start_m + table.step_m * np.arange(table.slope.shape[1])
    width = 1.318 / 0.018
    exact = width / 2 * (np.cosh(width * (z_m + 0.01)) ** -2 - np.cosh(width * (z_m - 0.01)) ** -2)
    assert table.slope[0] == pytest.approx(exact, abs=3e-4 * np.abs(exact).max())
    assert table.slope[0].sum() * table.step_m == pytest.approx(0.0, abs=1e-9)


def test_crests_are_no_lower_than_what_is_between_nodes() -> None:
    potential = lined_up([-0.05, -0.015, 0.015, 0.05], (-0.25, 0.25)).potential([9, -9, 9], 1)
    inner = potential.at(potential.z_m[:-1, None] + potential.step_m * np.linspace(0, 1, 9))
    assert (potential.crest_V[:, None] >= inner - 1e-12).all()
    assert isinstance(potential, AxisPotential)
